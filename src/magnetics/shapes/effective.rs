//! `shape: effective`: a core told by its effective figures.
//!
//! H length + (B/mu0) gap/F = N i, `length` being that of the iron and F the fringing factor (1 unless a rule is named).

use super::{Around, Shape, ShapeKind};
use crate::magnetics::fringing::spec::{EFFECTIVE_KEYS, Spec};
use crate::magnetics::gaps::{self, Gapping, Legs};
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{AREA, LENGTH};

/// `shape: effective`.
pub const KIND: ShapeKind = ShapeKind {
    word: "effective",
    about: "a core told by its effective length and area",
    keys: &[KEYS, gaps::KEYS, EFFECTIVE_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required(
        "length",
        Takes::Quantity(LENGTH),
        "effective length of the iron",
    ),
    Key::required("area", Takes::Quantity(AREA), "effective area"),
    Key::optional(
        "minimum_area",
        Takes::Quantity(AREA),
        "smallest section, where the flux density peaks",
    ),
    Key::optional(
        "mean_turn",
        Takes::Quantity(LENGTH),
        "mean length of a turn, for the resistance of a wire",
    ),
    Key::optional("window_area", Takes::Quantity(AREA), "space for windings"),
];

/// Room for round wire beside bobbin walls and layer insulation: common practice.
const PRACTICAL_FILL: f64 = 0.8;

#[derive(Debug)]
struct Effective {
    length: Value,
    area: Value,
    minimum_area: Option<Value>,
    gapping: Gapping,
    mean_turn: Option<Value>,
    window_area: Option<Value>,
    fringing: Spec,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let (length, area) = (fields.positive("length"), fields.positive("area"));
    let minimum_area = fields.positive("minimum_area");
    let (mean_turn, window_area) = (fields.positive("mean_turn"), fields.positive("window_area"));
    let fringing = Spec::read(fields)?;
    let gapping = Gapping::read(fields, false, fringing.rule(), false)?;
    smallest_below_effective(fields)?;
    let (length, area) = length.zip(area)?;
    Some(Box::new(Effective {
        length,
        area,
        minimum_area,
        gapping,
        mean_turn,
        window_area,
        fringing,
    }))
}

fn smallest_below_effective(fields: &Fields<'_>) -> Option<()> {
    if !fields.has("minimum_area") || !fields.has("area") {
        return Some(());
    }
    let (smallest, area) = (fields.amount("minimum_area")?, fields.amount("area")?);
    if smallest.nominal <= area.nominal {
        return Some(());
    }
    let headline = "minimum_area must not exceed area";
    fields.error(
        "minimum_area",
        "out-of-range",
        headline,
        "larger than the effective area",
        None,
    );
    None
}

impl Shape for Effective {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let optional = |value: Option<Value>| value.map(|value| values[value]);
        let area = values[self.area];
        let legs = Legs {
            ground: self.fringing.leg(values, area),
            others: &[],
        };
        let closed = Geometry::closed(values[self.length], area);
        let mut geometry = self
            .gapping
            .derive(values, closed, &legs, around.permeability)?;
        geometry.minimum_area = optional(self.minimum_area).unwrap_or(area);
        geometry.mean_turn = optional(self.mean_turn);
        if let Some(area) = optional(self.window_area) {
            let window = Window {
                area,
                practical_fill: PRACTICAL_FILL,
            };
            geometry.wind(window, around.winding);
        }
        Ok(geometry)
    }
}
