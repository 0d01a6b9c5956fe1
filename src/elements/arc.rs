//! What happens in the gap of a contact: breakdown, and the arc that may follow it.
//!
//! *Breakdown line.* A gap g [m] breaks down at
//! max(floor, min(E g, max(327 V, 2.422 MV/m d g + 60.8 kV/√m √(d g)))).
//! - E g: below about 4 µm metal vapour and field emission break the gap down at a nearly constant mean field, as in
//!   vacuum (P. G. Slade and E. D. Taylor, IEEE Trans. Components and Packaging Technologies 25, 2002, p. 390, read in
//!   abstract: such up to 4 µm, Paschen's curve from 6 µm on). `breakdown_field` is 80 V/µm unless said: the line then
//!   meets the plateau at 4 µm.
//! - 327 V at 0.567 Torr cm: the minimum of Paschen's curve in air (M. S. Naidu and V. Kamaraju, High Voltage
//!   Engineering; read second-hand). A gap between 4 µm and the minimum breaks down along a longer way around.
//! - 24.22 kV/cm d g + 6.08 kV/√cm √(d g), d the relative density 293 K/T of the air: the formula of a uniform field in
//!   air (Naidu and Kamaraju; read second-hand). It exceeds the minimum from 21 µm on.
//! - floor: twice the minimum arc voltage, and no less than what drives twice the minimum arc current through the closed
//!   contact's resistance. An assumption of this model: a bridge of molten metal holds the contacts together until the field
//!   law reaches it, a fraction of a micrometre.
//!
//! *Arc.* Its voltage is minimum_voltage + column_field g against the current, in series with the resistance of the closed
//! contact; it burns while its current is at least minimum_current (R. Holm, Electric Contacts, 1967). Below either it
//! goes out; the capacitance of the contacts is charged anew until the line is met again: the showering arc (L. H. Germer
//! and others, 1948 to 1954; from memory).
//!
//! *Parting with current.* Where the bridge parts with at least the minimum current, an arc needs no breakdown: it is lit
//! as soon as the voltage feeds it.
//!
//! *Closing.* A gap that shrinks into the range of the field law is bridged by metal as it breaks down, some microseconds
//! before it touches: taken for the touch itself. Before that it breaks down by the gas law alone.

use super::element::Unsound;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// Lowest voltage at which air breaks down [V], the minimum of Paschen's curve.
const GAS_MINIMUM: f64 = 327.0;
/// Coefficients of the uniform field in air: 24.22 kV/cm and 6.08 kV/√cm in V/m and V/√m.
const GAS_LINEAR: f64 = 24.22e5;
const GAS_ROOT: f64 = 6.08e4;
/// Temperature at which air has the density of the formula [K].
const GAS_TEMPERATURE: f64 = 293.0;

/// Minimum voltage [V] and current [A] of an arc between contacts of a metal, from the tables of R. Holm, Electric
/// Contacts, 1967, and P. G. Slade (ed.), Electrical Contacts (from memory; where books differ, a value between).
pub const MATERIALS: &[(&str, f64, f64)] = &[
    ("silver", 12.0, 0.4),
    ("silver_tin_oxide", 11.0, 0.4),
    ("gold", 12.5, 0.38),
    ("copper", 13.0, 0.43),
    ("nickel", 14.0, 0.5),
    ("palladium", 15.0, 0.8),
    ("platinum", 17.5, 0.8),
    ("tungsten", 15.0, 1.0),
    ("rhodium", 14.0, 0.35),
];
const WORDS: &[&str] = &[
    "silver",
    "silver_tin_oxide",
    "gold",
    "copper",
    "nickel",
    "palladium",
    "platinum",
    "tungsten",
    "rhodium",
];

/// The key of the contact material.
pub const MATERIAL: Key = Key::optional(
    "material",
    Takes::Word(WORDS),
    "contact material; its minimum voltage and current are taken from a table",
);
/// The key of the arc's minimum voltage.
pub const MINIMUM_VOLTAGE: Key = Key::optional(
    "minimum_voltage",
    Takes::Quantity(units::VOLTAGE),
    "voltage of the shortest arc, instead of a material",
);
/// The key of the arc's minimum current.
pub const MINIMUM_CURRENT: Key = Key::optional(
    "minimum_current",
    Takes::Quantity(units::CURRENT),
    "current below which an arc goes out, instead of a material",
);
/// The key of the capacitance across the gap.
pub const CAPACITANCE: Key = Key::required(
    "capacitance",
    Takes::Quantity(units::CAPACITANCE),
    "stray capacitance across the contacts, which feeds each spark",
);
/// The key of the arc's field along its length.
pub const COLUMN_FIELD: Key = Key::default(
    "column_field",
    Takes::Quantity(units::ELECTRIC_FIELD),
    "0 V/mm",
    "what the arc's voltage grows by with the gap",
);
/// The key of the field at which short gaps break down.
pub const BREAKDOWN_FIELD: Key = Key::default(
    "breakdown_field",
    Takes::Quantity(units::ELECTRIC_FIELD),
    "80 V/µm",
    "mean field at which gaps of a few micrometres break down",
);

