//! Readings: numbers taken from a waveform, one file per `take:`.
//!
//! A reading is an accumulator: it is fed the pieces of its window in order of time and keeps only what it needs,
//! so that a run of any length takes no memory for it. To add one: a file with a `KIND`, and its line in
//! `READINGS`.

mod ask;
mod extreme;
mod fastest_change;
mod final_value;
mod first_time;
mod highest;
mod integral;
mod kinds;
mod last_time;
mod lowest;
mod mean;
mod passing;
mod peak;
mod reading;
mod ripple;
mod rms;
mod sum;
mod taking;
mod time_above;
mod time_below;
mod time_until;
mod time_until_last;
mod value_at;

pub use ask::{Ask, Needs};
pub use fastest_change::KIND as FASTEST_CHANGE;
pub use highest::KIND as HIGHEST;
pub use mean::KIND as MEAN;
pub use passing::Passing;
pub use peak::KIND as PEAK;
pub use reading::{KEY, Reading, read_readings};
pub use rms::KIND as RMS;
pub use taking::{Outcome, Taking};

use crate::signals::Piece;
use crate::units::Kind;

/// Every kind of reading.
pub const READINGS: &[ReadingKind] = &[
    highest::KIND,
    lowest::KIND,
    peak::KIND,
    mean::KIND,
    rms::KIND,
    ripple::KIND,
    final_value::KIND,
    value_at::KIND,
    first_time::KIND,
    last_time::KIND,
    time_until::KIND,
    time_until_last::KIND,
    time_above::KIND,
    time_below::KIND,
    fastest_change::KIND,
    integral::KIND,
];

/// One `take:`.
#[derive(Debug)]
pub struct ReadingKind {
    /// The word: `time_until_last`.
    pub word: &'static str,
    /// What it asks besides its signal.
    pub needs: Needs,
    /// What it gives, in a phrase.
    pub about: &'static str,
    /// The result's kind for a signal of some kind.
    pub result: fn(Kind) -> Kind,
    /// Starts it.
    pub make: fn(&Ask) -> Box<dyn Accumulator>,
}

/// What a reading found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Taken {
    /// The value [SI unit of the reading's result].
    pub value: f64,
    /// The instant [s of simulated time] at which it was found, where there is one.
    pub time: Option<f64>,
}

/// Takes a number from a waveform while it comes.
pub trait Accumulator: Send {
    /// The window begins at `from` [s]; told once, before the first piece.
    fn open(&mut self, _from: f64) {}
    /// The next piece of the window, in order of time. Where it does not begin with the value at which the last
    /// one ended, the signal jumps, and both values count.
    fn feed(&mut self, piece: &Piece);
    /// What was found so far; None for what has not happened.
    fn finish(&self) -> Option<Taken>;
    /// Why nothing was found, for people.
    fn remark(&self) -> Option<&'static str> {
        None
    }
}

impl ReadingKind {
    /// The kind of a word.
    pub fn find(word: &str) -> Option<&'static ReadingKind> {
        READINGS.iter().find(|kind| kind.word == word)
    }
}

#[cfg(test)]
mod tests;
