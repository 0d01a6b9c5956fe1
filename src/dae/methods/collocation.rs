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
use super::super::tolerances::largest;
use super::super::trouble::Trouble;
use super::coupled::Coupled;
use super::radau_iia::Coefficients;
use super::split::Split;
use super::{Attempt, Trial};
use crate::math::{Elimination, Singular};

/// Slopes are taken anew for the next step when the iteration contracted more slowly than this.
const SLOW: f64 = 0.01;
/// After slopes common to all stages have failed, so many steps start with the stages' own.
const PATIENCE: u32 = 10;

/// Memory of the family.
#[derive(Debug)]
pub(crate) struct Collocation<const S: usize> {
    pub(super) table: &'static Coefficients<S>,
    pub(super) pattern: Pattern,
    pub(super) split: Split<S>,
    pub(super) coupled: Coupled<S>,
    /// Values at the start and at the stages, one row each.
    pub(super) stages: Vec<f64>,
    /// Evaluation at the start, and whether it is there.
    pub(super) base: Evaluation,
    pub(super) based: bool,
    pub(super) outs: Vec<Evaluation>,
    pub(super) probe: Evaluation,
    /// Evaluation at the end of the step tried last, and whether it is there.
    pub(super) next: Evaluation,
    pub(super) next_ready: bool,
    /// Length [s] for which the split factors hold; zero where there are none.
    pub(super) factored: f64,
    /// How the split iteration contracted last.
    pub(super) contraction: f64,
    /// Steps still to be begun with the stages' own slopes.
    pub(super) hard: u32,
    /// The step tried last was solved with the stages' own slopes.
    pub(super) own: bool,
    /// Newton step of each stage, one row each.
    pub(super) steps: Vec<f64>,
    /// The one before it.
    pub(super) steps_before: Vec<f64>,
    pub(super) defect: Vec<f64>,
    pub(super) error: Vec<f64>,
    /// The step's estimated error, with its sign.
    pub(super) estimate: Vec<f64>,
    /// Values at the start, after the estimate has settled what was not.
    pub(super) settled: Vec<f64>,
    pub(super) coefficients: Vec<f64>,
    pub(super) laid: f64,
    pub(super) origin: f64,
    pub(super) tried: f64,
    /// True until a step is kept after a restart or a rejection: the estimate is then filtered once more.
    pub(super) careful: bool,
    /// True until a step is kept after a restart: what stands at the start is then as exact as charges are, and what
    /// has not settled there is to be followed.
    pub(super) anew: bool,
    /// Attempts since a step was kept.
    pub(super) failures: u32,
}

