//! The attempt of a diagonally implicit method: one stage after the other, all with one matrix.
//!
//! With d/dt q = -f, stage i solves q(X) + h d f(X) = q0 - h sum_{j<i} a_ij f_j. What f is there follows from the
//! charges, not from a new evaluation, which in stiff circuits would magnify what Newton's iteration left. The error
//! in x is the difference to the companion through the stage matrix: (C + h d G) e = -h sum (c_j - a_sj) f_j; it
//! covers algebraic unknowns too. Hairer & Wanner II, IV.8 and Hosea & Shampine (1996), from memory.

use super::super::dense::{Dense, divide_differences};
use super::super::newton::{Equation, Newton, Rules, evaluation};
use super::super::pattern::Pattern;
use super::super::statistics::Statistics;
use super::super::system::{Evaluation, System};
use super::super::tolerances::largest;
use super::super::trouble::Trouble;
use super::table::{Polynomial, Table};
use super::{Attempt, Trial};
use crate::math::Elimination;

/// The iteration may leave this share of a tolerance.
const RULES: Rules = Rules {
    close: 0.02,
    longest: 12,
    fresh: false,
};

/// Memory of the family.
#[derive(Debug)]
pub(crate) struct Diagonal {
    table: Table,
    polynomial: Polynomial,
    pattern: Pattern,
    newton: Newton,
    /// Values of the stages, then of nothing else: one row per stage.
    stages: Vec<f64>,
    /// f of the stages, likewise.
    slopes: Vec<f64>,
    /// Charge at the start and, once a step is tried, at its end.
    charge: Vec<f64>,
    charge_end: Vec<f64>,
    /// f at the start.
    slope: Vec<f64>,
    started: bool,
    out: Evaluation,
    rest: Vec<f64>,
    error: Vec<f64>,
    coefficients: Vec<f64>,
    /// Length of the step that the polynomial belongs to; zero where there is none.
    laid: f64,
    /// Where on that polynomial the next step starts: 1 after a step that was kept, 0 after one to be tried anew.
    origin: f64,
    tried: f64,
}

impl Diagonal {
    pub fn new<S: System + ?Sized>(table: Table, system: &S, elimination: Elimination) -> Self {
        let (n, s) = (system.size(), table.nodes.len());
        let polynomial = table.polynomial();
        Diagonal {
            coefficients: vec![0.0; n * polynomial.points.len()],
            polynomial,
            table,
            pattern: system.pattern().clone(),
            newton: Newton::new(system, elimination),
            stages: vec![0.0; n * s],
            slopes: vec![0.0; n * s],
            charge: vec![0.0; n],
            charge_end: vec![0.0; n],
            slope: vec![0.0; n],
            started: false,
            out: evaluation(n, system.pattern().len()),
            rest: vec![0.0; n],
            error: vec![0.0; n],
            laid: 0.0,
            origin: 0.0,
            tried: 0.0,
        }
    }

    pub fn restart(&mut self) {
        self.started = false;
        self.laid = 0.0;
        self.newton.forget();
    }

