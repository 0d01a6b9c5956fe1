//! When a signal rises or falls to a level.
//!
//! It *falls to* a level at the instant at which it was above and is no longer: an actual fall. A signal that is at
//! or below the level when the window begins has not fallen to it; one that touches the level from above has.
//! Rising mirrors this. A jump across the level passes it at its instant. So the voltage of a kick that starts below
//! its level, rises over it and falls back is found where it falls back; and what never happens is None.

use super::{Accumulator, Ask, Taken};
use crate::signals::Piece;

/// Watches a level: the first and the last passing, and on which side the signal is.
#[derive(Clone, Debug)]
pub struct Passing {
    ask: Ask,
    first: Option<f64>,
    last: Option<f64>,
    beyond: Option<bool>,
}

impl Passing {
    /// Watches for `ask.level` being risen or fallen to.
    pub fn new(ask: Ask) -> Self {
        Passing {
            ask,
            first: None,
            last: None,
            beyond: None,
        }
    }

    /// Instant of the first passing [s].
    pub fn first(&self) -> Option<f64> {
        self.first
    }

    /// Instant of the last passing so far [s].
    pub fn last(&self) -> Option<f64> {
        self.last
    }

    /// True where the signal, as far as it was seen, is on the side from which it would pass: above a level that it
    /// may fall to. Then the last passing was not for good.
    pub fn is_still_ahead(&self) -> bool {
        self.beyond == Some(true)
    }

    /// Takes the next piece.
    pub fn feed(&mut self, piece: &Piece) {
        // Rising to a level is falling to its mirror image.
        let (piece, level) = match self.ask.rising {
            true => (piece.map(|value| -value), -self.ask.level),
            false => (*piece, self.ask.level),
        };
        let above = piece.first() > level;
        if self.beyond == Some(true) && !above {
            self.passed(piece.from);
        }
        for crossing in piece.crossings(level).filter(|crossing| !crossing.rising) {
            self.passed(crossing.time);
        }
        self.beyond = Some(piece.last() > level);
    }

    fn passed(&mut self, time: f64) {
        self.first = self.first.or(Some(time));
        self.last = Some(time);
    }

    fn remark(&self) -> Option<&'static str> {
        match (self.beyond?, self.ask.rising) {
            (true, false) => Some("it stays above the level"),
            (false, false) => Some("it is never above the level, so it cannot fall to it"),
            (true, true) => Some("it stays below the level"),
            (false, true) => Some("it is never below the level, so it cannot rise to it"),
        }
    }
}

/// Which passing a reading takes, and from where it counts.
pub(super) struct PassingTime {
    passing: Passing,
    last: bool,
    counts_from_opening: bool,
    from: f64,
}

impl PassingTime {
    pub fn first(ask: &Ask) -> Self {
        PassingTime {
            passing: Passing::new(*ask),
            last: false,
            counts_from_opening: false,
            from: 0.0,
        }
    }

    pub fn last(ask: &Ask) -> Self {
        PassingTime {
            last: true,
            ..PassingTime::first(ask)
        }
    }

    /// Counts from the beginning of the window.
    pub fn counted(self) -> Self {
        PassingTime {
            counts_from_opening: true,
            ..self
        }
    }
}

impl Accumulator for PassingTime {
    fn open(&mut self, from: f64) {
        self.from = if self.counts_from_opening { from } else { 0.0 };
    }

    fn feed(&mut self, piece: &Piece) {
        self.passing.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let time = if self.last {
            self.passing.last()
        } else {
            self.passing.first()
        }?;
        Some(Taken {
            value: time - self.from,
            time: Some(time),
        })
    }

    fn remark(&self) -> Option<&'static str> {
        self.passing.remark()
    }
}
