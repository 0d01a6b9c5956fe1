//! What an observer of the march is shown.

use super::dense::Dense;
use super::system::Cause;
use super::variations::{Moved, Varied};

/// One thing that happened, in the order of time.
#[derive(Clone, Copy, Debug)]
pub enum Advance<'a> {
    /// The march begins.
    Start {
        /// Instant [s].
        time: f64,
        /// Unknowns.
        x: &'a [f64],
        /// Modes.
        mode: &'a [f64],
    },
    /// A step was kept.
    Step(&'a Step<'a>),
    /// An event was taken; the clock stands.
    Event {
        /// Instant [s].
        time: f64,
        /// What made it, in the order in which it was taken.
        causes: &'a [Cause],
        /// Unknowns before it.
        x_before: &'a [f64],
        /// Consistent unknowns after it.
        x_after: &'a [f64],
        /// Modes before it.
        mode_before: &'a [f64],
        /// Modes after it.
        mode_after: &'a [f64],
        /// Derivatives at it, where variations are carried along.
        varied: Option<Moved<'a>>,
        /// What happened within the instant, one entry for each transition that changed something.
        impulses: &'a [Impulse],
    },
}

/// An instant within which charges and flux linkages may have moved at once: what moves them is an impulse.
///
/// It is seen as a short time, `length`, during which an impulse of current or voltage stands as a large value.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Impulse {
    /// Unknowns before it.
    pub before: Vec<f64>,
    /// Unknowns during it.
    pub during: Vec<f64>,
    /// Unknowns after it.
    pub after: Vec<f64>,
    /// Modes before it.
    pub mode_before: Vec<f64>,
    /// Modes during and after it.
    pub mode: Vec<f64>,
    /// Its length [s].
    pub length: f64,
    /// Time [s] that its steps spend with the values after it: what flows meanwhile is no impulse, but flows.
    pub spent: f64,
}

/// A step that was kept, with the method's own polynomial through it.
#[derive(Clone, Copy, Debug)]
pub struct Step<'a> {
    /// Start [s].
    pub from: f64,
    /// End [s].
    pub to: f64,
    /// Modes, constant over the step.
    pub mode: &'a [f64],
    /// Unknowns at the start.
    pub x0: &'a [f64],
    /// Unknowns at the end.
    pub x1: &'a [f64],
    /// The polynomial of all unknowns.
    pub dense: Dense<'a>,
    /// Polynomials of their derivatives, where variations are carried along.
    pub varied: Option<Varied<'a>>,
}

/// Parts of a step whose polynomial is of a higher degree than three. A sine of which a step of order 9 takes the phase
/// phi is missed by a cubic over a quarter of it by 2e-6 phi^4: by 0.2 times the accuracy at 1e-6, where phi is 0.6.
const PARTS: usize = 4;

impl Step<'_> {
    /// Spans [s] that make up the step, over each of which a cubic follows the polynomial to the accuracy of the method;
    /// each of them again in so many.
    pub fn parts(&self, again: usize) -> impl Iterator<Item = (f64, f64)> + use<> {
        let count = if self.dense.points.len() > 4 {
            PARTS * again
        } else {
            again
        };
        let (from, to) = (self.from, self.to);
        let edge = move |k: usize| {
            if k == count {
                to
            } else {
                from + (to - from) * k as f64 / count as f64
            }
        };
        (0..count).map(move |k| (edge(k), edge(k + 1)))
    }

    fn share(&self, time: f64) -> f64 {
        (time - self.from) / (self.to - self.from)
    }

    /// Unknowns at a time [s] within the step.
    pub fn at(&self, time: f64, x: &mut [f64]) {
        if time == self.to {
            x.copy_from_slice(self.x1);
        } else {
            self.dense.at(self.share(time), x);
        }
    }

    /// Time derivative [1/s] of all unknowns at a time [s] within the step.
    pub fn slope_at(&self, time: f64, slope: &mut [f64]) {
        let share = self.share(time);
        let n = self.x0.len();
        for (which, slope) in slope.iter_mut().enumerate() {
            *slope = self.dense.one(share, which, n).1 / (self.to - self.from);
        }
    }

    /// Value and time derivative [1/s] of one unknown at a time [s] within the step.
    pub fn one_at(&self, time: f64, which: usize) -> (f64, f64) {
        let (value, slope) = self.dense.one(self.share(time), which, self.x0.len());
        (value, slope / (self.to - self.from))
    }
}