enum Minima {
    Of(f64, f64),
    Given(Value, Value),
}

/// The gap's laws in numbers.
pub struct Arc {
    minima: Minima,
    keys: [Value; 3],
    ambient: Value,
    /// Minimum voltage [V] and current [A].
    minimum: (f64, f64),
    capacitance: f64,
    column_field: f64,
    breakdown_field: f64,
    /// Relative density of the air.
    density: f64,
    /// Resistance in series, that of the closed contact [Ω].
    resistance: f64,
    /// Lowest voltage at which a growing gap breaks down [V].
    floor: f64,
}

impl Arc {
    /// Reads the keys of this file from the mapping behind `arc`; the caller reads its own and finishes it.
    pub fn read(fields: &Fields<'_>, ambient: Value) -> Option<Self> {
        let minima = match (
            fields.has("material"),
            fields.has("minimum_voltage") || fields.has("minimum_current"),
        ) {
            (true, false) => fields.word("material").and_then(|word| {
                let of = MATERIALS.iter().find(|material| material.0 == word);
                of.map(|&(_, voltage, current)| Minima::Of(voltage, current))
            }),
            (false, true) => {
                let voltage = fields.needed_with("minimum_voltage", "minimum_current");
                let current = fields.needed_with("minimum_current", "minimum_voltage");
                voltage.zip(current).map(|(v, i)| Minima::Given(v, i))
            }
            _ => {
                fields.error_here(
                    "one-of",
                    "an arc takes either `material` or both its minima".into(),
                    "write one of the two",
                    "`material: silver`, or `minimum_voltage: 12 V, minimum_current: 0.4 A`",
                );
                None
            }
        };
        let capacitance = fields.positive("capacitance");
        let column = fields.non_negative("column_field");
        let breakdown = fields.positive("breakdown_field");
        Some(Arc {
            minima: minima?,
            keys: [capacitance?, column?, breakdown?],
            ambient,
            minimum: (0.0, 0.0),
            capacitance: 0.0,
            column_field: 0.0,
            breakdown_field: 0.0,
            density: 1.0,
            resistance: 0.0,
            floor: 0.0,
        })
    }

    /// Re-derives the numbers; `closed` is the conductance of the closed contact [S].
    ///
    /// # Errors
    /// The arc's minimum voltage is not below that of the gas.
    pub fn derive(&mut self, values: &Values, closed: f64) -> Result<(), Unsound> {
        self.minimum = match self.minima {
            Minima::Of(voltage, current) => (voltage, current),
            Minima::Given(voltage, current) => (values[voltage], values[current]),
        };
        [self.capacitance, self.column_field, self.breakdown_field] =
            self.keys.map(|key| values[key]);
        self.density = GAS_TEMPERATURE / values[self.ambient];
        self.resistance = 1.0 / closed;
        let (voltage, current) = self.minimum;
        self.floor = (2.0 * voltage).max(voltage + 2.0 * current * self.resistance);
        if self.floor < GAS_MINIMUM {
            return Ok(());
        }
        Err(Unsound {
            word: "out-of-range",
            key: "arc",
            headline: format!(
                "an arc of {} and {} behind {} needs more than the {} at which air breaks down",
                units::engineering(self.minimum.0, units::VOLTAGE, 4),
                units::engineering(self.minimum.1, units::CURRENT, 4),
                units::engineering(self.resistance, units::RESISTANCE, 4),
                units::engineering(GAS_MINIMUM, units::VOLTAGE, 4)
            ),
            help: "contact metals have 10 V to 20 V and less than 1 A, closed contacts milliohms"
                .into(),
        })
    }

    /// Stray capacitance across the contacts [F].
    pub fn capacitance(&self) -> f64 {
        self.capacitance
    }

    /// Minimum voltage [V] and current [A].
    pub fn minimum(&self) -> (f64, f64) {
        self.minimum
    }

    /// Voltage [V] at which air breaks down over a gap [m].
    fn gas(&self, gap: f64) -> f64 {
        let length = self.density * gap;
        (GAS_LINEAR * length + GAS_ROOT * length.sqrt()).max(GAS_MINIMUM)
    }

    /// Voltage [V] at which a gap [m] breaks down; `shrinks` where the contacts approach each other.
    pub fn breakdown(&self, gap: f64, shrinks: bool) -> f64 {
        let gap = gap.max(0.0);
        let gas = self.gas(gap);
        if shrinks {
            gas.max(self.fed(gap))
        } else {
            gas.min(self.breakdown_field * gap)
                .max(self.floor)
                .max(self.fed(gap))
        }
    }

    /// Voltage [V] at which a gap [m] lights an arc whose bridge parted with enough current: what drives twice the minimum.
    pub fn fed(&self, gap: f64) -> f64 {
        self.burning(gap) + 2.0 * self.minimum.1 * self.resistance
    }

    /// Gap [m] at which the bridge of molten metal parts.
    pub fn bridge(&self) -> f64 {
        self.floor / self.breakdown_field
    }

    /// Voltage [V] of the arc itself over a gap [m].
    pub fn burning(&self, gap: f64) -> f64 {
        self.minimum.0 + self.column_field * gap.max(0.0)
    }
}
