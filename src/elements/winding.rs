//! What a winding is made of, shared by every wound kind: turns of a wire, or turns of a given resistance.
//!
//! Its voltage law is d(flux linkage)/dt + R i - v = 0; what makes the linkage is the wound kind's own matter.

use super::element::Unsound;
use super::kind::Surroundings;
use crate::magnetics::wire::copper_ratio;
use crate::magnetics::{Fault, WIRE_KEYS, WindingPlan, WireSpec};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The key `turns`.
pub const TURNS: Key = Key::required("turns", Takes::Count, "number of turns");
/// The key `wire`.
pub const WIRE: Key = Key::optional(
    "wire",
    Takes::Map(WIRE_KEYS),
    "the wire; its resistance follows from the mean turn",
);
/// The key `resistance`.
pub const RESISTANCE: Key = Key::optional(
    "resistance",
    Takes::Quantity(units::RESISTANCE),
    "winding resistance at the reference temperature, instead of a wire",
);
/// The key `temperature_coefficient`.
pub const TEMPERATURE_COEFFICIENT: Key = Key::optional(
    "temperature_coefficient",
    Takes::Quantity(units::TEMPERATURE_COEFFICIENT),
    "of the winding resistance; copper without",
);

/// What sets the winding resistance.
enum Copper {
    /// A resistance at the reference temperature, and its temperature coefficient; copper without one.
    Given(Value, Option<Value>),
    /// The wire and the mean turn.
    Wire(WireSpec),
}

/// Turns and what they are made of, as written.
pub struct Winding {
    turns: usize,
    copper: Copper,
    ambient: Value,
    reference: Value,
}

impl Winding {
    /// Reads [`TURNS`], [`WIRE`], [`RESISTANCE`] and [`TEMPERATURE_COEFFICIENT`] of a mapping; `reference` is the
    /// temperature at which a given resistance holds, `noun` what the mapping describes (`a coil`).
    pub fn read(
        fields: &Fields<'_>,
        around: &Surroundings<'_>,
        reference: Value,
        noun: &str,
    ) -> Option<Self> {
        let turns = fields.count("turns");
        let copper = read_copper(fields, noun);
        Some(Winding {
            turns: turns?,
            copper: copper?,
            ambient: around.ambient,
            reference,
        })
    }

    /// Number of turns.
    pub fn turns(&self) -> usize {
        self.turns
    }

    /// Its temperature [K].
    pub fn temperature(&self, values: &Values) -> f64 {
        values[self.ambient]
    }

    /// What the core's shape needs to know of it.
    pub fn plan(&self, values: &Values) -> WindingPlan {
        let wire = match &self.copper {
            Copper::Wire(spec) => Some(spec.derive(values)),
            Copper::Given(..) => None,
        };
        WindingPlan {
            turns: self.turns,
            wire,
        }
    }

    /// Resistance [Ω] at its temperature; `of_wire` is what wire and mean turn come to, where both are known.
    ///
    /// # Errors
    /// A wire whose mean turn nobody tells.
    pub fn resistance(&self, values: &Values, of_wire: Option<f64>) -> Result<f64, Unsound> {
        let (t, t0) = (values[self.ambient], values[self.reference]);
        match &self.copper {
            Copper::Given(value, None) => Ok(values[*value] * copper_ratio(t, t0)),
            Copper::Given(value, Some(coefficient)) => {
                Ok(values[*value] * (1.0 + values[*coefficient] * (t - t0)))
            }
            Copper::Wire(_) => of_wire.ok_or_else(|| Unsound {
                word: "no-mean-turn",
                key: "wire",
                headline: "the mean turn of this core is not known, so neither is the resistance of its wire".into(),
                help: "write `mean_turn: 45 mm` in the core, or the winding's `resistance` instead of its wire".into(),
            }),
        }
    }
}

/// Either `wire` or `resistance`.
fn read_copper(fields: &Fields<'_>, noun: &str) -> Option<Copper> {
    match (fields.has("wire"), fields.has("resistance")) {
        (false, true) => {
            let coefficient = if fields.has("temperature_coefficient") {
                Some(fields.value("temperature_coefficient")?)
            } else {
                None
            };
            Some(Copper::Given(fields.positive("resistance")?, coefficient))
        }
        (true, false) => WireSpec::read(&fields.map("wire")?).map(Copper::Wire),
        _ => {
            fields.error_here(
                "one-of",
                format!("{noun} takes either `wire` or `resistance`"),
                "write one of the two",
                "`resistance: 400 Ω` if it was measured, `wire: {gauge: 38 AWG}` to have it computed",
            );
            None
        }
    }
}

/// A fault of the magnetics as the element's.
pub fn unsound(fault: &Fault) -> Unsound {
    Unsound {
        word: fault.word,
        key: "core",
        headline: fault.text.clone(),
        help: fault.help.to_owned(),
    }
}
