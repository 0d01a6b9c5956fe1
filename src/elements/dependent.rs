//! What the two dependent sources share: a followed signal, its gain, and the reading of both.

use super::element::{Follower, Terms, Unsound, sum};
use crate::netlist::{Fields, Value, Values};
use crate::signals::{Phrase, read_phrase};
use crate::units::{self, Kind};

/// A signal times a gain.
pub struct Followed {
    phrase: Phrase,
    gain_key: Value,
    /// Gain [unit of the source per unit of the signal].
    pub gain: f64,
    /// The signal as a linear form of unknowns.
    pub terms: Terms,
}

impl Followed {
    /// Reads `follows` and `gain` for a source of this kind; the gain's unit is the quotient of both kinds.
    pub fn read(fields: &Fields<'_>, kind: Kind) -> Option<Self> {
        let phrase = read_phrase(fields, "follows").map(|written| written.phrase);
        let gain_kind = phrase.as_ref().map(|phrase| gain_kind(kind, phrase.kind()));
        let gain_key = gain_kind.and_then(|kind| fields.value_as("gain", kind));
        Some(Followed {
            phrase: phrase?,
            gain_key: gain_key?,
            gain: 0.0,
            terms: Terms::new(),
        })
    }

    /// Re-derives the gain.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.gain = values[self.gain_key];
        Ok(())
    }

    /// Gain times signal.
    #[inline]
    pub fn value(&self, x: &[f64]) -> f64 {
        self.gain * sum(&self.terms, x)
    }
}

impl Follower for Followed {
    fn follows(&self) -> Vec<&Phrase> {
        vec![&self.phrase]
    }

    fn connect(&mut self, terms: Vec<Terms>) {
        self.terms = terms.into_iter().next().unwrap_or_default();
    }
}

/// The kind of a gain: the quotient of the source's kind and the signal's.
fn gain_kind(source: Kind, signal: Kind) -> Kind {
    let (Some(source), Some(signal)) = (source.dimension, signal.dimension) else {
        return units::ANY;
    };
    let quotient = source.over(signal);
    Kind::of_dimension(quotient).copied().unwrap_or(Kind {
        name: "a gain",
        symbol: "",
        takes: "the unit of the source per unit of the signal",
        examples: "V/A, A/V, V/Wb",
        dimension: Some(quotient),
        on_scale: false,
    })
}
