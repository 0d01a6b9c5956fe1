//! The error estimate of a collocation step: the defect of its polynomial, seen through the stage matrix.
//!
//! At the start the collocation polynomial p of the charges does not satisfy the equation; what is left there,
//! f0 + p'(0), is of order S in h and becomes an error in x through the real matrix: ((g/h) C + G) e = -(f0 + p'(0)).
//! Hairer & Wanner II, IV.8 (from memory). Where the slopes change much within the step the defect is looked at
//! between the stages too, each time through the slopes found there.

use super::super::statistics::Statistics;
use super::super::system::{Point, System};
use super::super::tolerances::{SIGNS, largest, rounding};
use super::super::trouble::Trouble;
use super::Trial;
use super::collocation::{Collocation, Failure, sound};
use super::radau_iia::Between;

/// Error of a step that nothing but rounding lets appear inaccurate.
const ROUNDED: f64 = 0.1;

impl<const S: usize> Collocation<S> {
    pub(super) fn weigh_error<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        counted: &mut Statistics,
    ) -> Result<(f64, usize), Failure> {
        self.collect_defect(trial.length);
        let mut most = self.filtered(system, trial, counted);
        self.estimate.copy_from_slice(&self.error);
        // Between all stages where slopes change much, else in the widest gap: an algebraic unknown is exact at every
        // stage, and only here shows how well the polynomial follows it.
        for gap in 0..S - 1 {
            if most.0 > 1.0 {
                break;
            }
            if self.own || gap == self.table.widest {
                let here = self.defect_within(system, trial, gap, counted)?;
                if here.0 > most.0 {
                    most = here;
                }
            }
        }
        let (mut error, unknown) = most;
        if error > 1.0 && self.failures > 0 && error <= self.error_noise(trial) {
            // Shorter steps would only magnify the rounding of charges; longer ones tell more.
            error = ROUNDED;
        }
        if error.is_finite() {
            Ok((error, unknown))
        } else {
            Err(Failure {
                unknown,
                cause: Trouble::NotFinite,
            })
        }
    }

    /// The error that the rounding of charges alone feigns.
    #[cold]
    fn error_noise(&mut self, trial: Trial<'_>) -> f64 {
        let rate = self.table.at_start.iter().map(|w| w.abs()).sum::<f64>() / trial.length;
        let base = &self.base;
        let mut terms: Vec<f64> = (0..base.q.len())
            .map(|row| rate * base.q[row].abs() + base.f[row].abs())
            .collect();
        let (dq, df) = (&self.split.dq, &self.split.df);
        self.pattern.add_magnitudes(
            |slot| rate * dq[slot].abs() + df[slot].abs(),
            trial.from.x,
            &mut terms,
        );
        let mut most = 0.0_f64;
        for signs in SIGNS {
            for (row, (error, terms)) in self.error.iter_mut().zip(&terms).enumerate() {
                *error = rounding(row, *terms, signs);
            }
            self.split.solve_real(&mut self.error);
            most = most.max(largest(&self.error, trial.weights).0);
        }
        most
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
        self.settled.copy_from_slice(trial.from.x);
        if !self.careful || !first.0.is_finite() {
            return first;
        }
        if self.anew && self.charges_moved(trial.weights) > 1.0 {
            // A fast part after an event: it is to be followed.
            return first;
        }
        // What has not settled at the start (an unknown of index 2 whose value there is less exact than the charges)
        // enlarges the estimate: take it out and filter once more.
        for (settled, error) in self.settled.iter_mut().zip(&self.error) {
            *settled += error;
        }
        if first.0 <= 1.0 {
            return first;
        }
        let at = Point {
            x: &self.settled,
            ..trial.from
        };
        system.evaluate(at, false, &mut self.probe);
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

    /// Size in tolerances of the present error in unknowns that charges depend on.
    fn charges_moved(&self, weights: &[f64]) -> f64 {
        let mut most = 0.0_f64;
        for (column, (error, weight)) in self.error.iter().zip(weights).enumerate() {
            let mut slots = self.pattern.starts[column]..self.pattern.starts[column + 1];
            if slots.any(|slot| self.split.dq[slot] != 0.0) {
                most = most.max((error * weight).abs());
            }
        }
        most
    }

    /// The defect of the polynomial in a gap between stages. Where slopes change much it is seen through those found
    /// there: the stages may all be sound (each held by something stiff) and the way between them is not.
    fn defect_within<Y: System + ?Sized>(
        &mut self,
        system: &Y,
        trial: Trial<'_>,
        gap: usize,
        counted: &mut Statistics,
    ) -> Result<(f64, usize), Failure> {
        let n = self.defect.len();
        let Between {
            share,
            weights,
            slopes,
        } = self.table.between[gap];
        let slopes = slopes.map(|slope| slope / trial.length);
        for row in 0..n {
            let start = self.settled[row];
            self.error[row] = start
                + (0..S)
                    .map(|j| weights[j] * (self.stages[(j + 1) * n + row] - start))
                    .sum::<f64>();
            let charge = self.base.q[row];
            self.defect[row] = (0..S)
                .map(|j| slopes[j] * (self.outs[j].q[row] - charge))
                .sum();
        }
        for column in 0..n {
            for slot in self.pattern.starts[column]..self.pattern.starts[column + 1] {
                let moved = (0..S).map(|j| {
                    let dq = if self.own {
                        self.outs[j].dq[slot]
                    } else {
                        self.split.dq[slot]
                    };
                    dq * slopes[j] * self.steps[j * n + column]
                });
                self.defect[self.pattern.rows[slot]] += moved.sum::<f64>();
            }
        }
        let time = trial.from.time + share * trial.length;
        let at = Point {
            time,
            x: &self.error,
            mode: trial.from.mode,
        };
        system.evaluate(at, self.own, &mut self.probe);
        counted.evaluations += 1;
        sound(&self.probe)?;
        if self.own {
            self.split.take_slopes(&self.probe);
            self.factored = 0.0;
            self.split.factor_real(self.table, trial.length)?;
            counted.factorizations += 1;
        }
        let rows = self.defect.iter().zip(&self.probe.f);
        for (error, (defect, f)) in self.error.iter_mut().zip(rows) {
            *error = -(f + defect);
        }
        self.split.solve_real(&mut self.error);
        counted.solves += 1;
        if self.own {
            self.split.take_slopes(&self.base);
        }
        Ok(largest(&self.error, trial.weights))
    }

    /// p'(0) of the charges' polynomial. The charges are those before the last Newton step, carried on by C.
    pub(super) fn collect_defect(&mut self, length: f64) {
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
}
