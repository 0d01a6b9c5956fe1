//! The one seam of all elements: what an element asks of the equations and what it adds to them.
//!
//! Currents count positive into an element's terminals. The row of a node unknown is Kirchhoff's current law:
//! the sum of f + dq/dt over all elements is zero, each element adding the current that flows *into* it.

use super::claims::Claims;
use super::stamper::Stamper;
use crate::netlist::parameters::Values;
pub use crate::dae::Point;
pub use crate::signals::{Happening, Quantity};

/// An unknown of the equations and the row of the same number. Ground is `Unknown::GROUND`, always 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Unknown(pub u32);

impl Unknown {
    /// The reference node: reads as zero, and what is stamped to it is dropped.
    pub const GROUND: Unknown = Unknown(u32::MAX);

    /// Value of this unknown in `x`; zero for ground.
    #[inline]
    pub fn of(self, x: &[f64]) -> f64 {
        x.get(self.0 as usize).copied().unwrap_or(0.0)
    }
}

/// An element of the circuit. It is immutable while the circuit is solved; memory lives in unknowns and modes.
pub trait Element: Send + Sync {
    /// Re-derives every number from the parameters. Called once after reading and after each change of a
    /// parameter that the element depends on.
    fn derive(&mut self, values: &Values);
    /// Asks for terminals, unknowns, modes and guards, and remembers their numbers. Called after `derive`;
    /// what is claimed may depend on whether a value is zero.
    fn claim(&mut self, claims: &mut Claims<'_>);
    /// Adds f, q and their slopes. The sequence of `df`/`dq` positions must be the same at every call.
    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>);
    /// Losses, stored energy and terminal currents, for readings, ratings and the ledger.
    fn energy(&self) -> &dyn Energy;
    /// Clockwork and guards, where the element has any.
    fn switching(&self) -> Option<&dyn Switching> {
        None
    }
    /// A quantity of its own (of one winding where the element has several); None where it has no such thing.
    fn quantity(&self, _quantity: Quantity, _winding: usize, _at: Point<'_>) -> Option<f64> {
        None
    }
    /// Shortens the Newton step `dx` from `x` where an exponential law would be overshot; true if it did.
    fn limit(&self, _x: &[f64], _dx: &mut [f64]) -> bool {
        false
    }
    /// Charges and flux linkages at a zero start: adds to q of the rows what the initial conditions say
    /// (nothing for an uncharged element).
    fn initial_charge(&self, _q: &mut dyn FnMut(Unknown, f64)) {}
}

/// The independent computations of the energy ledger.
pub trait Energy {
    /// Currents into the terminals [A], in the order of the terminals. Where a current holds the derivative of a
    /// charge it is an unknown of the element, claimed when `Claims::probed` says that it is asked for.
    fn currents(&self, at: Point<'_>, out: &mut [f64]);
    /// Power turned to heat by the element's own loss law [W].
    fn loss(&self, at: Point<'_>) -> f64;
    /// Energy in its state function [J].
    fn stored(&self, at: Point<'_>) -> f64;
}

/// Discrete behaviour: modes that change at instants and at zeros of guards. Slices are the element's own.
pub trait Switching {
    /// The modes at the start (time zero); `x` is not known yet.
    fn start(&self, mode: &mut [f64]);
    /// The next instant strictly after `time` at which the mode changes by the clock, or infinity.
    fn next_event(&self, _time: f64, _mode: &[f64]) -> f64 {
        f64::INFINITY
    }
    /// Takes the clock's event of `time`; returns what happened where it is of interest.
    fn at_instant(&self, _time: f64, _mode: &mut [f64]) -> Option<Happening> {
        None
    }
    /// Fills the guards that the element claimed; an event falls where one rises through zero.
    fn guards(&self, _at: Point<'_>, _out: &mut [f64]) {}
    /// Takes the event of guard `which` (counted within the element).
    fn at_guard(&self, _which: usize, _time: f64, _x: &mut [f64], _mode: &mut [f64]) -> Option<Happening> {
        None
    }
}
