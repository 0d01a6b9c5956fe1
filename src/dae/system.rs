//! The seam between a circuit and the solver: vectors, modes and events, no circuits and no units.
//!
//! A system is d/dt q(x, t, mode) + f(x, t, mode) = 0, square, with one row per unknown. Rows without any
//! charge q are algebraic. Between events q and f are smooth in t; every corner of the data is a time event
//! or the zero of a guard, and what changes there is kept in the mode slice, never in the system.

use super::pattern::Pattern;

/// Where a system is looked at.
#[derive(Clone, Copy)]
pub struct Point<'a> {
    /// Time [s].
    pub time: f64,
    /// Unknowns, `System::size` long.
    pub x: &'a [f64],
    /// Discrete modes, `System::mode_size` long; constant between events.
    pub mode: &'a [f64],
}

/// What `System::evaluate` fills: values, and the slopes on the pattern where they were asked for.
#[derive(Clone, Debug, Default)]
pub struct Evaluation {
    /// f(x, t, mode), `size` long.
    pub f: Vec<f64>,
    /// q(x, t, mode), `size` long.
    pub q: Vec<f64>,
    /// df/dx on the pattern, one value per stored position, in the pattern's order.
    pub df: Vec<f64>,
    /// dq/dx on the pattern, as `df`.
    pub dq: Vec<f64>,
}

/// What made an event.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Cause {
    /// The instant that `next_event` named has come.
    Time,
    /// This guard rose through zero.
    Guard(usize),
}

/// A circuit as the solver sees it. All methods are pure: no hidden state, so a rejected step needs no undo.
pub trait System {
    /// Number of unknowns and rows.
    fn size(&self) -> usize;
    /// Union of the positions that `df` and `dq` may fill, compressed by column, fixed for the system's life.
    fn pattern(&self) -> &Pattern;
    /// Fills `out.f` and `out.q`, and with `slopes` also `out.df` and `out.dq` (each is overwritten).
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation);
    /// As `evaluate` with every independent source multiplied by `share` (0 to 1); false, with `out` untouched,
    /// where the system cannot: then the search for an operating point does without.
    fn evaluate_raised(
        &self,
        _at: Point<'_>,
        _share: f64,
        _slopes: bool,
        _out: &mut Evaluation,
    ) -> bool {
        false
    }
    /// Shortens a Newton step `dx` taken from `x` where an exponential law would be overshot; true if it did.
    fn limit(&self, _x: &[f64], _dx: &mut [f64]) -> bool {
        false
    }
    /// Number of mode values.
    fn mode_size(&self) -> usize {
        0
    }
    /// The next instant strictly after `time` at which the mode changes by the clock, or infinity.
    fn next_event(&self, _time: f64, _mode: &[f64]) -> f64 {
        f64::INFINITY
    }
    /// Takes the memory of instants in the modes back by `by` seconds, a whole number of periods of all that the clock
    /// does: the modes of the same instant one such time before.
    fn earlier(&self, _by: f64, _mode: &mut [f64]) {}
    /// Number of guards.
    fn guard_size(&self) -> usize {
        0
    }
    /// Guards: an event falls where one rises from negative to zero or above, and at the start of a march where one is
    /// above zero already. Continuous between events.
    fn guards(&self, _at: Point<'_>, _out: &mut [f64]) {}
    /// Takes the event: changes the mode and, for a jump, x. Returns true where something changed.
    /// The q of rows that the transition leaves alone is kept by the solver, which then solves the rest anew.
    fn transition(&self, _cause: Cause, _time: f64, _x: &mut [f64], _mode: &mut [f64]) -> bool {
        false
    }
}
