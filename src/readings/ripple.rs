//! `take: ripple`: the highest less the lowest value.

use super::extreme::Extreme;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "ripple",
    needs: Needs::Window,
    about: "the highest less the lowest value",
    result: kinds::difference,
    make: |_| {
        Box::new(Ripple {
            highest: Extreme::new(|v| v),
            lowest: Extreme::new(|v| -v),
        })
    },
};

struct Ripple {
    highest: Extreme,
    lowest: Extreme,
}

impl Accumulator for Ripple {
    fn feed(&mut self, piece: &Piece) {
        self.highest.feed(piece);
        self.lowest.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let ((_, high), (_, low)) = self.highest.found().zip(self.lowest.found())?;
        Some(Taken {
            value: high - low,
            time: None,
        })
    }
}
