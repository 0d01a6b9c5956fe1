//! Where a solution begins: the operating point, and the consistent values that go with given charges.

use super::instant::Instant;
use super::newton::{Equation, Failure, Newton, Rules};
use super::statistics::Statistics;
use super::system::{Point, System};
use super::tolerances::Tolerances;
use super::trouble::{StartError, Trouble};
use crate::math::Elimination;

/// Rules for the operating point: many limited steps may be needed to bring junctions into conduction.
const REST_RULES: Rules = Rules {
    close: 1e-2,
    longest: 150,
    fresh: true,
};
/// Rules while a parameter is being moved: where this does not settle, a smaller move will.
const MOVING_RULES: Rules = Rules {
    close: 1e-2,
    longest: 40,
    fresh: true,
};

/// Finds x such that f(x) = 0 with charges at rest, from the guess in `x`.
///
/// Tries, in this order: Newton's iteration; shunts on the diagonal of the rows `shunted`, eased away; sources raised
/// from zero, where the system can; integration from the guess with ever longer steps until nothing moves.
pub fn operating_point<S: System + ?Sized>(
    system: &S,
    time: f64,
    mode: &[f64],
    x: &mut [f64],
    tolerances: &Tolerances,
    shunted: &[usize],
) -> Result<Statistics, StartError> {
    let mut search = Search::new(system, time, mode, tolerances, shunted, x);
    let guess = x.to_vec();
    let mut failure = match search.rest(x) {
        Ok(()) => return Ok(search.counted),
        Err(failure) => failure,
    };
    for way in [Way::Eased, Way::Raised, Way::Settled] {
        x.copy_from_slice(&guess);
        let found = match way {
            Way::Eased => search.eased(x),
            Way::Raised => search.raised(x),
            Way::Settled => search.settled(x),
        };
        match found {
            Ok(()) => return Ok(search.counted),
            Err(last) => failure = last,
        }
    }
    Err(StartError {
        unknown: Some(failure.unknown),
        cause: failure.cause,
    })
}

/// Finds x such that q(x) = `charge` and the algebraic equations hold, from the guess in `x`.
///
/// Two implicit Euler steps of an instant's length: the first lets charges meet that are tied together (a loop of
/// capacitors and sources) and may need an impulse of current, the second gives the currents that flow afterwards.
pub fn consistent_start<S: System + ?Sized>(
    system: &S,
    time: f64,
    mode: &[f64],
    charge: &[f64],
    x: &mut [f64],
    tolerances: &Tolerances,
) -> Result<Statistics, StartError> {
    let mut newton = Newton::new(system, Elimination::Automatic);
    let mut counted = Statistics::default();
    let mut rest = charge.to_vec();
    let mut instant = Instant::new(x.len());
    instant
        .pass(
            system,
            &mut newton,
            Point { time, x: &[], mode },
            tolerances,
            &mut rest,
            x,
            &mut counted,
        )
        .map_err(|failure| StartError {
            unknown: Some(failure.unknown),
            cause: failure.cause,
        })?;
    Ok(counted)
}

/// Ways to an operating point where Newton's iteration alone does not lead there.
enum Way {
    Eased,
    Raised,
    Settled,
}

struct Search<'a, S: ?Sized> {
    system: &'a S,
    time: f64,
    mode: &'a [f64],
    shunted: &'a [usize],
    tolerances: &'a Tolerances,
    weights: Vec<f64>,
    rest: Vec<f64>,
    newton: Newton,
    counted: Statistics,
}

impl<'a, S: System + ?Sized> Search<'a, S> {
    fn new(
        system: &'a S,
        time: f64,
        mode: &'a [f64],
        tolerances: &'a Tolerances,
        shunted: &'a [usize],
        x: &[f64],
    ) -> Self {
        let mut weights = vec![0.0; x.len()];
        tolerances.weigh(x, &mut weights);
        Search {
            system,
            time,
            mode,
            shunted,
            tolerances,
            weights,
            rest: vec![0.0; x.len()],
            newton: Newton::new(system, Elimination::Automatic),
            counted: Statistics::default(),
        }
    }

