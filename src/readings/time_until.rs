//! `take: time_until`: as `first_time`, counted from the beginning of the window (`from:`; without it, of the run).

use super::passing::PassingTime;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "time_until",
    needs: Needs::Passing,
    about: "time from the beginning of the window until it first rises or falls to a level",
    result: kinds::time,
    make: |ask| Box::new(PassingTime::first(ask).counted()),
};
