//! The largest voltage in the reverse direction.

use super::Meter;
use crate::readings::Taken;
use crate::signals::Piece;

/// Keeps the largest of -v, at least 0.
#[derive(Default)]
pub(super) struct Reverse {
    best: Option<Taken>,
}

impl Meter for Reverse {
    fn feed(&mut self, piece: &Piece) {
        let best = self.best.get_or_insert(Taken {
            value: 0.0,
            time: None,
        });
        for (time, value) in piece.extremes() {
            if -value > best.value {
                *best = Taken {
                    value: -value,
                    time: Some(time),
                };
            }
        }
    }

    fn finish(&self) -> Option<Taken> {
        self.best
    }
}
