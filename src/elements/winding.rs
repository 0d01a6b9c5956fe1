//! What a winding is made of, shared by every wound kind: turns of a wire, or turns of a given resistance.
//!
//! Its voltage law is d(flux linkage)/dt + R i - v = 0; what makes the linkage is the wound kind's own matter.

use super::element::Unsound;
use super::kind::Surroundings;
use crate::magnetics::losses::{Arranged, Lay, SKIN_WORDS, SkinLaw};
use crate::magnetics::wire::copper_ratio;
use crate::magnetics::{Fault, Geometry, WIRE_KEYS, WindingPlan, WireSpec};
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

/// The keys of skin and proximity effect, for kinds that call [`Winding::with_lay`].
pub const SKIN_AND_PROXIMITY: Key = Key::default(
    "skin_and_proximity",
    Takes::Word(&SKIN_WORDS),
    "none",
    "the law by which currents crowd in the wire at high frequency, as a ladder in the equations",
);
/// The key `layers`.
pub const LAYERS: Key = Key::optional(
    "layers",
    Takes::Count,
    "number of layers, for skin and proximity effect; as many as the window needs unless said",
);
/// The key `layer_breadth`.
pub const LAYER_BREADTH: Key = Key::optional(
    "layer_breadth",
    Takes::Quantity(units::LENGTH),
    "length of a layer along the leg, for skin and proximity effect; the core's unless said",
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
    lay: Option<LayKeys>,
}

/// How it lies, as written.
struct LayKeys {
    law: SkinLaw,
    layers: Option<usize>,
    breadth: Option<Value>,
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
            lay: None,
        })
    }

    /// The same with [`SKIN_AND_PROXIMITY`], [`LAYERS`] and [`LAYER_BREADTH`] of the mapping read too.
    pub fn with_lay(mut self, fields: &Fields<'_>) -> Option<Self> {
        let wire = matches!(self.copper, Copper::Wire(_));
        let written = fields.has("skin_and_proximity");
        if !written {
            unused(fields)?;
        }
        // Where no wire is told there is nothing for the effects to be in, and no default to tell of.
        if !wire && !written {
            return Some(self);
        }
        let Some(law) = SkinLaw::of(fields.word("skin_and_proximity")?) else {
            return Some(self);
        };
        if !wire {
            fields.error(
                "skin_and_proximity",
                "missing-wire",
                "skin and proximity effect need the winding's `wire`",
                "without a wire",
                Some("`wire: {diameter: 0.2 mm}` in place of `resistance`"),
            );
            return None;
        }
        let layers = match fields.has("layers") {
            true => Some(fields.count("layers")?),
            false => None,
        };
        let breadth = match fields.has("layer_breadth") {
            true => Some(fields.positive("layer_breadth")?),
            false => None,
        };
        self.lay = Some(LayKeys {
            law,
            layers,
            breadth,
        });
        Some(self)
    }

    /// The impedance of its copper in a core's window, and what is to be known of it; None where skin and proximity
    /// effect are not counted.
    ///
    /// # Errors
    /// A lay that cannot be.
    pub fn arranged(
        &self,
        values: &Values,
        geometry: &Geometry,
    ) -> Result<Option<Arranged>, Unsound> {
        let Some(keys) = &self.lay else {
            return Ok(None);
        };
        let lay = Lay {
            law: keys.law,
            layers: keys.layers,
            breadth: keys.breadth.map(|breadth| values[breadth]),
        };
        lay.arrange(&self.plan(values), geometry, self.temperature(values))
            .map(Some)
            .map_err(|fault| Unsound {
                key: fault.key,
                ..unsound(&fault)
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

/// Refuses keys that only skin and proximity effect use.
fn unused(fields: &Fields<'_>) -> Option<()> {
    let stray = ["layers", "layer_breadth"]
        .into_iter()
        .find(|key| fields.has(key));
    let Some(stray) = stray else {
        return Some(());
    };
    fields.error(
        stray,
        "unused-key",
        format!("`{stray}` is for skin and proximity effect, which this winding does not count"),
        "without `skin_and_proximity`",
        Some("`skin_and_proximity: dowell` (or `ferreira`) counts it; without it the key is not needed"),
    );
    None
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
