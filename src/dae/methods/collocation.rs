//! The attempt of a collocation method: all stages at once.
//!
//! The polynomial of degree S through (0, q0) and the stages' charges q(X_i) satisfies d/dt q = -f at the stages:
//! R_i = sum_j W_ij (q(X_j) - q0)/h + f(X_i) = 0. Newton's iteration first takes one pair of slopes for all stages
//! ([`super::split`]: cheap, and its factors may be kept) and, where these differ too much within the step (a switch
//! on its way, a junction that begins to conduct), the slopes of each stage ([`super::coupled`]).
//!
//! The error in x is the polynomial's defect at the start through the real matrix, ((g/h) C + G) e = -(f0 + p'(0)),
//! of order S + 1 in h: Hairer & Wanner II, IV.8 (from memory), there for M y' = f. It covers algebraic unknowns and,
//! through the same matrix, those of index 2.

use super::super::dense::{Dense, divide_differences};
use super::super::newton::evaluation;
use super::super::pattern::Pattern;
use super::super::statistics::Statistics;
use super::super::system::{Evaluation, Point, System};
use super::super::tolerances::{largest, rounding};
use super::super::trouble::Trouble;
use super::coupled::Coupled;
use super::radau_iia::Coefficients;
use super::split::Split;
use super::{Attempt, Trial};
use crate::math::{Elimination, Singular};

/// The iteration may leave this share of a tolerance.
const CLOSE: f64 = 0.03;
/// Iterations at most with one pair of slopes, and with those of each stage.
const LONGEST: [usize; 2] = [6, 14];
/// Slopes are taken anew for the next step when the iteration contracted more slowly than this.
const SLOW: f64 = 0.01;
/// The stages' own factors are kept while the iteration contracts faster than this.
const BRISK: f64 = 0.1;
/// The last polynomial is continued at most so many of its own lengths.
const FAR: f64 = 4.0;
/// After so many failed attempts the rounding of charges is suspected.
const ODD: u32 = 4;
/// Where within a step the polynomial is looked at when slopes change much, besides its start: between the stages.
const BETWEEN: [f64; 2] = [0.4, 0.85];
/// After slopes common to all stages have failed, so many steps start with the stages' own.
const PATIENCE: u32 = 10;

/// Memory of the family.
#[derive(Debug)]
pub(crate) struct Collocation<const S: usize> {
    table: Coefficients<S>,
    pattern: Pattern,
    split: Split<S>,
    coupled: Coupled<S>,
    /// Values at the start and at the stages, one row each.
    stages: Vec<f64>,
    /// Evaluation at the start, and whether it is there.
    base: Evaluation,
    based: bool,
    outs: Vec<Evaluation>,
    probe: Evaluation,
    /// Length [s] for which the split factors hold; zero where there are none.
    factored: f64,
    /// How the split iteration contracted last.
    contraction: f64,
    /// Steps still to be begun with the stages' own slopes.
    hard: u32,
    /// The step tried last was solved with the stages' own slopes.
    own: bool,
    /// Newton step of each stage, one row each.
    steps: Vec<f64>,
    defect: Vec<f64>,
    error: Vec<f64>,
    coefficients: Vec<f64>,
    laid: f64,
    origin: f64,
    tried: f64,
    /// True until a step is kept after a restart or a rejection: the estimate is then filtered once more.
    careful: bool,
    /// Attempts since a step was kept.
    failures: u32,
}

/// Why the stages were not solved.
#[derive(Clone, Copy, Debug)]
struct Failure {
    unknown: usize,
    cause: Trouble,
}

impl From<Singular> for Failure {
    fn from(singular: Singular) -> Self {
        Failure {
            unknown: singular.column,
            cause: Trouble::Singular,
        }
    }
}

