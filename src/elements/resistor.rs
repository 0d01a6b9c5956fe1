//! Resistor: i = v/R, with R = R0 (1 + a (T - T0)).

use super::claims::Claims;
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair, reference_temperature};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "resistor",
    about: "A resistance that follows the ambient temperature by its coefficient.",
    keys: &[
        NODES,
        Key::required(
            "resistance",
            Takes::Quantity(units::RESISTANCE),
            "resistance at the reference temperature",
        ),
        Key::default(
            "temperature_coefficient",
            Takes::Quantity(units::TEMPERATURE_COEFFICIENT),
            "0 /K",
            "relative change of the resistance per kelvin",
        ),
    ],
    read,
};

struct Resistor {
    resistance: Value,
    coefficient: Value,
    ambient: Value,
    reference: Value,
    /// Conductance [S].
    conductance: f64,
    branch: Branch,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let resistance = fields.positive("resistance");
    let coefficient = fields.value("temperature_coefficient");
    let reference = reference_temperature(fields, around);
    let element = Resistor {
        resistance: resistance?,
        coefficient: coefficient?,
        ambient: around.ambient,
        reference: reference?,
        conductance: 0.0,
        branch: Branch::default(),
    };
    Some(Made::new(terminals?, element))
}

impl Element for Resistor {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let rise = values[self.ambient] - values[self.reference];
        let resistance = values[self.resistance] * (1.0 + values[self.coefficient] * rise);
        if resistance.is_nan() || resistance <= 0.0 {
            return Err(Unsound {
                word: "out-of-range",
                key: "temperature_coefficient",
                headline: format!(
                    "the resistance comes out as {resistance:.3e} Ω at this temperature"
                ),
                help: "a resistance is positive over the whole range of `ambient`".into(),
            });
        }
        self.conductance = 1.0 / resistance;
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, false);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let current = self.conductance * self.branch.voltage(at.x);
        self.branch.conduct(at.x, current, self.conductance, into);
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::Conductive,
        }]
    }
}

impl Energy for Resistor {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = match self.branch.current {
            Some(i) => i.of(at.x),
            None => self.conductance * self.branch.voltage(at.x),
        };
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let voltage = self.branch.voltage(at.x);
        voltage * voltage * self.conductance
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }
}
