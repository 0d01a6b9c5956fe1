//! Newton's iteration for all stages of a collocation step, and the guess that it starts from.
//!
//! Settled means: the steps fall, every unknown's among them; and with common slopes, those found at the stages agree.
//! A small step alone proves nothing: slopes that are far too steep make small steps anywhere.

use super::super::dense::Dense;
use super::super::statistics::Statistics;
use super::super::system::{Point, System};
use super::super::tolerances::{SIGNS, drowns, lags, largest, rounding};
use super::super::trouble::Trouble;
use super::Trial;
use super::collocation::{Collocation, Failure, sound};

/// The iteration may leave this share of a tolerance.
const CLOSE: f64 = 0.03;
/// A first Newton step below this share of a tolerance is the last one.
const VERY_CLOSE: f64 = 0.003;
/// Iterations at most with one pair of slopes, and with those of each stage: many, for an exponential law above its
/// solution lets the iteration down in equal small steps, some forty from either end of a blocking junction.
const LONGEST: [usize; 2] = [6, 100];
/// The stages' own factors are kept while the iteration contracts faster than this.
const BRISK: f64 = 0.1;
/// The last polynomial is continued at most so many of its own lengths.
const FAR: f64 = 4.0;

impl<const S: usize> Collocation<S> {
    /// True where some unknown of some stage has hardly moved less than in the iteration before.
    fn lags(&self, weights: &[f64]) -> bool {
        let n = self.defect.len();
        let stages = self
            .steps
            .chunks_exact(n.max(1))
            .zip(self.steps_before.chunks_exact(n.max(1)));
        stages
            .into_iter()
            .any(|(step, before)| lags(step, before, weights, CLOSE))
    }

    /// True where the slopes at a stage differ much from the common ones: small steps are then no proof of a solution.
    pub(super) fn stages_differ(&self, length: f64) -> bool {
        let rate = self.table.real / length;
        self.outs.iter().any(|out| self.split.differs(out, rate))
    }

    /// First guess of the stages: the last polynomial continued, or the values at the start.
    pub(super) fn predict<Y: System + ?Sized>(&mut self, system: &Y, trial: Trial<'_>) {
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
    pub(super) fn iterate<Y: System + ?Sized>(
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
        let mut eta = 1.0;
        let mut culprit = 0;
        for iteration in 0..longest {
            let anew = own && rate > BRISK;
            // Common slopes are held against those found before a step is taken for the last one.
            let slopes = anew || (!own && iteration > 0);
            self.evaluate(system, trial, slopes, counted)?;
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
                if rate > 0.5 && self.is_noise(trial, own) {
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
            let close = if before.is_finite() {
                eta * size <= CLOSE && !self.lags(trial.weights)
            } else {
                size <= VERY_CLOSE
            };
            if close {
                if !own && iteration > 0 && self.stages_differ(trial.length) {
                    break;
                }
                return Ok(());
            }
            self.steps_before.copy_from_slice(&self.steps);
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
            self.split.solve(self.table, &mut self.steps);
            counted.solves += 1 + self.table.pairs.len() as u64;
        }
    }

    /// True where the Newton steps are rounding and nothing else in every unknown that they move by much; they are then
    /// nought.
    #[cold]
    fn is_noise(&mut self, trial: Trial<'_>, own: bool) -> bool {
        let n = self.defect.len();
        let rates = self
            .table
            .inverse
            .map(|row| row.map(|w| w.abs() / trial.length));
        let mut terms = vec![0.0; S * n];
        for ((i, rates), terms) in rates
            .iter()
            .enumerate()
            .zip(terms.chunks_exact_mut(n.max(1)))
        {
            for (row, terms) in terms.iter_mut().enumerate() {
                let charges: f64 = (0..S).map(|j| rates[j] * self.outs[j].q[row].abs()).sum();
                *terms = charges + self.outs[i].f[row].abs();
            }
            let (dq, df) = (&self.split.dq, &self.split.df);
            let rate: f64 = rates.iter().sum();
            self.pattern.add_magnitudes(
                |slot| rate * dq[slot].abs() + df[slot].abs(),
                &self.stages[(i + 1) * n..(i + 2) * n],
                terms,
            );
        }
        let stages = self.stages[n..].iter();
        let mut noise: Vec<f64> = stages.map(|x| 8.0 * f64::EPSILON * x.abs()).collect();
        let steps = self.steps.clone();
        for signs in SIGNS {
            if own {
                for (k, right) in self.coupled.right_mut().iter_mut().enumerate() {
                    *right = rounding(k / S, terms[k % S * n + k / S], signs);
                }
                self.coupled.solve();
                for (k, step) in self.coupled.right_mut().iter().enumerate() {
                    let noise = &mut noise[k % S * n + k / S];
                    *noise = noise.max(step.abs());
                }
            } else {
                for (k, step) in self.steps.iter_mut().enumerate() {
                    *step = rounding(k % n, terms[k], signs);
                }
                self.split.solve(self.table, &mut self.steps);
                for (noise, step) in noise.iter_mut().zip(&self.steps) {
                    *noise = noise.max(step.abs());
                }
            }
        }
        let stages = steps
            .chunks_exact(n.max(1))
            .zip(noise.chunks_exact(n.max(1)));
        let drowned = stages
            .into_iter()
            .all(|(step, noise)| drowns(step, noise, trial.weights, CLOSE));
        if drowned {
            self.steps.fill(0.0);
        } else {
            self.steps = steps;
        }
        drowned
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
}