/// Why the stages were not solved.
#[derive(Clone, Copy, Debug)]
pub(super) struct Failure {
    pub unknown: usize,
    pub cause: Trouble,
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
            table: Coefficients::shared(),
            split: Split::new(&pattern, elimination),
            coupled: Coupled::new(&pattern, elimination),
            stages: vec![0.0; (S + 1) * n],
            base: evaluation(n, pattern.len()),
            based: false,
            outs: (0..S).map(|_| evaluation(n, pattern.len())).collect(),
            probe: evaluation(n, pattern.len()),
            next: evaluation(n, pattern.len()),
            next_ready: false,
            factored: 0.0,
            contraction: 1.0,
            hard: 0,
            own: false,
            steps: vec![0.0; S * n],
            steps_before: vec![0.0; S * n],
            defect: vec![0.0; n],
            error: vec![0.0; n],
            estimate: vec![0.0; n],
            settled: vec![0.0; n],
            coefficients: vec![0.0; (S + 1) * n],
            laid: 0.0,
            origin: 0.0,
            tried: 0.0,
            careful: true,
            anew: true,
            failures: 0,
            pattern,
        }
    }

    pub fn restart(&mut self) {
        self.based = false;
        self.next_ready = false;
        self.factored = 0.0;
        self.contraction = 1.0;
        self.laid = 0.0;
        self.careful = true;
        self.anew = true;
        self.failures = 0;
        self.tried = 0.0;
        self.hard = 0;
    }

    /// Carries small changes of the start through the step tried last, to first order and with its own factors, and adds
    /// `share` of its estimated error.
    pub fn carry(&mut self, changes: &mut [f64], share: f64) {
        let n = self.defect.len();
        self.error.fill(0.0);
        for (column, change) in changes.iter().enumerate() {
            for slot in self.pattern.starts[column]..self.pattern.starts[column + 1] {
                self.error[self.pattern.rows[slot]] += self.base.dq[slot] * change;
            }
        }
        let rates: [f64; S] =
            std::array::from_fn(|i| self.table.inverse[i].iter().sum::<f64>() / self.tried);
        if self.own {
            let right = self.coupled.right_mut();
            for (row, charge) in self.error.iter().enumerate() {
                for (i, rate) in rates.iter().enumerate() {
                    right[S * row + i] = rate * charge;
                }
            }
            self.coupled.solve();
            let right = self.coupled.right_mut();
            for (row, change) in changes.iter_mut().enumerate() {
                *change = right[S * row + S - 1];
            }
        } else {
            for (steps, rate) in self.steps.chunks_exact_mut(n.max(1)).zip(rates) {
                for (step, charge) in steps.iter_mut().zip(&self.error) {
                    *step = rate * charge;
                }
            }
            self.split.solve(self.table, &mut self.steps);
            changes.copy_from_slice(&self.steps[(S - 1) * n..]);
        }
        for (change, error) in changes.iter_mut().zip(&self.estimate) {
            *change += share * error;
        }
    }

    /// Goes on where a method with another number of stages stands: its start and its polynomial.
    pub fn take_over<const R: usize>(&mut self, other: &Collocation<R>) {
        self.restart();
        self.split.take_order(&other.split);
        self.based = other.based;
        if other.based {
            self.base.f.copy_from_slice(&other.base.f);
            self.base.q.copy_from_slice(&other.base.q);
            self.base.df.copy_from_slice(&other.base.df);
            self.base.dq.copy_from_slice(&other.base.dq);
        }
        self.careful = other.careful;
        if other.laid == 0.0 {
            return;
        }
        let n = self.defect.len();
        for (k, &point) in self.table.points.iter().enumerate() {
            other
                .dense()
                .at(point, &mut self.coefficients[k * n..(k + 1) * n]);
        }
        divide_differences(&self.table.points, &mut self.coefficients, n);
        (self.laid, self.origin) = (other.laid, other.origin);
    }

    pub fn expect_hard(&mut self, hard: bool) {
        self.hard = if hard { PATIENCE } else { 0 };
    }

    pub fn is_hard(&self) -> bool {
        self.own
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
        self.next_ready = false;
        match self.whole(system, trial, counted) {
            Ok((error, unknown)) => Attempt::Solved { error, unknown },
            Err(Failure { unknown, cause }) => Attempt::Stalled { unknown, cause },
        }
    }

    /// Stages and error; the unknown that sets it.
    fn whole<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Result<(f64, usize), Failure> {
        self.solve_stages(system, trial, counted)?;
        let weighed = self.weigh_error(system, trial, counted)?;
        if self.own || weighed.0 > 1.0 || self.end_holds(system, trial, counted)? {
            return Ok(weighed);
        }
        self.hard = PATIENCE;
        self.predict(system, trial);
        self.iterate(system, trial, true, counted)?;
        self.weigh_error(system, trial, counted)
    }

    /// True where the end of the step solves its equation with the slopes found there too.
    ///
    /// Slopes taken elsewhere may be far steeper than those at a stage (a junction conducts at the start, and does not
    /// where the stage is believed to be): the iteration then creeps in steps that look small. The evaluation serves
    /// as the start of the next step.
    fn end_holds<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Result<bool, Failure> {
        let n = self.defect.len();
        let time = trial.from.time + trial.length;
        let x = &self.stages[S * n..];
        system.evaluate(
            Point {
                time,
                x,
                mode: trial.from.mode,
            },
            true,
            &mut self.next,
        );
        counted.evaluations += 1;
        sound(&self.next)?;
        self.next_ready = true;
        if !self
            .split
            .differs(&self.next, self.table.real / trial.length)
        {
            return Ok(true);
        }
        let rates = self.table.inverse[S - 1].map(|w| w / trial.length);
        for row in 0..n {
            let start = self.base.q[row];
            let mut sum = self.next.f[row] + rates[S - 1] * (self.next.q[row] - start);
            for (rate, out) in rates.iter().zip(&self.outs[..S - 1]) {
                sum += rate * (out.q[row] - start);
            }
            self.error[row] = -sum;
        }
        self.factored = 0.0;
        self.split.take_slopes(&self.next);
        self.split.factor_real(self.table, trial.length)?;
        counted.factorizations += 1;
        self.split.solve_real(&mut self.error);
        counted.solves += 1;
        self.split.take_slopes(&self.base);
        Ok(largest(&self.error, trial.weights).0 <= 1.0)
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
            system.evaluate(trial.from, true, &mut self.base);
            counted.evaluations += 1;
            self.based = true;
            sound(&self.base)?;
        }
        if serves {
            return Ok(());
        }
        self.factored = 0.0;
        self.split.take_slopes(&self.base);
        self.split.factor_real(self.table, trial.length)?;
        counted.factorizations += 1;
        if self.hard == 0 {
            self.split.factor_pairs(self.table, trial.length)?;
            counted.factorizations += self.table.pairs.len() as u64;
            self.factored = trial.length;
        }
        Ok(())
    }

    pub fn end(&self) -> &[f64] {
        let n = self.defect.len();
        &self.stages[S * n..]
    }

    pub fn stages(&self) -> &[f64] {
        &self.stages
    }

    pub fn lay(&mut self) {
        let n = self.defect.len();
        self.coefficients.copy_from_slice(&self.stages);
        if self.careful {
            let (start, later) = self.coefficients.split_at_mut(n);
            start_anew(&self.table.points, start, later);
        }
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
        // The end has been evaluated already where it was looked at.
        self.based = self.next_ready;
        if self.next_ready {
            std::mem::swap(&mut self.base, &mut self.next);
            self.next_ready = false;
        }
        self.careful = false;
        self.anew = false;
        self.failures = 0;
        self.tried = 0.0;
        self.hard = self.hard.saturating_sub(1);
    }
}

