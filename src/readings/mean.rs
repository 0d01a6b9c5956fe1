//! `take: mean`: the integral over the window's length. A window of one instant gives the value there.

use super::sum::Sum;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "mean",
    needs: Needs::Window,
    about: "the mean over the window",
    result: kinds::own,
    make: |_| Box::new(Mean::new(Piece::integral)),
};

/// The mean of something that is integrated piece by piece.
pub(super) struct Mean {
    integral: fn(&Piece) -> f64,
    sum: Sum,
    duration: Sum,
    last: Option<f64>,
}

impl Mean {
    pub fn new(integral: fn(&Piece) -> f64) -> Self {
        Mean {
            integral,
            sum: Sum::default(),
            duration: Sum::default(),
            last: None,
        }
    }

    /// The mean; None for a window without length.
    pub fn value(&self) -> Option<f64> {
        let duration = self.duration.value();
        (duration > 0.0).then(|| self.sum.value() / duration)
    }

    /// The signal's last value.
    pub fn last(&self) -> Option<f64> {
        self.last
    }
}

impl Accumulator for Mean {
    fn feed(&mut self, piece: &Piece) {
        self.sum.add((self.integral)(piece));
        self.duration.add(piece.duration());
        self.last = Some(piece.last());
    }

    fn finish(&self) -> Option<Taken> {
        self.value()
            .or(self.last)
            .map(|value| Taken { value, time: None })
    }
}
