//! `take: integral`: the integral over the window, in the signal's unit times seconds.

use super::sum::Sum;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "integral",
    needs: Needs::Window,
    about: "the integral over the window",
    result: kinds::integral,
    make: |_| Box::new(Integral::default()),
};

#[derive(Default)]
struct Integral {
    sum: Sum,
    begun: bool,
}

impl Accumulator for Integral {
    fn feed(&mut self, piece: &Piece) {
        self.sum.add(piece.integral());
        self.begun = true;
    }

    fn finish(&self) -> Option<Taken> {
        self.begun.then(|| Taken {
            value: self.sum.value(),
            time: None,
        })
    }
}
