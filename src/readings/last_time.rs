//! `take: last_time`: the last instant in the window at which the signal rises or falls to a level, in simulated time. A
//! signal that has risen above the level again by the end of the window keeps the last fall that there was.

use super::passing::PassingTime;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "last_time",
    needs: Needs::Passing,
    about: "simulated time at which it last rises or falls to a level",
    result: kinds::time,
    make: |ask| Box::new(PassingTime::last(ask)),
};
