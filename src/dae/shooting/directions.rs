//! The directions in which the charges of a state can vary: as many as dq/dx has rank.
//!
//! dq/dx is scaled (columns by the swings of their unknowns, rows to a largest entry of 1) and its columns are taken in
//! the order of a pivoted QR decomposition until what remains of them is nothing. A coordinate is then the move of one
//! unknown, in its own scale.

use crate::dae::pattern::Pattern;
use nalgebra::{DMatrix, DVector, Dyn, QR};

/// A column that sticks out of those before it by less than this share of itself is no direction of its own.
const NOTHING: f64 = 1e-9;

/// Independent directions of charges.
#[derive(Debug)]
pub(super) struct Directions {
    /// The unknown that each direction moves.
    pub unknowns: Vec<usize>,
    /// Charges per coordinate, one row per direction.
    pub charges: Vec<f64>,
    weights: Vec<f64>,
    decomposed: Option<QR<f64, Dyn, Dyn>>,
}

impl Directions {
    /// From dq/dx on its pattern and the scales of the unknowns.
    pub fn new(pattern: &Pattern, slopes: &[f64], scales: &[f64]) -> Self {
        let n = pattern.size;
        let column = |unknown: usize| pattern.starts[unknown]..pattern.starts[unknown + 1];
        let mut weights = vec![0.0_f64; n];
        for (unknown, scale) in scales.iter().enumerate() {
            for slot in column(unknown) {
                let weight = &mut weights[pattern.rows[slot]];
                *weight = weight.max((slopes[slot] * scale).abs());
            }
        }
        for weight in &mut weights {
            *weight = if *weight > 0.0 { 1.0 / *weight } else { 0.0 };
        }
        let charged: Vec<usize> = (0..n)
            .filter(|&unknown| column(unknown).any(|slot| slopes[slot] != 0.0))
            .collect();
        let row = |unknown: usize| -> Vec<f64> {
            let mut charges = vec![0.0; n];
            for slot in column(unknown) {
                charges[pattern.rows[slot]] += slopes[slot] * scales[unknown];
            }
            charges
        };
        let unknowns = independent(&charged, &weights, &row);
        let charges: Vec<f64> = unknowns.iter().flat_map(|&unknown| row(unknown)).collect();
        let decomposed = (!unknowns.is_empty()).then(|| {
            DMatrix::from_fn(n, unknowns.len(), |i, k| weights[i] * charges[k * n + i]).qr()
        });
        Directions {
            unknowns,
            charges,
            weights,
            decomposed,
        }
    }

    /// Coordinates of a change of the charges.
    pub fn coordinates(&self, change: &[f64]) -> DVector<f64> {
        let Some(qr) = &self.decomposed else {
            return DVector::zeros(0);
        };
        let weighed = change
            .iter()
            .zip(&self.weights)
            .map(|(q, weight)| q * weight);
        let right = DVector::from_iterator(change.len(), weighed);
        let turned = qr.q().transpose() * right;
        qr.r()
            .solve_upper_triangular(&turned)
            .unwrap_or_else(|| DVector::zeros(self.unknowns.len()))
    }

    /// Adds a move along the directions to charges.
    pub fn add(&self, moved: &[f64], charges: &mut [f64]) {
        let n = charges.len().max(1);
        for (moved, row) in moved.iter().zip(self.charges.chunks_exact(n)) {
            for (charge, direction) in charges.iter_mut().zip(row) {
                *charge += moved * direction;
            }
        }
    }
}

/// Columns that are independent of those taken before, the longest first (modified Gram-Schmidt): where two unknowns
/// move the same charges, the one that swings more stands for them.
fn independent(charged: &[usize], weights: &[f64], row: &dyn Fn(usize) -> Vec<f64>) -> Vec<usize> {
    let weighed = |unknown: usize| -> DVector<f64> {
        let column = row(unknown);
        DVector::from_iterator(
            column.len(),
            column.iter().zip(weights).map(|(q, weight)| q * weight),
        )
    };
    let mut left: Vec<(usize, f64, DVector<f64>)> = charged
        .iter()
        .map(|&unknown| (unknown, weighed(unknown)))
        .map(|(unknown, column)| (unknown, column.norm(), column))
        .collect();
    let mut taken = Vec::new();
    loop {
        left.retain(|(_, whole, column)| column.norm() > NOTHING * whole);
        let longest =
            (0..left.len()).max_by(|&a, &b| left[a].2.norm().total_cmp(&left[b].2.norm()));
        let Some(next) = longest else {
            return taken;
        };
        let (unknown, _, column) = left.swap_remove(next);
        taken.push(unknown);
        let unit = column.normalize();
        for (_, _, column) in &mut left {
            let along = unit.dot(column);
            column.axpy(-along, &unit, 1.0);
        }
    }
}
