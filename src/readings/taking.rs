//! A reading at work: its window, and what it has found.

use super::{Accumulator, Taken};
use crate::signals::{EventLog, Gate, GateState, Piece, Window};
use crate::units::Kind;

/// One reading during one run.
pub struct Taking {
    gate: Gate,
    accumulator: Box<dyn Accumulator>,
    kind: Kind,
}

/// What a reading came to.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    /// Value and instant; None for what never happened.
    pub taken: Option<Taken>,
    /// What the value measures.
    pub kind: Kind,
    /// Why there is none.
    pub remark: Option<&'static str>,
}

impl Taking {
    /// Takes with an accumulator what passes a window; the result is of some kind.
    pub fn new(window: Window, accumulator: Box<dyn Accumulator>, kind: Kind) -> Self {
        Taking {
            gate: Gate::new(window),
            accumulator,
            kind,
        }
    }

    /// The next piece of the signal in order of time. The log holds every event up to and at its start.
    pub fn feed(&mut self, piece: &Piece, log: &EventLog) {
        let passed = self.gate.pass(piece, log);
        if let Some(from) = passed.opened {
            self.accumulator.open(from);
        }
        for piece in passed.pieces.iter().flatten() {
            self.accumulator.feed(piece);
        }
    }

    /// True once later pieces cannot matter any more.
    pub fn is_over(&self) -> bool {
        self.gate.state() == GateState::Over
    }

    /// What it came to so far.
    pub fn finish(&self) -> Outcome {
        let taken = self
            .accumulator
            .finish()
            .filter(|taken| taken.value.is_finite());
        let remark = match (taken, self.gate.bounds()) {
            (Some(_), _) => None,
            (None, (None, _)) => Some("its window never begins"),
            (None, (Some(from), Some(to))) if from > to => Some("its window ends before it begins"),
            (None, _) => self
                .accumulator
                .remark()
                .or(Some("nothing was recorded in its window")),
        };
        Outcome {
            taken,
            kind: self.kind,
            remark,
        }
    }
}

impl Outcome {
    /// Value and instant as JSON has them: numbers or null.
    pub fn value_and_time(&self) -> (Option<f64>, Option<f64>) {
        (
            self.taken.map(|taken| taken.value),
            self.taken.and_then(|taken| taken.time),
        )
    }
}
