//! `take: rms`: the root of the mean square. A window of one instant gives the magnitude there.

use super::mean::Mean;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "rms",
    needs: Needs::Window,
    about: "the root of the mean square over the window",
    result: kinds::own,
    make: |_| Box::new(Rms(Mean::new(Piece::integral_of_square))),
};

struct Rms(Mean);

impl Accumulator for Rms {
    fn feed(&mut self, piece: &Piece) {
        self.0.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let value = self
            .0
            .value()
            .map(f64::sqrt)
            .or(self.0.last().map(f64::abs))?;
        Some(Taken { value, time: None })
    }
}
