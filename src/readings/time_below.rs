//! `take: time_below`: for how long the signal is lower than a level, all stretches of the window together.

use super::time_above::TimeAbove;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "time_below",
    needs: Needs::Level,
    about: "for how long it is lower than a level",
    result: kinds::time,
    make: |ask| Box::new(TimeAbove::new(ask.level, true)),
};
