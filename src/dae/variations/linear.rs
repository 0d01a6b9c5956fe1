//! The linear equations of an instant: (rate C + G) v = right, with the slopes of one point.

use crate::dae::instant::INSTANT;
use crate::dae::newton::evaluation;
use crate::dae::pattern::Pattern;
use crate::dae::statistics::Statistics;
use crate::dae::system::{Evaluation, Point, System};
use crate::math::{Elimination, Matrix, Singular};

/// A matrix and the evaluation that it was made of.
#[derive(Debug)]
pub(super) struct Linear {
    pub pattern: Pattern,
    pub out: Evaluation,
    matrix: Matrix<f64>,
    pub rate: f64,
}

impl Linear {
    pub fn new<S: System + ?Sized>(system: &S) -> Self {
        let pattern = system.pattern().clone();
        let n = system.size();
        Linear {
            out: evaluation(n, pattern.len()),
            matrix: Matrix::new(n, &pattern.starts, &pattern.rows, Elimination::Automatic),
            pattern,
            rate: 0.0,
        }
    }

    /// Takes the slopes at a point and factors.
    pub fn at<S: System + ?Sized>(
        &mut self,
        system: &S,
        at: Point<'_>,
        rate: f64,
        counted: &mut Statistics,
    ) -> Result<(), Singular> {
        system.evaluate(at, true, &mut self.out);
        counted.evaluations += 1;
        self.factor(rate, counted)
    }

    /// Factors anew at another rate.
    pub fn factor(&mut self, rate: f64, counted: &mut Statistics) -> Result<(), Singular> {
        let slopes = self.out.dq.iter().zip(&self.out.df);
        for (value, (&dq, &df)) in self.matrix.values_mut().iter_mut().zip(slopes) {
            *value = rate * dq + df;
        }
        self.rate = rate;
        counted.factorizations += 1;
        self.matrix.factor()
    }

    pub fn solve(&mut self, v: &mut [f64], counted: &mut Statistics) {
        counted.solves += 1;
        self.matrix.solve(v);
    }

    /// dq/dt at this point, without what a residual of the algebraic equations would add: C (C + G/rate)^-1 (-f).
    pub fn charge_slope(&mut self, counted: &mut Statistics) -> Vec<f64> {
        let mut v: Vec<f64> = self.out.f.iter().map(|f| -self.rate * f).collect();
        self.solve(&mut v, counted);
        let mut slope = vec![0.0; v.len()];
        multiply(&self.pattern, &self.out.dq, &v, &mut slope);
        slope
    }
}

/// `into` += A v for values on the pattern.
pub(super) fn multiply(pattern: &Pattern, values: &[f64], v: &[f64], into: &mut [f64]) {
    for (column, &v) in v.iter().enumerate() {
        for slot in pattern.starts[column]..pattern.starts[column + 1] {
            into[pattern.rows[slot]] += values[slot] * v;
        }
    }
}

/// dq/dt at a point, without what a residual of the algebraic equations would add.
pub(crate) fn charge_slope<S: System + ?Sized>(
    system: &S,
    at: Point<'_>,
    counted: &mut Statistics,
) -> Result<Vec<f64>, Singular> {
    let mut linear = Linear::new(system);
    linear.at(system, at, 1.0 / INSTANT, counted)?;
    Ok(linear.charge_slope(counted))
}
