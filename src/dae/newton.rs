//! Newton's iteration for one point: rate q(x) + f(x, t) + rest = 0.
//!
//! Serves the stages of the diagonally implicit methods (rate = 1/(h d)), the consistent start (rate = 1/h) and the
//! operating point (rate = 0). Steps are limited by the system where a law is exponential; the size of a step is its
//! largest entry in tolerances; from the ratio of two steps follows how far the solution still is.

use super::pattern::Pattern;
use super::statistics::Statistics;
use super::system::{Evaluation, Point, System};
use super::tolerances::{SIGNS, drowns, lags, largest, rounding};
use super::trouble::Trouble;
use crate::math::{Elimination, Matrix};

/// An equation to be solved.
pub(crate) struct Equation<'a> {
    /// Time [s].
    pub time: f64,
    /// Modes.
    pub mode: &'a [f64],
    /// Factor of q [1/s].
    pub rate: f64,
    /// Constant part, one value per row.
    pub rest: &'a [f64],
    /// Conductance-like value added to `rows` on the diagonal.
    pub shunt: f64,
    /// Rows that may be shunted.
    pub shunted: &'a [usize],
    /// Share of the sources where they are being raised.
    pub share: Option<f64>,
}

/// When to stop.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Rules {
    /// Settled when the distance left is estimated below this many tolerances.
    pub close: f64,
    /// Iterations at most.
    pub longest: usize,
    /// Recompute the slopes in every iteration.
    pub fresh: bool,
}

/// No step promises that less than this share of it is left: after a limited one comes a huge one that leads back, and
/// what falls from there says nothing.
pub(crate) const BEST: f64 = 1e-3;

/// Why the iteration ended without a solution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Failure {
    pub unknown: usize,
    pub cause: Trouble,
}

/// The iteration's memory.
#[derive(Debug)]
pub(crate) struct Newton {
    pub matrix: Matrix<f64>,
    pub out: Evaluation,
    step: Vec<f64>,
    step_before: Vec<f64>,
    rest: Vec<f64>,
    /// Rate for which the factors hold; not a number where there are none.
    factored: f64,
}

impl Newton {
    pub fn new<S: System + ?Sized>(system: &S, elimination: Elimination) -> Self {
        let pattern = system.pattern();
        let size = system.size();
        Newton {
            matrix: Matrix::new(size, &pattern.starts, &pattern.rows, elimination),
            out: evaluation(size, pattern.len()),
            step: vec![0.0; size],
            step_before: vec![0.0; size],
            rest: Vec::with_capacity(size),
            factored: f64::NAN,
        }
    }

    /// Forgets the factors: the equations have changed.
    pub fn forget(&mut self) {
        self.factored = f64::NAN;
    }

    /// A constant part `factor` times `charge`, in memory that [`Newton::keep_rest`] takes back.
    pub fn rest(&mut self, charge: &[f64], factor: f64) -> Vec<f64> {
        let mut rest = std::mem::take(&mut self.rest);
        rest.clear();
        rest.extend(charge.iter().map(|charge| factor * charge));
        rest
    }

    /// Keeps the memory of [`Newton::rest`] for the next time.
    pub fn keep_rest(&mut self, rest: Vec<f64>) {
        self.rest = rest;
    }

    /// The charges at the solution found last: those of the last evaluation, carried along the last step by their slopes.
    pub fn charges(&self, pattern: &Pattern, charges: &mut [f64]) {
        charges.copy_from_slice(&self.out.q);
        for (column, step) in self.step.iter().enumerate() {
            for slot in pattern.starts[column]..pattern.starts[column + 1] {
                charges[pattern.rows[slot]] += self.out.dq[slot] * step;
            }
        }
    }

    /// By how many tolerances x may move when the charges' last digits do, through the last factors.
    pub fn rounding(&mut self, charge: &[f64], rate: f64, weights: &[f64]) -> f64 {
        let mut most = 0.0_f64;
        for signs in SIGNS {
            for (row, (step, charge)) in self.step.iter_mut().zip(charge).enumerate() {
                *step = rounding(row, rate * charge, signs);
            }
            self.matrix.solve(&mut self.step);
            most = most.max(largest(&self.step, weights).0);
        }
        most
    }

    /// True where the last Newton step is rounding and nothing else in every unknown that it moves by more than `close`.
    #[cold]
    fn is_noise(
        &mut self,
        pattern: &Pattern,
        equation: &Equation<'_>,
        x: &[f64],
        weights: &[f64],
        close: f64,
    ) -> bool {
        let out = &self.out;
        let mut terms: Vec<f64> = (0..x.len())
            .map(|row| {
                (equation.rate * out.q[row]).abs() + out.f[row].abs() + equation.rest[row].abs()
            })
            .collect();
        let rate = equation.rate.abs();
        pattern.add_magnitudes(
            |slot| rate * out.dq[slot].abs() + out.df[slot].abs(),
            x,
            &mut terms,
        );
        self.step_before.copy_from_slice(&self.step);
        let mut noise: Vec<f64> = x.iter().map(|x| 8.0 * f64::EPSILON * x.abs()).collect();
        for signs in SIGNS {
            for (row, (step, terms)) in self.step.iter_mut().zip(&terms).enumerate() {
                *step = rounding(row, *terms, signs);
            }
            self.matrix.solve(&mut self.step);
            for (noise, step) in noise.iter_mut().zip(&self.step) {
                *noise = noise.max(step.abs());
            }
        }
        self.step.copy_from_slice(&self.step_before);
        drowns(&self.step, &noise, weights, close)
    }

