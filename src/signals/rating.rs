//! The rating keys of elements and parts: what each one watches and how the stress is taken.
//!
//! The table lies below the elements because they read it; the stress itself is measured in `limits`. To add a
//! rating: a line in `RATINGS`.

use crate::netlist::{Fields, Key, Need, Takes, Value};
use crate::units::{self, Kind};

/// Which waveform of its element a rating watches.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Watched {
    /// Voltage across it, its first terminal less its second (anode less cathode, drain less source).
    Voltage,
    /// Current into its first terminal.
    Current,
    /// Power absorbed over all terminals.
    Power,
    /// Flux density in its core.
    FluxDensity,
    /// Temperature of its innermost stage.
    Temperature,
}

/// How the stress is taken from the waveform over the whole run.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stress {
    /// Largest magnitude.
    Magnitude,
    /// Largest value in the negative direction; 0 where there is none.
    Reverse,
    /// The largest of the magnitudes at the start and at the end and of the mean's.
    AtRest,
    /// Largest magnitude of the slope.
    Rate,
    /// Magnitude of the mean.
    Mean,
    /// Mean, where it is absorbed; 0 where the element gives.
    MeanAbsorbed,
    /// Root of the mean square.
    Rms,
    /// Largest magnitude between a closing and the next opening; 0 where nothing closes.
    Making,
    /// Largest magnitude at the instants of opening; 0 where nothing opens.
    Breaking,
    /// Power of a pulse of the rated shape and width that heats as much as the largest pulse.
    PulsePower,
    /// Largest energy of one pulse.
    PulseEnergy,
    /// Read and listed, with no stress beside it.
    NotEvaluatedYet,
}

/// One rating key.
#[derive(Debug)]
pub struct RatingKind {
    /// The key: `reverse_voltage`.
    pub key: &'static str,
    /// What it limits (of `pulse` its power).
    pub kind: Kind,
    /// What is compared with it, in a phrase.
    pub about: &'static str,
    /// The waveform.
    pub watches: Watched,
    /// What is taken from it.
    pub stress: Stress,
}

const fn rating(
    key: &'static str,
    kind: Kind,
    watches: Watched,
    stress: Stress,
    about: &'static str,
) -> RatingKind {
    RatingKind {
        key,
        kind,
        about,
        watches,
        stress,
    }
}

use Stress::*;
use Watched::*;

/// Every rating key.
pub const RATINGS: &[RatingKind] = &[
    rating(
        "voltage",
        units::VOLTAGE,
        Voltage,
        Magnitude,
        "largest magnitude of the voltage",
    ),
    rating(
        "reverse_voltage",
        units::VOLTAGE,
        Voltage,
        Reverse,
        "largest reverse voltage",
    ),
    rating(
        "working_voltage_dc",
        units::VOLTAGE,
        Voltage,
        AtRest,
        "voltage that lasts: the largest of the magnitudes at the start and the end of the run and of the mean's",
    ),
    rating(
        "working_voltage_ac",
        units::VOLTAGE,
        Voltage,
        NotEvaluatedYet,
        "alternating voltage that lasts, effective value",
    ),
    rating(
        "voltage_rate",
        units::VOLTAGE_RATE,
        Voltage,
        Rate,
        "fastest change of the voltage",
    ),
    rating(
        "current",
        units::CURRENT,
        Current,
        Magnitude,
        "largest magnitude of the current",
    ),
    rating(
        "current_mean",
        units::CURRENT,
        Current,
        Mean,
        "mean current over the run",
    ),
    rating(
        "current_surge",
        units::CURRENT,
        Current,
        Magnitude,
        "largest magnitude of the current, not repeated",
    ),
    rating(
        "making_current",
        units::CURRENT,
        Current,
        Making,
        "largest current between a closing and the next opening",
    ),
    rating(
        "breaking_current",
        units::CURRENT,
        Current,
        Breaking,
        "largest current at the instant of an opening",
    ),
    rating(
        "ripple_current",
        units::CURRENT,
        Current,
        Rms,
        "effective current over the run",
    ),
    rating(
        "power",
        units::POWER,
        Power,
        MeanAbsorbed,
        "mean power absorbed over the run",
    ),
    rating(
        PULSE,
        units::POWER,
        Power,
        PulsePower,
        "power of an exponential pulse that falls to half in a certain width and heats as much as the largest pulse",
    ),
    rating(
        "pulse_energy",
        units::ENERGY,
        Power,
        PulseEnergy,
        "largest energy of one pulse, not repeated",
    ),
    rating(
        "repetitive_energy",
        units::ENERGY,
        Power,
        PulseEnergy,
        "largest energy of one pulse, repeated",
    ),
    rating(
        "junction_temperature",
        units::TEMPERATURE,
        Temperature,
        NotEvaluatedYet,
        "highest junction temperature",
    ),
    rating(
        "flux_density",
        units::FLUX_DENSITY,
        FluxDensity,
        Magnitude,
        "largest magnitude of the flux density",
    ),
];