    fn solve(
        &mut self,
        x: &mut [f64],
        rate: f64,
        shunt: f64,
        share: Option<f64>,
        rules: Rules,
    ) -> Result<(), Failure> {
        self.tolerances.weigh(x, &mut self.weights);
        let equation = Equation {
            time: self.time,
            mode: self.mode,
            rate,
            rest: &self.rest,
            shunt,
            shunted: self.shunted,
            share,
        };
        self.newton.solve(
            self.system,
            &equation,
            rules,
            &self.weights,
            x,
            &mut self.counted,
        )
    }

    fn rest(&mut self, x: &mut [f64]) -> Result<(), Failure> {
        self.rest.fill(0.0);
        self.solve(x, 0.0, 0.0, None, REST_RULES)
    }

    /// Shunts from 10 mS down to nothing; the factor between two of them adapts.
    fn eased(&mut self, x: &mut [f64]) -> Result<(), Failure> {
        self.rest.fill(0.0);
        let mut good = x.to_vec();
        let (mut shunt, mut factor) = (1e-2, 0.1);
        self.solve(x, 0.0, shunt, None, REST_RULES)?;
        while shunt > 1e-13 {
            good.copy_from_slice(x);
            match self.solve(x, 0.0, shunt * factor, None, MOVING_RULES) {
                Ok(()) => {
                    shunt *= factor;
                    factor = f64::max(factor * factor, 1e-3);
                }
                Err(failure) if factor > 0.9 => return Err(failure),
                Err(_) => {
                    x.copy_from_slice(&good);
                    factor = factor.sqrt();
                }
            }
        }
        self.solve(x, 0.0, 0.0, None, REST_RULES)
    }

    /// Sources from nothing to their full value; the move adapts.
    fn raised(&mut self, x: &mut [f64]) -> Result<(), Failure> {
        let at = Point {
            time: self.time,
            x,
            mode: self.mode,
        };
        if !self
            .system
            .evaluate_raised(at, 0.0, false, &mut self.newton.out)
        {
            return Err(Failure {
                unknown: 0,
                cause: Trouble::Unsettled,
            });
        }
        self.rest.fill(0.0);
        x.fill(0.0);
        self.solve(x, 0.0, 0.0, Some(0.0), REST_RULES)?;
        let mut good = x.to_vec();
        let (mut share, mut length) = (0.0, 0.1_f64);
        while share < 1.0 {
            good.copy_from_slice(x);
            let next = f64::min(share + length, 1.0);
            match self.solve(x, 0.0, 0.0, Some(next), MOVING_RULES) {
                Ok(()) => {
                    share = next;
                    length *= 1.5;
                }
                Err(failure) if length < 1e-6 => return Err(failure),
                Err(_) => {
                    x.copy_from_slice(&good);
                    length *= 0.25;
                }
            }
        }
        self.solve(x, 0.0, 0.0, None, REST_RULES)
    }

    /// Implicit Euler from the guess at a standing clock, the steps growing until charges hold nothing back.
    fn settled(&mut self, x: &mut [f64]) -> Result<(), Failure> {
        let mut good = x.to_vec();
        let mut charge = vec![0.0; x.len()];
        let mut step = 1e-9;
        for _ in 0..400 {
            good.copy_from_slice(x);
            let at = Point {
                time: self.time,
                x,
                mode: self.mode,
            };
            self.system.evaluate(at, false, &mut self.newton.out);
            charge.copy_from_slice(&self.newton.out.q);
            for (rest, charge) in self.rest.iter_mut().zip(&charge) {
                *rest = -charge / step;
            }
            match self.solve(x, 1.0 / step, 0.0, None, MOVING_RULES) {
                Ok(()) if step > 1e9 => {
                    // Nodes that nothing but capacitors hold keep their charge: this is their resting value.
                    good.copy_from_slice(x);
                    return self.rest(x).or_else(|failure| {
                        x.copy_from_slice(&good);
                        if failure.cause == Trouble::Singular {
                            Ok(())
                        } else {
                            Err(failure)
                        }
                    });
                }
                Ok(()) => step *= 4.0,
                Err(failure) if step < 1e-18 => return Err(failure),
                Err(_) => {
                    x.copy_from_slice(&good);
                    step *= 0.1;
                }
            }
        }
        Err(Failure {
            unknown: 0,
            cause: Trouble::Unsettled,
        })
    }
}
