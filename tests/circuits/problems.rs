//! Problems with a solution that is known from outside, marched and held against it over the whole run.

use super::cases::whole;
use super::closed::{barely, driven, ring, saturating};
use super::published::{AMPLIFIER, MODULATOR, amplifier, modulator};
use super::stamps::{Places, Stamps};
use coilbreak::dae::{
    Advance, Evaluation, March, MarchError, Method, Pattern, Point, State, Statistics, Step,
    System, Tolerances,
};
use std::ops::ControlFlow;

/// A system without modes from one closure that stamps it at (time, x).
pub struct Hand<F> {
    places: Places,
    stamp: F,
}

impl<F: Fn(&mut Stamps<'_>, f64, &[f64])> Hand<F> {
    pub fn new(size: usize, stamp: F) -> Self {
        let x = vec![0.0; size];
        Hand {
            places: Places::new(size, |s| stamp(s, 0.0, &x)),
            stamp,
        }
    }
}

impl<F: Fn(&mut Stamps<'_>, f64, &[f64])> System for Hand<F> {
    fn size(&self) -> usize {
        self.places.pattern.size
    }
    fn pattern(&self) -> &Pattern {
        &self.places.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        self.places
            .fill(slopes, out, |s| (self.stamp)(s, at.time, at.x));
    }
}

/// What is known of the solution.
pub enum Truth {
    /// All of it: values of all unknowns at a time [s].
    Everywhere(fn(f64) -> Vec<f64>),
    /// The values at the end.
    End(&'static [f64]),
}

pub struct Problem {
    pub name: &'static str,
    pub source: &'static str,
    pub system: fn() -> Box<dyn System>,
    /// Consistent values at time zero.
    pub start: fn() -> Vec<f64>,
    /// End of the run [s].
    pub until: f64,
    /// Largest swing of each unknown.
    pub swings: &'static [f64],
    pub truth: Truth,
}

pub const PROBLEMS: &[Problem] = &[
    Problem {
        name: "ring of 20 periods",
        source: "closed form of the damped oscillation",
        system: ring::system,
        start: ring::start,
        until: 20.0 * ring::PERIOD,
        swings: ring::SWINGS,
        truth: Truth::Everywhere(ring::solution),
    },
    Problem {
        name: "ring of 2000 periods",
        source: "closed form of the damped oscillation",
        system: ring::system,
        start: ring::start,
        until: 2000.0 * ring::PERIOD,
        swings: ring::SWINGS,
        truth: Truth::Everywhere(ring::solution),
    },
    Problem {
        name: "barely damped ring of 5000 periods",
        source: "closed form of the damped oscillation",
        system: barely::system,
        start: barely::start,
        until: 5000.0 * barely::PERIOD,
        swings: barely::SWINGS,
        truth: Truth::Everywhere(barely::solution),
    },
    Problem {
        name: "resonant circuit on a sine, 2000 periods",
        source: "closed form: forced and free oscillation",
        system: driven::system,
        start: driven::start,
        until: 2000.0 * driven::PERIOD,
        swings: driven::SWINGS,
        truth: Truth::Everywhere(driven::solution),
    },
    Problem {
        name: "saturating inductor on a step",
        source: "separation of variables, integral by Gauss's rule",
        system: saturating::system,
        start: saturating::start,
        until: saturating::UNTIL,
        swings: saturating::SWINGS,
        truth: Truth::Everywhere(saturating::solution),
    },
    Problem {
        name: "transistor amplifier",
        source: "test set for initial value problems, values at 0.2 s (from memory)",
        system: || Box::new(amplifier::system()),
        start: amplifier::start,
        until: 0.2,
        swings: amplifier::SWINGS,
        truth: Truth::End(AMPLIFIER),
    },
    Problem {
        name: "ring modulator",
        source: "test set for initial value problems, values at 1 ms (from memory)",
        system: || Box::new(modulator::system()),
        start: || vec![0.0; 15],
        until: 1e-3,
        swings: modulator::SWINGS,
        truth: Truth::End(MODULATOR),
    },
];

/// Largest error of any unknown over its swing, and the work.
#[derive(Clone, Copy, Debug)]
pub struct Reached {
    pub error: f64,
    /// The unknown that is off most.
    pub unknown: usize,
    pub counted: Statistics,
}

impl Problem {
    /// True where the values are printed ones.
    pub fn is_published(&self) -> bool {
        matches!(self.truth, Truth::End(_))
    }

    /// Marches at an accuracy of the whole run and shows every step; the values at the end, and the work.
    pub fn march(
        &self,
        method: &'static Method,
        accuracy: f64,
        watch: &mut dyn FnMut(&Step<'_>),
    ) -> Result<(Vec<f64>, Statistics), MarchError> {
        let local = method.local_tolerance(accuracy);
        let absolute = self.swings.iter().map(|swing| local * swing).collect();
        let tolerances = Tolerances::absolute(absolute);
        let state = State {
            time: 0.0,
            x: (self.start)(),
            mode: vec![],
        };
        let mut march = March::new(method, state);
        march.run(
            &*(self.system)(),
            whole(self.until, &tolerances, accuracy),
            &mut |advance| {
                if let Advance::Step(step) = advance {
                    watch(step);
                }
                ControlFlow::Continue(())
            },
        )?;
        Ok((march.state.x, march.counted))
    }

    /// Marches and holds every waveform against what is known, at points within the steps too.
    pub fn run(&self, method: &'static Method, accuracy: f64) -> Result<Reached, MarchError> {
        let mut x = vec![0.0; self.swings.len()];
        let mut worst = (0.0, 0);
        let mut hold = |x: &[f64], truth: &[f64]| {
            for (k, (x, truth)) in x.iter().zip(truth).enumerate() {
                let error = (x - truth).abs() / self.swings[k];
                if error > worst.0 {
                    worst = (error, k);
                }
            }
        };
        let (end, counted) = self.march(method, accuracy, &mut |step| {
            if let Truth::Everywhere(solution) = &self.truth {
                for share in [0.15, 0.4, 0.65, 0.85, 1.0] {
                    let time = step.from + share * (step.to - step.from);
                    step.at(time, &mut x);
                    hold(&x, &solution(time));
                }
            }
        })?;
        if let Truth::End(truth) = self.truth {
            hold(&end, truth);
        }
        Ok(Reached {
            error: worst.0,
            unknown: worst.1,
            counted,
        })
    }
}
