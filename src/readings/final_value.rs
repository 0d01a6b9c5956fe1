//! `take: final`: the value at the end of the window, before a jump there. At an operating point every reading
//! takes it.

use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "final",
    needs: Needs::Window,
    about: "the value at the end of the window",
    result: kinds::own,
    make: |_| Box::new(Final::default()),
};

/// Keeps the last value.
#[derive(Default)]
pub(super) struct Final(Option<Taken>);

impl Accumulator for Final {
    fn feed(&mut self, piece: &Piece) {
        self.0 = Some(Taken {
            value: piece.last(),
            time: Some(piece.to),
        });
    }

    fn finish(&self) -> Option<Taken> {
        self.0
    }
}
