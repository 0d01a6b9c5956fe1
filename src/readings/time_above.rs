//! `take: time_above`: for how long the signal is higher than a level, all stretches of the window together.

use super::sum::Sum;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "time_above",
    needs: Needs::Level,
    about: "for how long it is higher than a level",
    result: kinds::time,
    make: |ask| Box::new(TimeAbove::new(ask.level, false)),
};

/// Time beyond a level.
pub(super) struct TimeAbove {
    level: f64,
    below: bool,
    sum: Sum,
    begun: bool,
}

impl TimeAbove {
    pub fn new(level: f64, below: bool) -> Self {
        TimeAbove {
            level,
            below,
            sum: Sum::default(),
            begun: false,
        }
    }
}

impl Accumulator for TimeAbove {
    fn feed(&mut self, piece: &Piece) {
        // Being below a level is being above its mirror image.
        self.sum.add(match self.below {
            true => piece.map(|value| -value).time_above(-self.level),
            false => piece.time_above(self.level),
        });
        self.begun = true;
    }

    fn finish(&self) -> Option<Taken> {
        self.begun.then(|| Taken {
            value: self.sum.value(),
            time: None,
        })
    }
}