    pub fn attempt<S: System + ?Sized>(
        &mut self,
        system: &S,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Attempt {
        let (n, h) = (self.charge.len(), trial.length);
        self.tried = h;
        if !self.started {
            system.evaluate(trial.from, false, &mut self.out);
            counted.evaluations += 1;
            self.charge.copy_from_slice(&self.out.q);
            self.slope.copy_from_slice(&self.out.f);
            self.started = true;
        }
        self.stages[..n].copy_from_slice(trial.from.x);
        self.slopes[..n].copy_from_slice(&self.slope);
        for stage in 1..self.table.nodes.len() {
            if let Err(attempt) = self.solve(system, trial, stage, counted) {
                return attempt;
            }
        }
        self.weigh_error(trial, counted)
    }

    fn solve<S: System + ?Sized>(
        &mut self,
        system: &S,
        trial: Trial<'_>,
        stage: usize,
        counted: &mut Statistics,
    ) -> Result<(), Attempt> {
        let (n, h, d) = (self.charge.len(), trial.length, self.table.diagonal);
        let rate = 1.0 / (h * d);
        for row in 0..n {
            let mut sum = 0.0;
            for (j, weight) in self.table.rows[stage].iter().enumerate() {
                sum += weight * self.slopes[j * n + row];
            }
            self.rest[row] = sum / d - rate * self.charge[row];
        }
        self.predict(system, trial, stage);
        let time = trial.from.time + h * self.table.nodes[stage];
        let equation = Equation {
            time,
            mode: trial.from.mode,
            rate,
            rest: &self.rest,
            shunt: 0.0,
            shunted: &[],
            share: None,
        };
        let x = &mut self.stages[stage * n..(stage + 1) * n];
        self.newton
            .solve(system, &equation, RULES, trial.weights, x, counted)
            .map_err(|failure| Attempt::Stalled {
                unknown: failure.unknown,
                cause: failure.cause,
            })?;
        self.newton.charges(&self.pattern, &mut self.charge_end);
        for row in 0..n {
            self.slopes[stage * n + row] = -(rate * self.charge_end[row] + self.rest[row]);
        }
        Ok(())
    }

    /// First guess of a stage: the last step's polynomial continued, or the stage before.
    fn predict<S: System + ?Sized>(&mut self, system: &S, trial: Trial<'_>, stage: usize) {
        let n = self.charge.len();
        let (before, here) = self.stages.split_at_mut(stage * n);
        let (before, here) = (&before[(stage - 1) * n..], &mut here[..n]);
        if self.laid == 0.0 {
            here.copy_from_slice(before);
            return;
        }
        let dense = Dense {
            points: &self.polynomial.points,
            coefficients: &self.coefficients,
        };
        dense.at(
            self.origin + trial.length * self.table.nodes[stage] / self.laid,
            here,
        );
        for ((error, here), before) in self.error.iter_mut().zip(here.iter()).zip(before) {
            *error = here - before;
        }
        system.limit(before, &mut self.error);
        for ((error, here), before) in self.error.iter().zip(here.iter_mut()).zip(before) {
            *here = before + error;
        }
    }

    fn weigh_error(&mut self, trial: Trial<'_>, counted: &mut Statistics) -> Attempt {
        let n = self.charge.len();
        let last = self.table.nodes.len() - 1;
        for row in 0..n {
            let mut sum = 0.0;
            for (j, &companion) in self.table.companion.iter().enumerate() {
                let weight = self.table.rows[last]
                    .get(j)
                    .copied()
                    .unwrap_or(self.table.diagonal);
                sum += (companion - weight) * self.slopes[j * n + row];
            }
            self.error[row] = -sum / self.table.diagonal;
        }
        self.newton.matrix.solve(&mut self.error);
        counted.solves += 1;
        let (error, unknown) = largest(&self.error, trial.weights);
        if error.is_finite() {
            Attempt::Solved { error, unknown }
        } else {
            Attempt::Stalled {
                unknown,
                cause: Trouble::NotFinite,
            }
        }
    }

    pub fn end(&self) -> &[f64] {
        let n = self.charge.len();
        &self.stages[self.stages.len() - n..]
    }

    pub fn stages(&self) -> &[f64] {
        &self.stages
    }

    pub fn lay(&mut self) {
        let n = self.charge.len();
        self.coefficients.fill(0.0);
        let rows = self.coefficients.chunks_exact_mut(n.max(1));
        for (row, weights) in rows.zip(&self.polynomial.weights) {
            let stages = self.stages.chunks_exact(n.max(1));
            for (stage, &weight) in stages.zip(weights).filter(|(_, weight)| **weight != 0.0) {
                for (value, x) in row.iter_mut().zip(stage) {
                    *value += weight * x;
                }
            }
        }
        divide_differences(&self.polynomial.points, &mut self.coefficients, n);
        self.laid = self.tried;
        self.origin = 0.0;
    }

    pub fn dense(&self) -> Dense<'_> {
        Dense {
            points: &self.polynomial.points,
            coefficients: &self.coefficients,
        }
    }

    pub fn keep(&mut self) {
        self.origin = 1.0;
        let n = self.charge.len();
        self.charge.copy_from_slice(&self.charge_end);
        let last = self.slopes.len() - n;
        self.slope.copy_from_slice(&self.slopes[last..]);
    }
}
