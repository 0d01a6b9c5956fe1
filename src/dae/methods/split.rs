//! The Newton matrix of a collocation step with one pair of slopes C = dq/dx, G = df/dx for all stages.
//!
//! W/h x C + 1 x G falls apart, through the transform T of W, into (w/h) C + G for each eigenvalue w of W: one real
//! matrix and (S - 1)/2 complex ones of the system's own size. Hairer & Wanner II, IV.8 (from memory).

use super::super::pattern::Pattern;
use super::super::system::Evaluation;
use super::radau_iia::Coefficients;
use crate::math::{Elimination, Matrix, Singular};
use num_complex::Complex64;

/// Slopes differ much when one is less than a third of the other.
const MUCH: f64 = 0.67;

/// Matrices and slopes; factors are kept for as long as they serve.
#[derive(Debug)]
pub(crate) struct Split<const S: usize> {
    real: Matrix<f64>,
    pairs: Vec<Matrix<Complex64>>,
    right: Vec<f64>,
    right_pairs: Vec<Vec<Complex64>>,
    /// Slopes in use.
    pub dq: Vec<f64>,
    pub df: Vec<f64>,
    /// Slots of the diagonal.
    diagonal: Vec<usize>,
}

impl<const S: usize> Split<S> {
    pub fn new(pattern: &Pattern, elimination: Elimination) -> Self {
        let n = pattern.size;
        let pairs = (S - 1) / 2;
        Split {
            real: Matrix::new(n, &pattern.starts, &pattern.rows, elimination),
            pairs: vec![Matrix::new(n, &pattern.starts, &pattern.rows, elimination); pairs],
            right: vec![0.0; n],
            right_pairs: vec![vec![Complex64::default(); n]; pairs],
            dq: vec![0.0; pattern.len()],
            df: vec![0.0; pattern.len()],
            diagonal: (0..n).filter_map(|k| pattern.slot(k, k)).collect(),
        }
    }

    /// Takes over the order of elimination of a split with another number of stages.
    pub fn take_order<const R: usize>(&mut self, other: &Split<R>) {
        self.real.take_order(&other.real);
    }

    /// Takes the slopes of an evaluation into use; the factors no longer hold.
    pub fn take_slopes(&mut self, out: &Evaluation) {
        self.dq.copy_from_slice(&out.dq);
        self.df.copy_from_slice(&out.df);
    }

    /// True where a diagonal entry of `rate` dq + df differs much between the slopes in use and those of `out`.
    ///
    /// The diagonal, because there an element's slope stands beside all else that holds its unknown: what changes
    /// without weight (a junction that blocks more or less) does not show.
    pub fn differs(&self, out: &Evaluation, rate: f64) -> bool {
        self.diagonal.iter().any(|&slot| {
            let used = rate * self.dq[slot] + self.df[slot];
            let found = rate * out.dq[slot] + out.df[slot];
            (used - found).abs() > MUCH * used.abs().max(found.abs())
        })
    }

    /// Factors the real matrix, which also carries the error estimate.
    pub fn factor_real(&mut self, table: &Coefficients<S>, length: f64) -> Result<(), Singular> {
        let rate = table.real / length;
        let slopes = self.dq.iter().zip(&self.df);
        for (value, (&dq, &df)) in self.real.values_mut().iter_mut().zip(slopes) {
            *value = rate * dq + df;
        }
        self.real.factor()
    }

    /// Factors the complex matrices.
    pub fn factor_pairs(&mut self, table: &Coefficients<S>, length: f64) -> Result<(), Singular> {
        for (matrix, &eigenvalue) in self.pairs.iter_mut().zip(&table.pairs) {
            matrix.take_order(&self.real);
            let rate = eigenvalue / length;
            let slopes = self.dq.iter().zip(&self.df);
            for (value, (&dq, &df)) in matrix.values_mut().iter_mut().zip(slopes) {
                *value = Complex64::new(rate.re * dq + df, rate.im * dq);
            }
            matrix.factor()?;
        }
        Ok(())
    }

    /// Solves with the real factors, in place.
    pub fn solve_real(&mut self, x: &mut [f64]) {
        self.real.solve(x);
    }

    /// Turns residuals (negated, one row per stage) into Newton steps, in place.
    pub fn solve(&mut self, table: &Coefficients<S>, steps: &mut [f64]) {
        let n = self.right.len();
        for row in 0..n {
            let residuals: [f64; S] = std::array::from_fn(|i| steps[i * n + row]);
            let turned: [f64; S] =
                std::array::from_fn(|k| (0..S).map(|i| table.back[k][i] * residuals[i]).sum());
            self.right[row] = turned[0];
            for (pair, right) in self.right_pairs.iter_mut().enumerate() {
                right[row] = Complex64::new(turned[1 + 2 * pair], turned[2 + 2 * pair]);
            }
        }
        self.real.solve(&mut self.right);
        for (matrix, right) in self.pairs.iter_mut().zip(&mut self.right_pairs) {
            matrix.solve(right);
        }
        for row in 0..n {
            let mut turned = [self.right[row]; S];
            for (pair, right) in self.right_pairs.iter().enumerate() {
                turned[1 + 2 * pair] = right[row].re;
                turned[2 + 2 * pair] = right[row].im;
            }
            for i in 0..S {
                steps[i * n + row] = (0..S).map(|k| table.transform[i][k] * turned[k]).sum();
            }
        }
    }
}