/// Lets the polynomial of a first step start where its stages say, for unknowns that jumped.
///
/// A current that is fixed by the slope of a source (a capacitor across it, index 2) has no value of its own at a corner:
/// what stands there is the one before it. The stages know better; where the start lies farther from their own
/// polynomial than they lie from one another, that is a jump and no bend.
fn start_anew(points: &[f64], start: &mut [f64], later: &[f64]) {
    let n = start.len();
    for (which, value) in start.iter_mut().enumerate() {
        let (mut at_start, mut low, mut high) = (0.0, f64::INFINITY, f64::NEG_INFINITY);
        for (k, stage) in later.iter().skip(which).step_by(n).enumerate() {
            // Lagrange's weight of this stage at the step's start.
            let others = points.iter().skip(1).enumerate().filter(|(j, _)| *j != k);
            let weight: f64 = others
                .map(|(_, other)| other / (other - points[k + 1]))
                .product();
            at_start += weight * stage;
            low = low.min(*stage);
            high = high.max(*stage);
        }
        if (*value - at_start).abs() > (high - low) + 1e-9 * at_start.abs() {
            *value = at_start;
        }
    }
}

/// Fails with the first row whose value is not finite.
pub(super) fn sound(out: &Evaluation) -> Result<(), Failure> {
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
