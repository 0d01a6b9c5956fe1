//! `take: peak`: the largest magnitude, without its sign, and its first instant.

use super::extreme::Extreme;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "peak",
    needs: Needs::Window,
    about: "the largest magnitude, without its sign",
    result: kinds::own,
    make: |_| Box::new(Peak(Extreme::new(f64::abs))),
};

struct Peak(Extreme);

impl Accumulator for Peak {
    fn feed(&mut self, piece: &Piece) {
        self.0.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        self.0.found().map(|(time, value)| Taken {
            value: value.abs(),
            time: Some(time),
        })
    }
}
