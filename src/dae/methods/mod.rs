//! The integration methods, and the step that each family tries.
//!
//! The march owns the loop: how long a step is, whether it is kept, what happens at events. A family owns its
//! attempt: stages, iteration, the error estimate in x, and the dense output of the step.

mod collocation;
mod coupled;
mod diagonal;
mod esdirk4;
mod estimate;
mod graded;
mod iteration;
mod radau_iia;
mod split;
mod table;
mod tr_bdf2;

use super::dense::Dense;
use super::statistics::Statistics;
use super::system::{Point, System};
use super::trouble::Trouble;
use crate::math::Elimination;
use collocation::Collocation;
pub(crate) use coupled::Coupled;
use diagonal::Diagonal;
use graded::Graded;
pub(crate) use radau_iia::Coefficients;
pub(crate) use table::Polynomial;
pub use table::Table;

/// All methods; the first is the one that is taken unless another is asked for.
pub const METHODS: &[Method] = &[
    radau_iia::GRADED,
    radau_iia::METHOD,
    radau_iia::FIVE,
    tr_bdf2::METHOD,
    esdirk4::METHOD,
];

/// The method with the lightest step: where a rough answer will do.
pub const LIGHTEST: &Method = &tr_bdf2::METHOD;

/// An implicit one-step method.
#[derive(Clone, Copy, Debug)]
pub struct Method {
    /// Its name.
    pub name: &'static str,
    /// Order of the values at the ends of steps.
    pub order: u32,
    /// Order of the error estimate: it falls like this power of the step.
    pub estimated: u32,
    /// Local tolerance for an accuracy a of the whole run, as a share of each unknown's swing: `local.0 a^local.1`.
    /// Calibrated on circuits with known solutions and stored readings (`tests/suite/accuracy.rs`).
    pub local: (f64, f64),
    /// What its stages look like.
    pub family: Family,
}

/// Methods of one algebra.
#[derive(Clone, Copy, Debug)]
pub enum Family {
    /// Stages solved one after the other with one matrix, the first explicit, the last at the step's end.
    Diagonal(Table),
    /// Radau's collocation with three stages or five, as it pays.
    Graded,
    /// Radau's collocation with three stages, solved together.
    Collocation3,
    /// Radau's collocation with five stages, solved together.
    Collocation5,
}

impl Method {
    /// Tolerated error of a step, as a share of an unknown's swing, for an accuracy of the whole run. Where the
    /// estimate's order is not that of the errors which pile up, the one is not proportional to the other.
    pub fn local_tolerance(&self, accuracy: f64) -> f64 {
        self.local.0 * accuracy.powf(self.local.1)
    }

    /// How many steps' errors may pile up at an accuracy of the whole run before the local tolerance falls.
    ///
    /// An estimate falls like the tolerance, the error itself like its power 1.5 to 1.67: at 1e-2 ten estimates in a row
    /// are worth one tolerance of error, at 1e-6 a thousand. Calibrated on rings of 2000 and 5000 periods with quality
    /// 1000 and 20 000: the largest error in the run is 2.5 times the accuracy at 1e-2, 4 times at 1e-4, below it at 1e-6.
    pub fn pile(accuracy: f64) -> f64 {
        accuracy.powf(-0.5)
    }

    /// The method of this name.
    pub fn named(name: &str) -> Option<&'static Method> {
        METHODS.iter().find(|method| method.name == name)
    }
}

/// What came of trying a step.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Attempt {
    /// The stages are solved; the error in tolerances, and the unknown that sets it.
    Solved { error: f64, unknown: usize },
    /// They could not be solved.
    Stalled { unknown: usize, cause: Trouble },
}

/// The step to be tried.
#[derive(Clone, Copy)]
pub(crate) struct Trial<'a> {
    /// Where it starts.
    pub from: Point<'a>,
    /// How long it is [s].
    pub length: f64,
    /// Reciprocal tolerances.
    pub weights: &'a [f64],
}

/// A family's memory.
#[derive(Debug)]
pub(crate) enum Stepper {
    Diagonal(Box<Diagonal>),
    Graded(Box<Graded>),
    Collocation3(Box<Collocation<3>>),
    Collocation5(Box<Collocation<5>>),
}

impl Stepper {
    pub fn new<S: System + ?Sized>(method: &Method, system: &S, elimination: Elimination) -> Self {
        match method.family {
            Family::Diagonal(table) => {
                Stepper::Diagonal(Box::new(Diagonal::new(table, system, elimination)))
            }
            Family::Graded => Stepper::Graded(Box::new(Graded::new(system, elimination))),
            Family::Collocation3 => {
                Stepper::Collocation3(Box::new(Collocation::new(system, elimination)))
            }
            Family::Collocation5 => {
                Stepper::Collocation5(Box::new(Collocation::new(system, elimination)))
            }
        }
    }

