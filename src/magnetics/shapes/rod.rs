//! `shape: rod`: a straight round core, open at both ends, with the winding on it.
//!
//! What closes the path is air all round: the core magnetizes along its length as [`crate::magnetics::open_core`] says.
//! The winding is centred, a current sheet on the mean of its layers.

use super::{Around, Shape, ShapeKind};
use crate::magnetics::geometry::{Fault, Geometry};
use crate::magnetics::open_core::{Cylinder, sheet_coil, with_core};
use crate::magnetics::winding::WindingPlan;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::{FRAC_PI_4, PI};

/// `shape: rod`.
pub const KIND: ShapeKind = ShapeKind {
    word: "rod",
    about: "a straight round core with the winding on it",
    keys: &[KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required("diameter", Takes::Quantity(LENGTH), "diameter of the rod"),
    Key::required("length", Takes::Quantity(LENGTH), "length of the rod"),
    Key::optional(
        "winding_length",
        Takes::Quantity(LENGTH),
        "length of the winding, in the middle; the rod's unless said",
    ),
    Key::optional(
        "winding_diameter",
        Takes::Quantity(LENGTH),
        "mean diameter of the winding; on the rod itself unless said, with as many layers as its wire takes",
    ),
];

#[derive(Debug)]
struct Rod {
    diameter: Value,
    length: Value,
    winding_length: Option<Value>,
    winding_diameter: Option<Value>,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let (diameter, length) = (fields.positive("diameter"), fields.positive("length"));
    let winding_length = fields.positive("winding_length");
    let winding_diameter = fields.positive("winding_diameter");
    if fields.has("winding_length") {
        winding_length?;
    }
    if fields.has("winding_diameter") {
        winding_diameter?;
        around_the_rod(fields)?;
    }
    Some(Box::new(Rod {
        diameter: diameter?,
        length: length?,
        winding_length,
        winding_diameter,
    }))
}

fn around_the_rod(fields: &Fields<'_>) -> Option<()> {
    let (rod, winding) = (
        fields.amount("diameter")?,
        fields.amount("winding_diameter")?,
    );
    if winding.low >= rod.high {
        return Some(());
    }
    let headline = "winding_diameter must not be below the rod's diameter";
    fields.error(
        "winding_diameter",
        "out-of-range",
        headline,
        "inside the rod",
        None,
    );
    None
}

impl Shape for Rod {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let core = Cylinder {
            diameter: values[self.diameter],
            length: values[self.length],
        };
        let length = self
            .winding_length
            .map_or(core.length, |value| values[value]);
        super::above_zero(&[core.diameter, core.length, length])?;
        super::slender(core.length / core.diameter, length / core.length)?;
        let diameter = match self.winding_diameter {
            Some(value) => values[value],
            None => wound_on(core.diameter, length, around.winding),
        };
        if !(diameter >= core.diameter && diameter < 1e3 * core.diameter) {
            return Err(Fault {
                word: "out-of-range",
                key: "winding_diameter",
                text: "the winding's mean diameter is below that of its rod, or a thousand times as wide".into(),
                help: "check both diameters",
            });
        }
        let (coil, permeance) = sheet_coil(diameter, length);
        let mut air = Geometry::in_air(length, FRAC_PI_4 * diameter * diameter, permeance);
        air.mean_turn = Some(PI * diameter);
        air.layer_breadth = Some(length);
        with_core(air, permeance, &coil, core, around.permeability)
    }
}

/// Mean diameter [m] of a winding of `length` [m] on a rod: half of the layers that its wire takes lie below it.
fn wound_on(rod: f64, length: f64, winding: Option<&WindingPlan>) -> f64 {
    let layers = winding.and_then(|winding| {
        let wire = winding.wire.as_ref()?;
        let side_by_side = (length / wire.outer).floor().max(1.0);
        Some((winding.turns as f64 / side_by_side).ceil() * wire.outer)
    });
    rod + layers.unwrap_or(0.0)
}
