//! The largest value that a measure of the signal takes, and the first instant at which it does.

use super::{Accumulator, Taken};
use crate::signals::Piece;

/// Keeps the largest of `measure(value)`; the measure is monotone on each side of zero, so that it is largest at
/// an end or a turning point of a piece.
#[derive(Debug)]
pub(super) struct Extreme {
    measure: fn(f64) -> f64,
    best: Option<(f64, f64, f64)>,
}

impl Extreme {
    pub fn new(measure: fn(f64) -> f64) -> Self {
        Extreme {
            measure,
            best: None,
        }
    }

    /// Instant and value of the signal there.
    pub fn found(&self) -> Option<(f64, f64)> {
        self.best.map(|(_, time, value)| (time, value))
    }
}

impl Accumulator for Extreme {
    fn feed(&mut self, piece: &Piece) {
        for (time, value) in piece.extremes() {
            let size = (self.measure)(value);
            if self.best.is_none_or(|(best, ..)| size > best) {
                self.best = Some((size, time, value));
            }
        }
    }

    fn finish(&self) -> Option<Taken> {
        self.found().map(|(time, value)| Taken {
            value,
            time: Some(time),
        })
    }
}
