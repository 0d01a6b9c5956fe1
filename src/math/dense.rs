//! Dense LU factors with row interchanges: P A = L U, stored by rows.
//!
//! Rows are compared after scaling each by its own largest entry, because the rows of one system measure
//! different things (currents beside voltages). Golub & Van Loan, *Matrix Computations*, 3.4 (from memory).

use super::scalar::Scalar;
use super::singular::Singular;

/// Factors of a dense square matrix; the memory is kept between factorisations.
#[derive(Clone, Debug, Default)]
pub struct DenseLu<T> {
    size: usize,
    /// U on and above the diagonal, the multipliers of L below; row by row, rows interchanged.
    entries: Vec<T>,
    /// Reciprocal pivots.
    reciprocals: Vec<T>,
    /// Row of the matrix that stands in each place.
    order: Vec<usize>,
    /// Reciprocal of each row's largest entry.
    scales: Vec<f64>,
}

impl<T: Scalar> DenseLu<T> {
    /// Room for a matrix of this size.
    pub fn new(size: usize) -> Self {
        DenseLu {
            size,
            entries: vec![T::ZERO; size * size],
            reciprocals: vec![T::ZERO; size],
            order: (0..size).collect(),
            scales: vec![1.0; size],
        }
    }

    /// The matrix, row by row: fill it, then call [`DenseLu::factor`], which overwrites it.
    pub fn entries_mut(&mut self) -> &mut [T] {
        &mut self.entries
    }

    /// Factors the entries in place. On failure names the column in which no pivot was left.
    pub fn factor(&mut self) -> Result<(), Singular> {
        let n = self.size;
        self.scale_rows()?;
        for (place, row) in self.order.iter_mut().enumerate() {
            *row = place;
        }
        for k in 0..n {
            let pivot = self.pivot_of(k)?;
            if pivot != k {
                let (above, below) = self.entries.split_at_mut(pivot * n);
                above[k * n..(k + 1) * n].swap_with_slice(&mut below[..n]);
                self.order.swap(k, pivot);
                self.scales.swap(k, pivot);
            }
            let (above, below) = self.entries.split_at_mut((k + 1) * n);
            let pivot_row = &above[k * n..];
            let reciprocal = T::ONE / pivot_row[k];
            self.reciprocals[k] = reciprocal;
            for row in below.chunks_exact_mut(n) {
                if row[k] == T::ZERO {
                    continue; // most entries of a circuit's matrix are zero
                }
                let multiplier = row[k] * reciprocal;
                row[k] = multiplier;
                for (entry, &above) in row[k + 1..].iter_mut().zip(&pivot_row[k + 1..]) {
                    *entry -= multiplier * above;
                }
            }
        }
        Ok(())
    }

    fn scale_rows(&mut self) -> Result<(), Singular> {
        for (k, row) in self.entries.chunks_exact(self.size.max(1)).enumerate() {
            let largest = row
                .iter()
                .fold(0.0, |most: f64, entry| most.max(entry.size()));
            let sum = row.iter().fold(0.0, |sum: f64, entry| sum + entry.size());
            if !sum.is_finite() || largest == 0.0 {
                return Err(Singular { column: k });
            }
            self.scales[k] = 1.0 / largest;
        }
        Ok(())
    }

    fn pivot_of(&self, k: usize) -> Result<usize, Singular> {
        let n = self.size;
        let (mut best, mut most) = (k, 0.0);
        for place in k..n {
            let size = self.entries[place * n + k].size() * self.scales[place];
            if size > most {
                (best, most) = (place, size);
            }
        }
        if most > f64::MIN_POSITIVE {
            Ok(best)
        } else {
            Err(Singular { column: k })
        }
    }

    /// Solves A x = b: `x` holds b on entry; `work` is any vector of the same length.
    pub fn solve(&self, x: &mut [T], work: &mut [T]) {
        let n = self.size;
        for k in 0..n {
            let row = &self.entries[k * n..k * n + k];
            let mut sum = x[self.order[k]];
            for (&entry, &value) in row.iter().zip(&work[..k]) {
                sum -= entry * value;
            }
            work[k] = sum;
        }
        for k in (0..n).rev() {
            let row = &self.entries[k * n + k + 1..(k + 1) * n];
            let mut sum = work[k];
            for (&entry, &value) in row.iter().zip(&x[k + 1..n]) {
                sum -= entry * value;
            }
            x[k] = sum * self.reciprocals[k];
        }
    }
}
