//! `take: time_until_last`: as `last_time`, counted from the beginning of the window (`from:`; without it, of the run): the release
//! of a coil whose current rings.

use super::passing::PassingTime;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "time_until_last",
    needs: Needs::Passing,
    about: "time from the beginning of the window until it last rises or falls to a level",
    result: kinds::time,
    make: |ask| Box::new(PassingTime::last(ask).counted()),
};
