//! The instant in which charges meet: two implicit Euler steps that are short against everything else.
//!
//! The first lets charges meet that are tied together (a loop of capacitors and sources) and may need an impulse of
//! current, the second gives the currents that flow afterwards.

use super::newton::{Equation, Failure, Newton, Rules};
use super::statistics::Statistics;
use super::system::{Point, System};
use super::tolerances::Tolerances;

/// Length [s] of the implicit Euler step that stands for an instant. A thousandth of a picosecond is short against
/// every time constant of a lumped circuit.
pub(super) const INSTANT: f64 = 1e-15;
/// The instant is lengthened up to so many seconds where the rounding of charges would show in x: the current that
/// holds a farad at a source's voltage is uncertain by the charge's last digit over the instant.
pub(super) const LONGEST_INSTANT: f64 = 1e-7;
/// Rounding may show by this share of a tolerance.
pub(super) const ROUNDING: f64 = 0.05;
/// While the instant is lengthened, x moves by its rounding, and by no more than so many times that.
const MERE_ROUNDING: f64 = 4.0;

/// Rules for the instant's equation.
const INSTANT_RULES: Rules = Rules {
    close: 1e-2,
    longest: 60,
    fresh: true,
};

/// How charges met in an instant: what a derivative of it needs, and where impulses show.
#[derive(Clone, Debug, Default)]
pub(crate) struct Meeting {
    /// Reciprocal lengths [1/s] of its two steps.
    pub rates: [f64; 2],
    /// Unknowns after the first step: an impulse stands in them as a large value that lasts the step.
    pub x: Vec<f64>,
}

/// Passes instants, with memory of its own.
#[derive(Debug)]
pub(crate) struct Instant {
    /// How charges met in the last one.
    pub meeting: Meeting,
    /// Time [s] that the last one's steps have spent.
    pub spent: f64,
    weights: Vec<f64>,
    later: Vec<f64>,
}

impl Instant {
    pub fn new(size: usize) -> Self {
        Instant {
            meeting: Meeting {
                rates: [1.0 / INSTANT; 2],
                x: vec![0.0; size],
            },
            spent: 0.0,
            weights: vec![0.0; size],
            later: vec![0.0; size],
        }
    }

    /// Passes the instant after which q is `charge`, from the guess in `x`: `charge` is overwritten; `at.x` is not looked at.
    #[allow(clippy::too_many_arguments)]
    pub fn pass<S: System + ?Sized>(
        &mut self,
        system: &S,
        newton: &mut Newton,
        at: Point<'_>,
        tolerances: &Tolerances,
        charge: &mut [f64],
        x: &mut [f64],
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        newton.forget();
        let guess = x.to_vec();
        let mut step = Step {
            time: at.time,
            rate: 1.0 / INSTANT,
            mode: at.mode,
        };
        let mut length = INSTANT;
        // Where an instant is too short to be told from its rounding, a longer one may settle.
        while let Err(failure) = self.solve(system, newton, step, tolerances, charge, x, counted) {
            if length >= LONGEST_INSTANT {
                return Err(failure);
            }
            length *= 10.0;
            step.rate = 1.0 / length;
            x.copy_from_slice(&guess);
        }
        self.meeting.x.copy_from_slice(x);
        self.meeting.rates = [step.rate; 2];
        system.evaluate(Point { x, ..at }, false, &mut newton.out);
        counted.evaluations += 1;
        charge.copy_from_slice(&newton.out.q);

        let moves = self.moves(system, newton, at, x, counted);
        length = length.max(256.0 * f64::EPSILON * at.time.abs());
        while let Err(failure) = self.after(
            system,
            newton,
            (at, length, moves),
            tolerances,
            charge,
            x,
            counted,
        ) {
            if length >= LONGEST_INSTANT {
                return Err(failure);
            }
            length *= 10.0;
            x.copy_from_slice(&self.meeting.x);
        }
        self.meeting.rates[1] = 1.0 / length;
        while length < LONGEST_INSTANT {
            tolerances.weigh(x, &mut self.weights);
            let shows = newton.rounding(charge, 1.0 / length, &self.weights);
            if shows <= ROUNDING {
                break;
            }
            length *= 10.0;
            let mut longer = x.to_vec();
            let solved = self.after(
                system,
                newton,
                (at, length, moves),
                tolerances,
                charge,
                &mut longer,
                counted,
            );
            let moved = longer.iter().zip(&*x).zip(&self.weights);
            let moved = moved.map(|((longer, x), weight)| ((longer - x) * weight).abs());
            // More than rounding: the circuit itself moves in so long an instant.
            if solved.is_err() || moved.fold(0.0, f64::max) > MERE_ROUNDING * shows {
                break;
            }
            x.copy_from_slice(&longer);
            self.meeting.rates[1] = 1.0 / length;
        }
        // A step along a moving clock leads back to the instant itself.
        let [first, second] = self.meeting.rates.map(|rate| 1.0 / rate);
        self.spent = if moves { first } else { first + second };
        newton.forget();
        Ok(())
    }

