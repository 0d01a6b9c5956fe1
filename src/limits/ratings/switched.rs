//! The currents that a contact makes and breaks.

use super::Meter;
use crate::readings::Taken;
use crate::signals::{Happening, Piece};

/// The largest current from a closing to the next opening: inrush and the discharge of a snubber included. A run in
/// which nothing closes makes none: 0.
#[derive(Default)]
pub(super) struct Making {
    closed: bool,
    best: Option<Taken>,
}

impl Meter for Making {
    fn feed(&mut self, piece: &Piece) {
        let best = self.best.get_or_insert(NOTHING);
        for (time, value) in piece.extremes().filter(|_| self.closed) {
            if value.abs() > best.value {
                *best = Taken {
                    value: value.abs(),
                    time: Some(time),
                };
            }
        }
    }

    fn happened(&mut self, happening: Happening, _time: f64) {
        self.closed = happening == Happening::Closes;
    }

    fn finish(&self) -> Option<Taken> {
        self.best
    }
}

/// The largest current at the instant of an opening, as it was before. A run in which nothing opens breaks none: 0.
#[derive(Default)]
pub(super) struct Breaking {
    last: Option<f64>,
    /// An opening before the first piece.
    opens_first: bool,
    best: Option<Taken>,
}

const NOTHING: Taken = Taken {
    value: 0.0,
    time: None,
};

impl Breaking {
    fn breaks(&mut self, current: f64, time: f64) {
        let best = self.best.get_or_insert(NOTHING);
        if current.abs() > best.value {
            *best = Taken {
                value: current.abs(),
                time: Some(time),
            };
        }
    }
}

impl Meter for Breaking {
    fn feed(&mut self, piece: &Piece) {
        self.best.get_or_insert(NOTHING);
        if std::mem::take(&mut self.opens_first) {
            self.breaks(piece.first(), piece.from);
        }
        self.last = Some(piece.last());
    }

    fn happened(&mut self, happening: Happening, time: f64) {
        if happening == Happening::Opens {
            match self.last {
                Some(current) => self.breaks(current, time),
                None => self.opens_first = true,
            }
        }
    }

    fn finish(&self) -> Option<Taken> {
        self.best
    }
}