impl<const S: usize> Collocation<S> {
    pub fn new<Y: System + ?Sized>(system: &Y, elimination: Elimination) -> Self {
        let (n, pattern) = (system.size(), system.pattern().clone());
        Collocation {
            table: Coefficients::new(),
            split: Split::new(&pattern, elimination),
            coupled: Coupled::new(&pattern, elimination),
            stages: vec![0.0; (S + 1) * n],
            base: evaluation(n, pattern.len()),
            based: false,
            outs: (0..S).map(|_| evaluation(n, pattern.len())).collect(),
            probe: evaluation(n, pattern.len()),
            factored: 0.0,
            contraction: 1.0,
            hard: 0,
            own: false,
            steps: vec![0.0; S * n],
            defect: vec![0.0; n],
            error: vec![0.0; n],
            coefficients: vec![0.0; (S + 1) * n],
            laid: 0.0,
            origin: 0.0,
            tried: 0.0,
            careful: true,
            failures: 0,
            pattern,
        }
    }

    pub fn restart(&mut self) {
        self.based = false;
        self.factored = 0.0;
        self.contraction = 1.0;
        self.laid = 0.0;
        self.careful = true;
        self.failures = 0;
        self.tried = 0.0;
        self.hard = 0;
    }

    pub fn attempt<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Attempt {
        if self.tried != 0.0 {
            self.careful = true;
            self.failures += 1;
        }
        self.tried = trial.length;
        match self.solve_stages(system, trial, counted) {
            Ok(()) => self.weigh_error(system, trial, counted),
            Err(failure) => Attempt::Stalled {
                unknown: failure.unknown,
                cause: failure.cause,
            },
        }
    }

