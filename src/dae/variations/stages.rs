//! A kept step, differentiated at its own stages.
//!
//! Collocation: sum_j W_ij (dq_j - dq_0)/h + df_i = 0 with dq_j = C_j dX_j + q_p and df_i = G_i dX_i + f_p: one matrix
//! of all stages, factored once and solved for every column. Diagonal: one stage after the other,
//! (C/(h d) + G) dX_i = (dq_0 - q_p)/(h d) - sum_j a_ij/d df_j - f_p.

use super::Variations;
use super::explicit::Explicit;
use super::linear::multiply;
use crate::dae::dense::{Dense, divide_differences};
use crate::dae::methods::{Coefficients, Coupled, Family, Method, Polynomial, Table};
use crate::dae::newton::evaluation;
use crate::dae::system::{Evaluation, Point, System};
use crate::math::{Elimination, Singular};

/// A step that was kept, as its differentiation needs it.
pub(crate) struct Kept<'a> {
    /// Start [s].
    pub from: f64,
    /// Length [s].
    pub length: f64,
    /// Modes.
    pub mode: &'a [f64],
    /// Values at the start and at the stages, one row each.
    pub stages: &'a [f64],
    /// The polynomial laid through it.
    pub dense: Dense<'a>,
}

/// Memory by family.
pub(super) enum Stages {
    Diagonal(Table, Polynomial),
    Collocation3(Box<Joint<3>>),
    Collocation5(Box<Joint<5>>),
}

impl Stages {
    pub fn new<S: System + ?Sized>(method: &Method, system: &S) -> Self {
        match method.family {
            Family::Diagonal(table) => Stages::Diagonal(table, table.polynomial()),
            // The march names the method that made the step, and a graded one is none.
            Family::Graded | Family::Collocation3 => {
                Stages::Collocation3(Box::new(Joint::new(system)))
            }
            Family::Collocation5 => Stages::Collocation5(Box::new(Joint::new(system))),
        }
    }
}

/// Memory for the stages of a collocation step.
pub(super) struct Joint<const K: usize> {
    table: &'static Coefficients<K>,
    coupled: Coupled<K>,
    outs: [Evaluation; K],
    explicit: [Explicit; K],
}

impl<const K: usize> Joint<K> {
    fn new<S: System + ?Sized>(system: &S) -> Self {
        Joint {
            table: Coefficients::shared(),
            coupled: Coupled::new(system.pattern(), Elimination::Automatic),
            outs: std::array::from_fn(|_| evaluation(system.size(), system.pattern().len())),
            explicit: std::array::from_fn(|_| Explicit::default()),
        }
    }
}

