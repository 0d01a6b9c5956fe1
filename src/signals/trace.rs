//! A recorded waveform.

use super::piece::Piece;
use crate::units::Kind;

/// Which of the two values at a jump is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Side {
    /// The value that was reached.
    Before,
    /// The value that holds from then on.
    After,
}

/// A waveform as its pieces. They follow one another in time; where two disagree at their common instant the
/// signal jumps.
#[derive(Clone, Debug, PartialEq)]
pub struct Trace {
    /// Its phrase: `voltage at drive`.
    pub name: String,
    /// What it measures; values are in this kind's SI unit.
    pub kind: Kind,
    /// The pieces in order of time.
    pub pieces: Vec<Piece>,
}

impl Trace {
    /// Nothing recorded yet.
    pub fn new(name: impl Into<String>, kind: Kind) -> Self {
        Trace {
            name: name.into(),
            kind,
            pieces: Vec::new(),
        }
    }

    /// First and last instant [s]; None without a piece.
    pub fn span(&self) -> Option<(f64, f64)> {
        Some((self.pieces.first()?.from, self.pieces.last()?.to))
    }

    /// Value at an instant [s]; outside the record its nearer end holds. None without a piece.
    pub fn value_at(&self, time: f64, side: Side) -> Option<f64> {
        let next = match side {
            // The first piece that reaches the instant: its end counts.
            Side::Before => self.pieces.partition_point(|piece| piece.to < time),
            // The last piece that has begun: its start counts.
            Side::After => self
                .pieces
                .partition_point(|piece| piece.from <= time)
                .saturating_sub(1),
        };
        let piece = self.pieces.get(next).or(self.pieces.last())?;
        match side {
            Side::After if time >= piece.to => Some(piece.last()),
            Side::Before if time <= piece.from => Some(piece.first()),
            _ => Some(piece.value_at(time)),
        }
    }

    /// The pieces within `[from, to]` [s], cut to it.
    pub fn within(&self, from: f64, to: f64) -> impl Iterator<Item = Piece> {
        let start = self.pieces.partition_point(|piece| piece.to < from);
        self.pieces[start..]
            .iter()
            .map_while(move |piece| piece.within(from, to))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units;

    fn staircase() -> Trace {
        let mut trace = Trace::new("voltage at a", units::VOLTAGE);
        for (from, to, value) in [
            (0.0, 1.0, 1.0),
            (1.0, 2.0, 5.0),
            (2.0, 2.0, 7.0),
            (2.0, 3.0, 2.0),
        ] {
            trace.pieces.push(Piece::constant(from, to, value));
        }
        trace
    }

    #[test]
    fn a_jump_has_a_value_on_either_side() {
        let trace = staircase();
        let at = |time| {
            (
                trace.value_at(time, Side::Before),
                trace.value_at(time, Side::After),
            )
        };
        assert_eq!(at(1.0), (Some(1.0), Some(5.0)));
        assert_eq!(at(2.0), (Some(5.0), Some(2.0)));
        assert_eq!(at(1.5), (Some(5.0), Some(5.0)));
        assert_eq!(at(-1.0), (Some(1.0), Some(1.0)));
        assert_eq!(at(0.0), (Some(1.0), Some(1.0)));
        assert_eq!(at(9.0), (Some(2.0), Some(2.0)));
        assert_eq!(
            Trace::new("x", units::VOLTAGE).value_at(0.0, Side::After),
            None
        );
    }

    #[test]
    fn a_window_cuts_the_pieces() {
        let cut: Vec<_> = staircase()
            .within(0.5, 1.5)
            .map(|p| (p.from, p.to, p.first()))
            .collect();
        assert_eq!(cut, [(0.5, 1.0, 1.0), (1.0, 1.5, 5.0)]);
        assert_eq!(staircase().within(4.0, 5.0).count(), 0);
        assert_eq!(staircase().span(), Some((0.0, 3.0)));
    }
}