    fn solve_stages<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        self.begin(system, trial, counted)?;
        if self.hard == 0 {
            self.predict(system, trial);
            match self.iterate(system, trial, false, counted) {
                Ok(()) => return Ok(()),
                Err(_) => self.hard = PATIENCE,
            }
        }
        self.predict(system, trial);
        self.iterate(system, trial, true, counted)
    }

    /// Evaluates the start; takes new slopes and factors where the old ones do not serve.
    fn begin<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        let same = (trial.length - self.factored).abs() <= 1e-6 * trial.length;
        let serves = same && self.contraction <= SLOW;
        if !self.based {
            system.evaluate(trial.from, !serves, &mut self.base);
            counted.evaluations += 1;
            self.based = true;
            sound(&self.base)?;
            if !serves {
                self.split.take_slopes(&self.base);
            }
        }
        if serves {
            return Ok(());
        }
        self.factored = 0.0;
        self.split.factor_real(&self.table, trial.length)?;
        counted.factorizations += 1;
        if self.hard == 0 {
            self.split.factor_pairs(&self.table, trial.length)?;
            counted.factorizations += self.table.pairs.len() as u64;
            self.factored = trial.length;
        }
        Ok(())
    }

    /// First guess of the stages: the last polynomial continued, or the values at the start.
    fn predict<Y: System + ?Sized>(&mut self, system: &Y, trial: Trial<'_>) {
        let n = self.defect.len();
        self.stages[..n].copy_from_slice(trial.from.x);
        let (start, stages) = self.stages.split_at_mut(n);
        let dense = Dense {
            points: &self.table.points,
            coefficients: &self.coefficients,
        };
        for (k, &point) in self.table.points[1..].iter().enumerate() {
            let stage = &mut stages[k * n..(k + 1) * n];
            let far = self.origin + trial.length / self.laid * point;
            if self.laid == 0.0 || far > 1.0 + FAR {
                stage.copy_from_slice(start);
                continue;
            }
            dense.at(far, stage);
            for ((step, value), start) in self.error.iter_mut().zip(stage.iter()).zip(&*start) {
                *step = value - start;
            }
            if system.limit(start, &mut self.error) {
                for ((step, value), start) in self.error.iter().zip(stage).zip(&*start) {
                    *value = start + step;
                }
            }
        }
    }

    /// Newton's iteration with common slopes or (`own`) with those of each stage.
    fn iterate<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        own: bool,
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        self.own = own;
        let longest = LONGEST[usize::from(own)];
        let mut before = f64::INFINITY;
        let mut rate = f64::INFINITY;
        let mut eta = if own {
            1.0
        } else {
            self.contraction.max(0.02).powf(0.8)
        };
        let mut culprit = 0;
        for iteration in 0..longest {
            let anew = own && rate > BRISK;
            self.evaluate(system, trial, anew, counted)?;
            if anew {
                let rates = self.table.inverse.map(|row| row.map(|w| w / trial.length));
                self.coupled.factor(&self.pattern, &rates, &self.outs)?;
                counted.factorizations += 1;
            }
            self.solve(trial.length, own, counted);
            let (size, unknown, limited) = self.advance(system, trial.weights);
            culprit = unknown;
            if !size.is_finite() {
                return Err(Failure {
                    unknown,
                    cause: Trouble::NotFinite,
                });
            }
            if limited {
                (before, rate) = (f64::INFINITY, f64::INFINITY);
                continue;
            }
            if before.is_finite() {
                rate = size / before;
                if rate > 0.5 && size <= self.noise(trial, own) {
                    return Ok(());
                }
                eta = if rate < 1.0 {
                    rate / (1.0 - rate)
                } else {
                    f64::INFINITY
                };
                if !own {
                    self.contraction = rate;
                    let left = (longest - 1 - iteration) as i32;
                    if eta * size * rate.powi(left) > CLOSE {
                        break;
                    }
                }
            }
            if eta * size <= CLOSE || size == 0.0 {
                return Ok(());
            }
            before = size;
        }
        Err(Failure {
            unknown: culprit,
            cause: Trouble::Unsettled,
        })
    }

    fn evaluate<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        slopes: bool,
        counted: &mut Statistics,
    ) -> Result<(), Failure> {
        let n = self.defect.len();
        for (stage, out) in self.outs.iter_mut().enumerate() {
            let time = trial.from.time + trial.length * self.table.points[stage + 1];
            let x = &self.stages[(stage + 1) * n..(stage + 2) * n];
            system.evaluate(
                Point {
                    time,
                    x,
                    mode: trial.from.mode,
                },
                slopes,
                out,
            );
            counted.evaluations += 1;
            sound(out)?;
        }
        Ok(())
    }

    /// Newton steps of all stages from the present residuals.
    fn solve(&mut self, length: f64, own: bool, counted: &mut Statistics) {
        let n = self.defect.len();
        let rate = 1.0 / length;
        let inverse = &self.table.inverse;
        for row in 0..n {
            let start = self.base.q[row];
            let grown: [f64; S] = std::array::from_fn(|j| (self.outs[j].q[row] - start) * rate);
            let residuals: [f64; S] = std::array::from_fn(|i| {
                self.outs[i].f[row] + (0..S).map(|j| inverse[i][j] * grown[j]).sum::<f64>()
            });
            for (i, residual) in residuals.into_iter().enumerate() {
                if own {
                    self.coupled.right_mut()[S * row + i] = -residual;
                } else {
                    self.steps[i * n + row] = -residual;
                }
            }
        }
        counted.newton_iterations += 1;
        if own {
            self.coupled.solve();
            counted.solves += 1;
            for (k, &step) in self.coupled.right_mut().iter().enumerate() {
                self.steps[k % S * n + k / S] = step;
            }
        } else {
            self.split.solve(&self.table, &mut self.steps);
            counted.solves += 1 + self.table.pairs.len() as u64;
        }
    }

    /// The size below which a Newton step is rounding and nothing else. Overwrites the steps, which are then nought.
    #[cold]
    fn noise(&mut self, trial: Trial<'_>, own: bool) -> f64 {
        let n = self.defect.len();
        let rates = self
            .table
            .inverse
            .map(|row| row.map(|w| w.abs() / trial.length));
        for row in 0..n {
            for (i, rates) in rates.iter().enumerate() {
                let charges: f64 = (0..S).map(|j| rates[j] * self.outs[j].q[row].abs()).sum();
                let right = rounding(row, charges + self.outs[i].f[row].abs());
                if own {
                    self.coupled.right_mut()[S * row + i] = right;
                } else {
                    self.steps[i * n + row] = right;
                }
            }
        }
        let mut most = 8.0 * f64::EPSILON * largest(self.end(), trial.weights).0;
        if own {
            self.coupled.solve();
            for (k, step) in self.coupled.right_mut().iter().enumerate() {
                most = most.max((step * trial.weights[k / S]).abs());
            }
        } else {
            self.split.solve(&self.table, &mut self.steps);
            for steps in self.steps.chunks_exact(n) {
                most = most.max(largest(steps, trial.weights).0);
            }
        }
        self.steps.fill(0.0);
        most
    }

    /// Adds the Newton steps; their size, the unknown that sets it, and whether the system limited one.
    fn advance<Y: System + ?Sized>(&mut self, system: &Y, weights: &[f64]) -> (f64, usize, bool) {
        let n = self.defect.len();
        let mut limited = false;
        let mut most = (0.0, 0);
        for stage in 0..S {
            let step = &mut self.steps[stage * n..(stage + 1) * n];
            let x = &mut self.stages[(stage + 1) * n..(stage + 2) * n];
            limited |= system.limit(x, step);
            let here = largest(step, weights);
            if here.0 > most.0 {
                most = here;
            }
            for (value, step) in x.iter_mut().zip(step) {
                *value += *step;
            }
        }
        (most.0, most.1, limited)
    }

    fn weigh_error<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Attempt {
        self.collect_defect(trial.length);
        let mut most = self.filtered(system, trial, counted);
        if self.own {
            for share in BETWEEN {
                if most.0 > 1.0 {
                    break;
                }
                match self.defect_within(system, trial, share, counted) {
                    Ok(here) if here.0 > most.0 => most = here,
                    Ok(_) => {}
                    Err(Failure { unknown, cause }) => return Attempt::Stalled { unknown, cause },
                }
            }
        }
        let (mut error, unknown) = most;
        if error > 1.0 && self.failures >= ODD && error <= self.error_noise(trial) {
            // Shorter steps would only magnify the rounding of charges.
            error = 1.0;
        }
        if error.is_finite() {
            Attempt::Solved { error, unknown }
        } else {
            Attempt::Stalled {
                unknown,
                cause: Trouble::NotFinite,
            }
        }
    }

    /// The error that the rounding of charges alone feigns.
    #[cold]
    fn error_noise(&mut self, trial: Trial<'_>) -> f64 {
        let rate = self.table.at_start.iter().map(|w| w.abs()).sum::<f64>() / trial.length;
        for (row, error) in self.error.iter_mut().enumerate() {
            *error = rounding(row, rate * self.base.q[row].abs() + self.base.f[row].abs());
        }
        self.split.solve_real(&mut self.error);
        largest(&self.error, trial.weights).0
    }

    /// The defect through the real factors: an error in tolerances, and the unknown that sets it.
    fn filtered<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> (f64, usize) {
        let rows = self.defect.iter().zip(&self.base.f);
        for (error, (defect, f)) in self.error.iter_mut().zip(rows) {
            *error = -(f + defect);
        }
        self.split.solve_real(&mut self.error);
        counted.solves += 1;
        let first = largest(&self.error, trial.weights);
        if !self.careful || first.0 <= 1.0 || !first.0.is_finite() {
            return first;
        }
        // A fast part that has not settled at the start enlarges the estimate: filter it once more.
        for (error, &start) in self.error.iter_mut().zip(trial.from.x) {
            *error += start;
        }
        system.evaluate(
            Point {
                x: &self.error,
                ..trial.from
            },
            false,
            &mut self.probe,
        );
        counted.evaluations += 1;
        let rows = self.defect.iter().zip(&self.probe.f);
        for (error, (defect, f)) in self.error.iter_mut().zip(rows) {
            *error = -(f + defect);
        }
        self.split.solve_real(&mut self.error);
        counted.solves += 1;
        let again = largest(&self.error, trial.weights);
        if again.0 < first.0 { again } else { first }
    }

    /// The defect of the polynomial within the step, through the slopes found there. Where these change much, the
    /// stages may all be sound (each held by something stiff) and the way between them is not.
    fn defect_within<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        share: f64,
        counted: &mut Statistics,
    ) -> Result<(f64, usize), Failure> {
        let n = self.defect.len();
        let mut weights = [0.0; S];
        let mut slopes = [0.0; S];
        self.table.at(share, &mut weights, &mut slopes);
        for row in 0..n {
            let start = trial.from.x[row];
            self.error[row] = start
                + (0..S)
                    .map(|j| weights[j] * (self.stages[(j + 1) * n + row] - start))
                    .sum::<f64>();
            let charge = self.base.q[row];
            self.defect[row] = (0..S)
                .map(|j| slopes[j] / trial.length * (self.outs[j].q[row] - charge))
                .sum();
        }
        for column in 0..n {
            for slot in self.pattern.starts[column]..self.pattern.starts[column + 1] {
                for (j, out) in self.outs.iter().enumerate() {
                    self.defect[self.pattern.rows[slot]] +=
                        out.dq[slot] * slopes[j] / trial.length * self.steps[j * n + column];
                }
            }
        }
        let time = trial.from.time + share * trial.length;
        let at = Point {
            time,
            x: &self.error,
            mode: trial.from.mode,
        };
        system.evaluate(at, true, &mut self.probe);
        counted.evaluations += 1;
        sound(&self.probe)?;
        self.split.take_slopes(&self.probe);
        counted.factorizations += 1;
        self.factored = 0.0;
        self.split.factor_real(&self.table, trial.length)?;
        let rows = self.defect.iter().zip(&self.probe.f);
        for (error, (defect, f)) in self.error.iter_mut().zip(rows) {
            *error = -(f + defect);
        }
        self.split.solve_real(&mut self.error);
        counted.solves += 1;
        self.split.take_slopes(&self.base);
        Ok(largest(&self.error, trial.weights))
    }

    /// p'(0) of the charges' polynomial. The charges are those before the last Newton step, carried on by C.
    fn collect_defect(&mut self, length: f64) {
        let n = self.defect.len();
        let rates = self.table.at_start.map(|w| w / length);
        for row in 0..n {
            let start = self.base.q[row];
            self.defect[row] = (0..S)
                .map(|j| rates[j] * (self.outs[j].q[row] - start))
                .sum();
        }
        for column in 0..n {
            let moved: f64 = (0..S).map(|j| rates[j] * self.steps[j * n + column]).sum();
            for slot in self.pattern.starts[column]..self.pattern.starts[column + 1] {
                self.defect[self.pattern.rows[slot]] += self.split.dq[slot] * moved;
            }
        }
    }

    pub fn end(&self) -> &[f64] {
        let n = self.defect.len();
        &self.stages[S * n..]
    }

    pub fn lay(&mut self) {
        let n = self.defect.len();
        self.coefficients.copy_from_slice(&self.stages);
        divide_differences(&self.table.points, &mut self.coefficients, n);
        self.laid = self.tried;
        self.origin = 0.0;
    }

    pub fn dense(&self) -> Dense<'_> {
        Dense {
            points: &self.table.points,
            coefficients: &self.coefficients,
        }
    }

    pub fn keep(&mut self) {
        self.origin = 1.0;
        self.based = false;
        self.careful = false;
        self.failures = 0;
        self.tried = 0.0;
        self.hard = self.hard.saturating_sub(1);
    }
}

/// Fails with the first row whose value is not finite.
fn sound(out: &Evaluation) -> Result<(), Failure> {
    match out
        .f
        .iter()
        .zip(&out.q)
        .position(|(f, q)| !(f + q).is_finite())
    {
        Some(unknown) => Err(Failure {
            unknown,
            cause: Trouble::NotFinite,
        }),
        None => Ok(()),
    }
}