impl<S: System + ?Sized> Variations<'_, S> {
    /// Carries the columns over a step that was kept.
    pub(crate) fn step(
        &mut self,
        system: &S,
        method: &Method,
        kept: &Kept<'_>,
    ) -> Result<(), Singular> {
        self.length = if std::mem::take(&mut self.turned) {
            kept.length
        } else {
            self.length.max(kept.length)
        };
        let rows = kept.dense.coefficients.len();
        self.coefficients.resize(self.columns.len() * rows, 0.0);
        let known = self
            .stages
            .iter()
            .position(|(name, _)| *name == method.name);
        let (name, mut stages) = match known {
            Some(place) => self.stages.swap_remove(place),
            None => (method.name, Stages::new(method, system)),
        };
        let done = match &mut stages {
            Stages::Diagonal(table, polynomial) => self.one_by_one(system, table, polynomial, kept),
            Stages::Collocation3(joint) => self.together(system, joint, kept),
            Stages::Collocation5(joint) => self.together(system, joint, kept),
        };
        self.stages.push((name, stages));
        done?;
        self.differences.settle();
        self.lay(kept);
        Ok(())
    }

    fn together<const K: usize>(
        &mut self,
        system: &S,
        joint: &mut Joint<K>,
        kept: &Kept<'_>,
    ) -> Result<(), Singular> {
        let n = self.scales.len();
        for stage in 0..K {
            let at = stage_point(kept, &joint.table.points, stage + 1, n);
            system.evaluate(at, true, &mut joint.outs[stage]);
            self.counted.evaluations += 1;
            self.explicit(system, at, &mut joint.explicit[stage]);
        }
        let rates = joint.table.inverse.map(|row| row.map(|w| w / kept.length));
        joint
            .coupled
            .factor(&self.linear.pattern, &rates, &joint.outs)?;
        self.counted.factorizations += 1;
        for column in 0..self.columns.len() {
            let right = joint.coupled.right_mut();
            for row in 0..n {
                let place = column * n + row;
                let known: [f64; K] =
                    std::array::from_fn(|j| joint.explicit[j].q[place] - self.q[place]);
                for (i, rates) in rates.iter().enumerate() {
                    let charges: f64 = rates.iter().zip(&known).map(|(w, q)| w * q).sum();
                    right[K * row + i] = -charges - joint.explicit[i].f[place];
                }
            }
            joint.coupled.solve();
            self.counted.solves += 1;
            let own = &mut self.coefficients[column * (K + 1) * n..(column + 1) * (K + 1) * n];
            own[..n].copy_from_slice(&self.x[column * n..(column + 1) * n]);
            for (place, &value) in joint.coupled.right_mut().iter().enumerate() {
                own[(place % K + 1) * n + place / K] = value;
            }
            let (end, last) = (&own[K * n..], K - 1);
            let place = column * n..(column + 1) * n;
            self.x[place.clone()].copy_from_slice(end);
            let charge = &mut self.q[place.clone()];
            charge.copy_from_slice(&joint.explicit[last].q[place]);
            multiply(&self.linear.pattern, &joint.outs[last].dq, end, charge);
        }
        Ok(())
    }

    fn one_by_one(
        &mut self,
        system: &S,
        table: &Table,
        polynomial: &Polynomial,
        kept: &Kept<'_>,
    ) -> Result<(), Singular> {
        let (n, count) = (self.scales.len(), table.nodes.len());
        let (h, d) = (kept.length, table.diagonal);
        let rate = 1.0 / (h * d);
        let mut explicit = Explicit::default();
        let mut slopes = vec![0.0; self.columns.len() * count * n];
        let mut values = slopes.clone();
        for column in 0..self.columns.len() {
            let place = column * n..(column + 1) * n;
            slopes[column * count * n..][..n].copy_from_slice(&self.f[place.clone()]);
            values[column * count * n..][..n].copy_from_slice(&self.x[place]);
        }
        let start = self.q.clone();
        let mut right = vec![0.0; n];
        for stage in 1..count {
            let at = stage_point(kept, table.nodes, stage, n);
            self.linear.at(system, at, rate, &mut self.counted)?;
            self.explicit(system, at, &mut explicit);
            for column in 0..self.columns.len() {
                let own = &mut slopes[column * count * n..(column + 1) * count * n];
                for row in 0..n {
                    let before: f64 = table.rows[stage]
                        .iter()
                        .enumerate()
                        .map(|(j, weight)| weight * own[j * n + row])
                        .sum();
                    let place = column * n + row;
                    // What remains of the equation besides rate dq + df, kept for df below.
                    own[stage * n + row] = before / d - rate * start[place];
                    right[row] =
                        -own[stage * n + row] - rate * explicit.q[place] - explicit.f[place];
                }
                self.linear.solve(&mut right, &mut self.counted);
                values[(column * count + stage) * n..][..n].copy_from_slice(&right);
                let place = column * n..(column + 1) * n;
                let charge = &mut self.q[place.clone()];
                charge.copy_from_slice(&explicit.q[place]);
                multiply(&self.linear.pattern, &self.linear.out.dq, &right, charge);
                for (slope, charge) in own[stage * n..].iter_mut().zip(charge) {
                    *slope = -(rate * *charge + *slope);
                }
            }
        }
        let (rows, degree) = (count * n, polynomial.points.len());
        self.coefficients.fill(0.0);
        for (k, row) in self.coefficients.chunks_exact_mut(n.max(1)).enumerate() {
            let stages = values[k / degree * rows..].chunks_exact(n.max(1));
            for (stage, weight) in stages.zip(&polynomial.weights[k % degree]) {
                for (value, x) in row.iter_mut().zip(stage) {
                    *value += weight * x;
                }
            }
        }
        for column in 0..self.columns.len() {
            let last = (column * count + count - 1) * n;
            let place = column * n..(column + 1) * n;
            self.f[place.clone()].copy_from_slice(&slopes[last..last + n]);
            self.x[place].copy_from_slice(&values[last..last + n]);
        }
        Ok(())
    }

    /// Turns rows at the step's points into polynomials, as the step's own was laid.
    fn lay(&mut self, kept: &Kept<'_>) {
        let n = self.scales.len();
        let points = kept.dense.points;
        // A polynomial that starts where the stages say and not where the step did is continued back to its start.
        let anew: Vec<usize> = (0..n)
            .filter(|&k| kept.dense.coefficients[k] != kept.stages[k])
            .collect();
        for own in self.coefficients.chunks_exact_mut(points.len() * n) {
            for &unknown in &anew {
                own[unknown] = (1..points.len())
                    .map(|k| start_weight(points, k) * own[k * n + unknown])
                    .sum();
            }
            divide_differences(points, own, n);
        }
    }
}

fn stage_point<'a>(kept: &Kept<'a>, points: &[f64], stage: usize, n: usize) -> Point<'a> {
    Point {
        time: kept.from + kept.length * points[stage],
        x: &kept.stages[stage * n..(stage + 1) * n],
        mode: kept.mode,
    }
}

/// Lagrange's weight of stage `k` at the step's start, of the polynomial through the stages alone.
fn start_weight(points: &[f64], k: usize) -> f64 {
    (1..points.len())
        .filter(|&j| j != k)
        .map(|j| points[j] / (points[j] - points[k]))
        .product()
}