    /// Solves from the guess in `x`; leaves the solution there. `out` then holds the last evaluation, one step before.
    pub fn solve<S: System + ?Sized>(
        &mut self,
        system: &S,
        equation: &Equation<'_>,
        rules: Rules,
        weights: &[f64],
        x: &mut [f64],
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        let mut before = f64::INFINITY;
        let mut culprit = 0;
        let mut eta = 1.0;
        let mut kept = !rules.fresh && self.factored == equation.rate;
        for iteration in 0..rules.longest {
            self.evaluate(system, equation, x, !kept, counted)?;
            if !kept {
                self.factor(equation, counted)?;
            }
            self.residual(equation, x);
            self.matrix.solve(&mut self.step);
            counted.solves += 1;
            counted.newton_iterations += 1;
            let limited = system.limit(x, &mut self.step);
            let (size, unknown) = largest(&self.step, weights);
            if !size.is_finite() {
                return Err(Failure {
                    unknown,
                    cause: Trouble::NotFinite,
                });
            }
            culprit = unknown;
            for (value, step) in x.iter_mut().zip(&self.step) {
                *value += step;
            }
            if limited {
                (before, kept) = (f64::INFINITY, false);
                continue;
            }
            let rate = if before.is_finite() {
                size / before
            } else {
                f64::NAN
            };
            if iteration > 0 && rate.is_finite() {
                eta = if rate < 1.0 {
                    f64::max(rate / (1.0 - rate), BEST)
                } else {
                    f64::INFINITY
                };
            }
            let close = if before.is_finite() {
                eta * size <= rules.close
                    && !lags(&self.step, &self.step_before, weights, rules.close)
            } else {
                size <= 0.1 * rules.close
            };
            if close {
                return Ok(());
            }
            self.step_before.copy_from_slice(&self.step);
            if rate > 0.5 && self.is_noise(system.pattern(), equation, x, weights, rules.close) {
                return Ok(());
            }
            // Slow or growing with old slopes: take new ones at the present point.
            kept = !rules.fresh && iteration < 4 && (rate.is_nan() || rate <= 0.3);
            before = size;
        }
        self.forget();
        Err(Failure {
            unknown: culprit,
            cause: Trouble::Unsettled,
        })
    }

    fn evaluate<S: System + ?Sized>(
        &mut self,
        system: &S,
        equation: &Equation<'_>,
        x: &[f64],
        slopes: bool,
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        let at = Point {
            time: equation.time,
            x,
            mode: equation.mode,
        };
        counted.evaluations += 1;
        match equation.share {
            Some(share) => {
                system.evaluate_raised(at, share, slopes, &mut self.out);
            }
            None => system.evaluate(at, slopes, &mut self.out),
        }
        let sound = |(f, q): (&f64, &f64)| (f + q).is_finite();
        match self
            .out
            .f
            .iter()
            .zip(&self.out.q)
            .position(|pair| !sound(pair))
        {
            Some(unknown) => Err(Failure {
                unknown,
                cause: Trouble::NotFinite,
            }),
            None => Ok(()),
        }
    }

    fn factor(&mut self, equation: &Equation<'_>, counted: &mut Statistics) -> Result<(), Failure> {
        let values = self.matrix.values_mut();
        for ((value, &dq), &df) in values.iter_mut().zip(&self.out.dq).zip(&self.out.df) {
            *value = equation.rate * dq + df;
        }
        if equation.shunt != 0.0 {
            for &row in equation.shunted {
                self.matrix.add_to_diagonal(row, equation.shunt);
            }
        }
        counted.factorizations += 1;
        self.factored = equation.rate;
        self.matrix.factor().map_err(|singular| {
            self.factored = f64::NAN;
            Failure {
                unknown: singular.column,
                cause: Trouble::Singular,
            }
        })
    }

    fn residual(&mut self, equation: &Equation<'_>, x: &[f64]) {
        for (row, step) in self.step.iter_mut().enumerate() {
            *step = -(equation.rate * self.out.q[row] + self.out.f[row] + equation.rest[row]);
        }
        if equation.shunt != 0.0 {
            for &row in equation.shunted {
                self.step[row] -= equation.shunt * x[row];
            }
        }
    }
}

/// An evaluation with room for `size` rows and `positions` slopes.
pub(crate) fn evaluation(size: usize, positions: usize) -> Evaluation {
    Evaluation {
        f: vec![0.0; size],
        q: vec![0.0; size],
        df: vec![0.0; positions],
        dq: vec![0.0; positions],
    }
}
