//! A step as it is, to first order, with a column's parameter a little larger or smaller: its unknowns, its modes and
//! both its ends moved along their derivatives. A reading that looks at the steps of two such neighbours sees peaks,
//! crossings and integrals move as they do between two runs, without knowing of derivatives.
//!
//! With the ends' derivatives T0 and T1 the instant at share s of the step moves by T(s) = (1 - s) T0 + s T1, and what is
//! found there by dx/dp + (dx/dt) T(s): a polynomial of the step's own degree.

use crate::dae::advance::Step;
use crate::dae::dense::{Dense, divide_differences};

/// A step that is kept until it is known how its end moves.
#[derive(Clone, Debug, Default)]
pub struct HeldStep {
    from: f64,
    to: f64,
    mode: Vec<f64>,
    x1: Vec<f64>,
    points: Vec<f64>,
    /// Values and slopes per step at the points, then at the end: rows of unknowns.
    values: Vec<f64>,
    slopes: Vec<f64>,
    /// For each column, derivatives at the same places.
    varied: Vec<Vec<f64>>,
    /// For each column, derivatives of the modes.
    modes: Vec<Vec<f64>>,
}

/// A step moved to a neighbour of its parameter.
#[derive(Clone, Debug, Default)]
pub struct MovedStep {
    from: f64,
    to: f64,
    mode: Vec<f64>,
    x0: Vec<f64>,
    x1: Vec<f64>,
    points: Vec<f64>,
    coefficients: Vec<f64>,
}

impl HeldStep {
    /// Keeps a step that carries variations of so many columns.
    pub fn hold(&mut self, step: &Step<'_>, columns: usize) {
        let n = step.x1.len();
        self.from = step.from;
        self.to = step.to;
        fill(&mut self.mode, step.mode);
        fill(&mut self.x1, step.x1);
        fill(&mut self.points, step.dense.points);
        let places = self.points.len() + 1;
        self.values.resize(places * n, 0.0);
        self.slopes.resize(places * n, 0.0);
        self.varied.resize_with(columns, Vec::new);
        self.modes.resize_with(columns, Vec::new);
        for k in 0..places {
            let s = self.points.get(k).copied().unwrap_or(1.0);
            let rows = k * n..(k + 1) * n;
            step.dense.at(s, &mut self.values[rows.clone()]);
            for (which, slope) in self.slopes[rows].iter_mut().enumerate() {
                *slope = step.dense.one(s, which, n).1;
            }
        }
        let Some(varied) = step.varied else { return };
        for (column, rows) in self.varied.iter_mut().enumerate() {
            let dense = varied.dense(column);
            rows.resize(places * n, 0.0);
            for k in 0..places {
                let s = self.points.get(k).copied().unwrap_or(1.0);
                dense.at(s, &mut rows[k * n..(k + 1) * n]);
            }
            fill(&mut self.modes[column], varied.mode(column));
        }
    }

    /// Its end [s].
    pub fn to(&self) -> f64 {
        self.to
    }

    /// The step with a column's parameter moved `by` so much; `ends` are the derivatives of the instants at which it
    /// starts and ends.
    pub fn moved(&self, column: usize, by: f64, ends: [f64; 2], into: &mut MovedStep) {
        let n = self.x1.len();
        let length = self.to - self.from;
        into.from = self.from + by * ends[0];
        into.to = self.to + by * ends[1];
        fill(&mut into.points, &self.points);
        into.coefficients.resize(self.points.len() * n, 0.0);
        into.x1.resize(n, 0.0);
        let varied = &self.varied[column];
        for k in 0..=self.points.len() {
            let s = self.points.get(k).copied().unwrap_or(1.0);
            let instant = ((1.0 - s) * ends[0] + s * ends[1]) / length;
            let row = match into.coefficients.get_mut(k * n..(k + 1) * n) {
                Some(row) if k < self.points.len() => row,
                _ => &mut into.x1[..],
            };
            for (which, value) in row.iter_mut().enumerate() {
                let place = k * n + which;
                *value = self.values[place] + by * (varied[place] + self.slopes[place] * instant);
            }
        }
        into.x0.clear();
        into.x0.extend_from_slice(&into.coefficients[..n]);
        divide_differences(&into.points, &mut into.coefficients, n);
        into.mode.clear();
        let modes = self.mode.iter().zip(&self.modes[column]);
        into.mode
            .extend(modes.map(|(mode, slope)| mode + by * slope));
    }
}

impl MovedStep {
    /// As a step.
    pub fn step(&self) -> Step<'_> {
        Step {
            from: self.from,
            to: self.to,
            mode: &self.mode,
            x0: &self.x0,
            x1: &self.x1,
            dense: Dense {
                points: &self.points,
                coefficients: &self.coefficients,
            },
            varied: None,
        }
    }
}

fn fill(into: &mut Vec<f64>, from: &[f64]) {
    into.clear();
    into.extend_from_slice(from);
}
