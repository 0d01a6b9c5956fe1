//! `take: fastest_change`: the largest magnitude of the slope, in the signal's unit per second.
//!
//! An ideal jump has no finite slope: then there is no value, and no limit on it holds. What counts as one is a
//! step of more than a thousandth of the signal's range in the window; smaller ones are the solver's rounding where
//! it starts anew after an edge.

use super::extreme::Extreme;
use super::{Accumulator, Needs, ReadingKind, Taken, kinds};
use crate::signals::Piece;

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "fastest_change",
    needs: Needs::Window,
    about: "the largest magnitude of the slope; nothing where the signal jumps",
    result: kinds::rate,
    make: |_| Box::new(FastestChange::default()),
};

/// Share of the range beyond which a disagreement of two pieces is a jump: a tenth of what plots can show, and ten
/// times the usual accuracy.
const JUMP: f64 = 1e-3;

struct FastestChange {
    steepest: Option<(f64, f64)>,
    last: Option<f64>,
    jump: f64,
    highest: Extreme,
    lowest: Extreme,
}

impl Default for FastestChange {
    fn default() -> Self {
        FastestChange {
            steepest: None,
            last: None,
            jump: 0.0,
            highest: Extreme::new(|v| v),
            lowest: Extreme::new(|v| -v),
        }
    }
}

impl FastestChange {
    fn jumps(&self) -> bool {
        let range = self.highest.found().zip(self.lowest.found());
        range.is_some_and(|((_, high), (_, low))| self.jump > JUMP * (high - low))
    }
}

impl Accumulator for FastestChange {
    fn feed(&mut self, piece: &Piece) {
        let (time, slope) = piece.steepest();
        if self.steepest.is_none_or(|(_, best)| slope > best) {
            self.steepest = Some((time, slope));
        }
        let step = self.last.map_or(0.0, |last| (piece.first() - last).abs());
        let within = if piece.duration() > 0.0 {
            0.0
        } else {
            (piece.last() - piece.first()).abs()
        };
        self.jump = self.jump.max(step).max(within);
        self.last = Some(piece.last());
        self.highest.feed(piece);
        self.lowest.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let (time, value) = self.steepest.filter(|_| !self.jumps())?;
        Some(Taken {
            value,
            time: Some(time),
        })
    }

    fn remark(&self) -> Option<&'static str> {
        self.jumps().then_some("it jumps: give the edge a duration")
    }
}