    /// Something jumped: nothing of the past serves as a prediction.
    pub fn restart(&mut self) {
        match self {
            Stepper::Diagonal(stepper) => stepper.restart(),
            Stepper::Graded(stepper) => stepper.restart(),
            Stepper::Collocation3(stepper) => stepper.restart(),
            Stepper::Collocation5(stepper) => stepper.restart(),
        }
    }

    /// The stages of the next steps are expected to differ much in their slopes.
    pub fn expect_hard(&mut self, hard: bool) {
        match self {
            Stepper::Diagonal(_) => {}
            Stepper::Graded(stepper) => stepper.expect_hard(hard),
            Stepper::Collocation3(stepper) => stepper.expect_hard(hard),
            Stepper::Collocation5(stepper) => stepper.expect_hard(hard),
        }
    }

    /// True where the stages of the step tried last differed much in their slopes.
    pub fn is_hard(&self) -> bool {
        match self {
            Stepper::Diagonal(_) => false,
            Stepper::Graded(stepper) => stepper.is_hard(),
            Stepper::Collocation3(stepper) => stepper.is_hard(),
            Stepper::Collocation5(stepper) => stepper.is_hard(),
        }
    }

    /// Tries a step.
    pub fn attempt<S: System + ?Sized>(
        &mut self,
        system: &S,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Attempt {
        match self {
            Stepper::Diagonal(stepper) => stepper.attempt(system, trial, counted),
            Stepper::Graded(stepper) => stepper.attempt(system, trial, counted),
            Stepper::Collocation3(stepper) => stepper.attempt(system, trial, counted),
            Stepper::Collocation5(stepper) => stepper.attempt(system, trial, counted),
        }
    }

    /// The method that made the step tried last, where the march goes by `method`: one with a fixed number of stages.
    pub fn method(&self, method: &'static Method) -> &'static Method {
        match self {
            Stepper::Graded(stepper) => stepper.method(),
            _ => method,
        }
    }

    /// The step tried last, of this length [s], is kept, and its error allows `next` [s]: what the next step is to be.
    pub fn choose(&mut self, length: f64, next: f64) -> f64 {
        match self {
            Stepper::Graded(stepper) => stepper.choose(length, next),
            _ => next,
        }
    }

    /// Carries small changes of the start through the step tried last, to first order, and adds `share` of its estimated
    /// error; false where the family cannot.
    pub fn carry(&mut self, changes: &mut [f64], share: f64) -> bool {
        match self {
            Stepper::Diagonal(_) => return false,
            Stepper::Graded(stepper) => stepper.carry(changes, share),
            Stepper::Collocation3(stepper) => stepper.carry(changes, share),
            Stepper::Collocation5(stepper) => stepper.carry(changes, share),
        }
        true
    }

    /// Values at the end of the step tried last.
    pub fn end(&self) -> &[f64] {
        match self {
            Stepper::Diagonal(stepper) => stepper.end(),
            Stepper::Graded(stepper) => stepper.end(),
            Stepper::Collocation3(stepper) => stepper.end(),
            Stepper::Collocation5(stepper) => stepper.end(),
        }
    }

    /// Values at the start and at the stages of the step tried last, one row each.
    pub fn stages(&self) -> &[f64] {
        match self {
            Stepper::Diagonal(stepper) => stepper.stages(),
            Stepper::Graded(stepper) => stepper.stages(),
            Stepper::Collocation3(stepper) => stepper.stages(),
            Stepper::Collocation5(stepper) => stepper.stages(),
        }
    }

    /// Lays the polynomial of the step tried last.
    pub fn lay(&mut self) {
        match self {
            Stepper::Diagonal(stepper) => stepper.lay(),
            Stepper::Graded(stepper) => stepper.lay(),
            Stepper::Collocation3(stepper) => stepper.lay(),
            Stepper::Collocation5(stepper) => stepper.lay(),
        }
    }

    /// The polynomial laid last.
    pub fn dense(&self) -> Dense<'_> {
        match self {
            Stepper::Diagonal(stepper) => stepper.dense(),
            Stepper::Graded(stepper) => stepper.dense(),
            Stepper::Collocation3(stepper) => stepper.dense(),
            Stepper::Collocation5(stepper) => stepper.dense(),
        }
    }

    /// The step tried last is kept: the next one starts at its end.
    pub fn keep(&mut self) {
        match self {
            Stepper::Diagonal(stepper) => stepper.keep(),
            Stepper::Graded(stepper) => stepper.keep(),
            Stepper::Collocation3(stepper) => stepper.keep(),
            Stepper::Collocation5(stepper) => stepper.keep(),
        }
    }
}
