//! A straight magnetization line B = mu H: a material of constant permeability that never saturates, or air.

use super::Magnetization;
use crate::magnetics::MU0;

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
        Linear { permeability: MU0 * permeability }
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