const PULSE: &str = "pulse";

const PULSE_KEYS: &[Key] = &[
    Key::required("power", Takes::Quantity(units::POWER), "power at its start"),
    Key::required(
        "width",
        Takes::Quantity(units::TIME),
        "time in which it falls to half",
    ),
];

/// The keys of `ratings:`, made from [`RATINGS`].
pub const RATING_KEYS: &[Key] = &KEYS;

const KEYS: [Key; RATINGS.len()] = {
    let mut keys = [const { Key::optional("", Takes::Text, "") }; RATINGS.len()];
    let mut k = 0;
    while k < RATINGS.len() {
        let takes = match RATINGS[k].stress {
            PulsePower if is_pulse(RATINGS[k].key) => Takes::Map(PULSE_KEYS),
            _ => Takes::Quantity(RATINGS[k].kind),
        };
        keys[k] = Key {
            name: RATINGS[k].key,
            takes,
            need: Need::Optional,
            about: RATINGS[k].about,
        };
        k += 1;
    }
    keys
};

/// String comparison where only constants may be computed.
const fn is_pulse(key: &str) -> bool {
    let (a, b) = (key.as_bytes(), PULSE.as_bytes());
    let mut same = a.len() == b.len();
    let mut k = 0;
    while same && k < a.len() {
        same = a[k] == b[k];
        k += 1;
    }
    same
}

/// A rating as written at an element or in its part.
#[derive(Clone, Copy, Debug)]
pub struct Rated {
    /// Which one.
    pub rating: &'static RatingKind,
    /// What is allowed (of `pulse` the power).
    pub value: Value,
    /// Width of the pulse, for `pulse`.
    pub width: Option<Value>,
}

/// The ratings of one element.
#[derive(Clone, Debug)]
pub struct Ratings {
    /// The element; a contact of a relay as `k1.main`.
    pub element: String,
    /// In the order of [`RATINGS`].
    pub rated: Vec<Rated>,
}

impl RatingKind {
    /// The kind of a key.
    pub fn find(key: &str) -> Option<&'static RatingKind> {
        RATINGS.iter().find(|rating| rating.key == key)
    }

    /// False where it is only read and listed.
    pub fn is_evaluated(&self) -> bool {
        self.stress != NotEvaluatedYet
    }
}

/// Reads a mapping of [`RATING_KEYS`]: `fields.map("ratings")` of an element. All must be above zero.
pub fn read_ratings(fields: &Fields<'_>) -> Vec<Rated> {
    let read = |rating: &'static RatingKind| {
        if rating.key != PULSE {
            let value = fields.positive(rating.key)?;
            return Some(Rated {
                rating,
                value,
                width: None,
            });
        }
        let pulse = fields.map(PULSE)?;
        let (power, width) = (pulse.positive("power"), pulse.positive("width"));
        pulse.finish();
        Some(Rated {
            rating,
            value: power?,
            width: Some(width?),
        })
    };
    let rated = RATINGS
        .iter()
        .filter(|rating| fields.has(rating.key))
        .filter_map(read)
        .collect();
    fields.finish();
    rated
}

#[cfg(test)]
mod tests;