    /// True where the equations change with the clock alone: a source with a slope, a switch on its way.
    fn moves<S: System + ?Sized>(
        &mut self,
        system: &S,
        newton: &mut Newton,
        at: Point<'_>,
        x: &[f64],
        counted: &mut Statistics,
    ) -> bool {
        let time = Step::lasting(LONGEST_INSTANT, at).time;
        self.later.copy_from_slice(&newton.out.f);
        system.evaluate(Point { x, time, ..at }, false, &mut newton.out);
        counted.evaluations += 1;
        self.later != newton.out.f
    }

    /// The second step: values at the instant's end with the charges that the first has left.
    ///
    /// Where the clock moves the equations, the step goes along with it and so finds the current that a source's slope
    /// drives through a capacitor; its values are those of its end, and a step of twice the length leads back to the
    /// instant itself.
    #[allow(clippy::too_many_arguments)]
    fn after<S: System + ?Sized>(
        &mut self,
        system: &S,
        newton: &mut Newton,
        (at, length, moves): (Point<'_>, f64, bool),
        tolerances: &Tolerances,
        charge: &[f64],
        x: &mut [f64],
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        if !moves {
            let step = Step {
                time: at.time,
                rate: 1.0 / length,
                mode: at.mode,
            };
            return self.solve(system, newton, step, tolerances, charge, x, counted);
        }
        let near = Step::lasting(length, at);
        let far = Step::lasting(2.0 / near.rate, at);
        self.solve(system, newton, near, tolerances, charge, x, counted)?;
        let mut later = std::mem::take(&mut self.later);
        later.copy_from_slice(x);
        let solved = self.solve(system, newton, far, tolerances, charge, &mut later, counted);
        for (x, later) in x.iter_mut().zip(&later) {
            *x = 2.0 * *x - later;
        }
        self.later = later;
        solved
    }

    #[allow(clippy::too_many_arguments)]
    fn solve<S: System + ?Sized>(
        &mut self,
        system: &S,
        newton: &mut Newton,
        step: Step<'_>,
        tolerances: &Tolerances,
        charge: &[f64],
        x: &mut [f64],
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        tolerances.weigh(x, &mut self.weights);
        let rest = newton.rest(charge, -step.rate);
        let equation = Equation {
            time: step.time,
            mode: step.mode,
            rate: step.rate,
            rest: &rest,
            shunt: 0.0,
            shunted: &[],
            share: None,
        };
        let solved = newton.solve(system, &equation, INSTANT_RULES, &self.weights, x, counted);
        newton.keep_rest(rest);
        solved
    }
}

/// An implicit Euler step of an instant.
#[derive(Clone, Copy)]
struct Step<'a> {
    time: f64,
    rate: f64,
    mode: &'a [f64],
}

impl<'a> Step<'a> {
    /// A step of about this length [s] from a point; its end is an instant that a number can hold.
    fn lasting(length: f64, from: Point<'a>) -> Self {
        let time = from.time + length;
        Step {
            time,
            rate: 1.0 / (time - from.time),
            mode: from.mode,
        }
    }
}
