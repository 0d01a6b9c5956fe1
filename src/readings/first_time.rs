//! `take: first_time`: the first instant in the window at which the signal rises or falls to a level, in simulated time.

use super::passing::PassingTime;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "first_time",
    needs: Needs::Passing,
    about: "simulated time at which it first rises or falls to a level",
    result: kinds::time,
    make: |ask| Box::new(PassingTime::first(ask)),
};
