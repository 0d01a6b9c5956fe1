//! The linear elements of a circuit, stamped once: f = G x and q = C x with slopes that parameters alone decide.
//!
//! An evaluation goes through numbers that lie side by side and then stamps the other elements one by one; the
//! elements themselves, each in its own place among what was read with it, are not touched. In a line of many sections
//! the wait for their numbers would be most of a step.

use super::Circuit;
use crate::dae::{Evaluation, Pattern, Point};
use crate::elements::Stamper;

/// What is stamped once, and the list of what is not.
#[derive(Default)]
pub(super) struct Linear {
    /// df/dx on the pattern.
    pub df: Vec<f64>,
    /// dq/dx on the pattern.
    pub dq: Vec<f64>,
    f: Entries,
    q: Entries,
}

/// The entries of a sparse matrix that are not zero, row by row.
#[derive(Default)]
struct Entries(Vec<Entry>);

#[derive(Clone, Copy)]
struct Entry {
    row: u32,
    column: u32,
    value: f64,
}

impl Entries {
    fn of(pattern: &Pattern, values: &[f64]) -> Self {
        let mut entries = Vec::new();
        for column in 0..pattern.size {
            let span = pattern.starts[column]..pattern.starts[column + 1];
            for (&row, &value) in pattern.rows[span.clone()].iter().zip(&values[span]) {
                if value != 0.0 {
                    entries.push(Entry {
                        row: row as u32,
                        column: column as u32,
                        value,
                    });
                }
            }
        }
        entries.sort_by_key(|entry| entry.row);
        Entries(entries)
    }

    /// Fills `out` with the product of the matrix and `x`.
    fn times(&self, x: &[f64], out: &mut Vec<f64>) {
        out.clear();
        out.resize(x.len(), 0.0);
        for &Entry { row, column, value } in &self.0 {
            out[row as usize] += value * x[column as usize];
        }
    }
}

impl Circuit {
    /// Stamps the linear elements with the values in force; `slots` are those of their positions, in their order.
    pub(super) fn lay_linear(&mut self) {
        let (size, length) = (self.unknowns.len(), self.pattern.len());
        let mut out = Evaluation {
            f: vec![0.0; size],
            q: vec![0.0; size],
            df: vec![0.0; length],
            dq: vec![0.0; length],
        };
        let x = vec![0.0; size];
        let mut stamper = Stamper::filling(&mut out, &self.linear_slots, true);
        for entry in &self.entries {
            if entry.element.is_linear() {
                let at = Point {
                    time: 0.0,
                    x: &x,
                    mode: &[],
                };
                entry.element.stamp(at, &mut stamper);
            }
        }
        let Evaluation { df, dq, .. } = out;
        self.linear = Linear {
            f: Entries::of(&self.pattern, &df),
            q: Entries::of(&self.pattern, &dq),
            df,
            dq,
        };
    }

    /// Fills `out` with the share of the linear elements.
    pub(super) fn evaluate_linear(&self, x: &[f64], slopes: bool, out: &mut Evaluation) {
        self.linear.f.times(x, &mut out.f);
        self.linear.q.times(x, &mut out.q);
        if slopes {
            out.df.clone_from(&self.linear.df);
            out.dq.clone_from(&self.linear.dq);
        }
    }
}
