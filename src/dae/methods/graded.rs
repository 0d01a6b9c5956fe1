//! Radau's collocation with three stages or five, whichever goes farther: the order follows the problem.
//!
//! A step with five stages costs about 1.75 times one with three (stages, and factors: one real and two complex against
//! one and one), and where the solution is smooth it is two to eight times as long. After an event, and wherever the
//! stages need slopes of their own, three are taken. Once a few steps have gone calmly, five are tried for a step; what
//! its error estimate allows for the next step decides whether they stay. Figures: `tests/benches/README.md`.

use super::super::dense::Dense;
use super::super::statistics::Statistics;
use super::super::system::System;
use super::collocation::Collocation;
use super::{Attempt, Method, Trial, radau_iia};
use crate::math::Elimination;

/// So many calm steps with three stages before five are tried.
const CALM: u32 = 4;
/// Five stages stay where they allow steps at least so many times longer than three.
const PAYS: f64 = 2.0;
/// After a vain try, so many steps pass before the next.
const PATIENCE: u32 = 12;
/// A step with three stages after one with five is at most this share as long.
const SHORTER: f64 = 0.5;
/// With five stages, attempts lost count this much and steps kept count against them; at the limit three are taken.
const LOST: u32 = 3;
const LIMIT: u32 = 9;

/// Memory of the family.
#[derive(Debug)]
pub(crate) struct Graded {
    elimination: Elimination,
    three: Collocation<3>,
    /// Made when first tried.
    five: Option<Box<Collocation<5>>>,
    /// Five stages made the step tried last.
    high: bool,
    /// Five stages are to make the next one.
    wanted: bool,
    /// The length [s] that three stages would take next, until five have been judged.
    rival: Option<f64>,
    /// Calm steps in a row with three stages.
    calm: u32,
    /// Steps to pass before five are tried again.
    barred: u32,
    /// Attempts lost of late with five stages.
    lost: u32,
    /// An attempt since a step was kept.
    tried: bool,
}

macro_rules! active {
    ($self:ident, $stepper:ident => $what:expr) => {
        match &$self.five {
            Some($stepper) if $self.high => $what,
            _ => {
                let $stepper = &$self.three;
                $what
            }
        }
    };
    (mut $self:ident, $stepper:ident => $what:expr) => {
        match &mut $self.five {
            Some($stepper) if $self.high => $what,
            _ => {
                let $stepper = &mut $self.three;
                $what
            }
        }
    };
}

impl Graded {
    pub fn new<S: System + ?Sized>(system: &S, elimination: Elimination) -> Self {
        Graded {
            elimination,
            three: Collocation::new(system, elimination),
            five: None,
            high: false,
            wanted: false,
            rival: None,
            calm: 0,
            barred: 0,
            lost: 0,
            tried: false,
        }
    }

    /// The method that made the step tried last.
    pub fn method(&self) -> &'static Method {
        if self.high {
            &radau_iia::FIVE
        } else {
            &radau_iia::METHOD
        }
    }

    pub fn restart(&mut self) {
        (self.high, self.wanted, self.tried) = (false, false, false);
        (self.calm, self.barred, self.lost) = (0, 0, 0);
        self.rival = None;
        self.three.restart();
    }

    pub fn expect_hard(&mut self, hard: bool) {
        self.three.expect_hard(hard);
    }

    pub fn is_hard(&self) -> bool {
        active!(self, stepper => stepper.is_hard())
    }

    pub fn attempt<S: System + ?Sized>(
        &mut self,
        system: &S,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Attempt {
        if self.tried && self.high {
            self.lost += LOST;
            if self.rival.take().is_some() || self.lost >= LIMIT {
                self.wanted = false;
                self.barred = PATIENCE;
            }
        }
        self.tried = true;
        self.change(system);
        active!(mut self, stepper => stepper.attempt(system, trial, counted))
    }

    /// Changes the number of stages where that is wanted.
    fn change<S: System + ?Sized>(&mut self, system: &S) {
        if self.wanted == self.high {
            return;
        }
        let elimination = self.elimination;
        let five = self
            .five
            .get_or_insert_with(|| Box::new(Collocation::new(system, elimination)));
        if self.wanted {
            five.take_over(&self.three);
            self.lost = 0;
        } else {
            self.three.take_over(five);
            self.calm = 0;
        }
        self.high = self.wanted;
    }

    /// The step tried last, of this length [s], is kept, and its error allows `next` [s]: what the next step is to be.
    pub fn choose(&mut self, length: f64, next: f64) -> f64 {
        let hard = self.is_hard();
        if !self.high {
            self.barred = self.barred.saturating_sub(1);
            self.calm = if hard { 0 } else { self.calm + 1 };
            if self.calm >= CALM && self.barred == 0 {
                self.wanted = true;
                self.rival = Some(next);
            }
            return next;
        }
        self.lost = self.lost.saturating_sub(1);
        let shorter = match self.rival {
            // A step cut short by an event says nothing yet.
            Some(rival) if length < 0.5 * rival && !hard => return next,
            Some(rival) if next < PAYS * rival || hard => rival.min(next),
            _ if hard => SHORTER * next,
            _ => {
                self.rival = None;
                return next;
            }
        };
        self.rival = None;
        self.wanted = false;
        self.barred = PATIENCE;
        shorter
    }

    pub fn carry(&mut self, changes: &mut [f64], share: f64) {
        active!(mut self, stepper => stepper.carry(changes, share));
    }

    pub fn stages(&self) -> &[f64] {
        active!(self, stepper => stepper.stages())
    }

    pub fn end(&self) -> &[f64] {
        active!(self, stepper => stepper.end())
    }

    pub fn lay(&mut self) {
        active!(mut self, stepper => stepper.lay());
    }

    pub fn dense(&self) -> Dense<'_> {
        active!(self, stepper => stepper.dense())
    }

    pub fn keep(&mut self) {
        self.tried = false;
        active!(mut self, stepper => stepper.keep());
    }
}
