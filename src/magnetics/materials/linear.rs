//! A straight magnetization line B = mu H: a material of constant permeability that never saturates, or air.

use super::{INITIAL_PERMEABILITY, Magnetization, Magnetized, Material, MaterialKind};
use crate::magnetics::MU0;
use crate::magnetics::geometry::Fault;
use crate::netlist::{Fields, Value, Values};
use std::sync::Arc;

/// A material told by its permeability alone.
pub const KIND: MaterialKind = MaterialKind {
    word: "linear",
    about: "a constant permeability that never saturates",
    told_by: "initial_permeability",
    keys: &[INITIAL_PERMEABILITY],
    read,
};

#[derive(Debug)]
struct Written(Value);

fn read(fields: &Fields<'_>) -> Option<Box<dyn Material>> {
    Some(Box::new(Written(fields.checked(
        "initial_permeability",
        "1 or more",
        |amount| amount.low >= 1.0,
    )?)))
}

impl Material for Written {
    fn derive(&self, values: &Values, _temperature: f64) -> Result<Magnetized, Fault> {
        let permeability = values[self.0];
        if permeability >= 1.0 {
            return Ok(Magnetized {
                curve: Arc::new(Linear::relative(permeability)),
                remarks: Vec::new(),
            });
        }
        Err(Fault {
            word: "out-of-range",
            key: "initial_permeability",
            text: "initial_permeability must be 1 or more".into(),
            help: "air has 1",
        })
    }
}

/// Constant permeability.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Linear {
    permeability: f64,
}

impl Linear {
    /// Air: mu0.
    pub const AIR: Linear = Linear { permeability: MU0 };

    /// A relative permeability, 1 or more.
    pub fn relative(permeability: f64) -> Self {
        Linear {
            permeability: MU0 * permeability,
        }
    }
}

impl Magnetization for Linear {
    fn flux_density(&self, field: f64) -> (f64, f64) {
        (self.permeability * field, self.permeability)
    }

    fn field(&self, flux_density: f64) -> (f64, f64) {
        (flux_density / self.permeability, 1.0 / self.permeability)
    }

    fn energy_density(&self, flux_density: f64) -> f64 {
        0.5 * flux_density * flux_density / self.permeability
    }

    fn bends(&self) -> Vec<f64> {
        Vec::new()
    }
}
