//! Sparse LU factors with a structure that is found once and refilled with numbers thereafter.
//!
//! With rows and columns in pivot order, P A Q = L U is computed column by column ("left-looking"): a column of
//! A is spread out, the finished columns of L that U names are subtracted, and what is left is the pivot and,
//! divided by it, the new column of L. Gilbert & Peierls, *SIAM J. Sci. Stat. Comput.* 9 (1988) 862 (from memory).
//! A pivot that has become small beside its column has the order chosen anew.

use super::super::matrix::Singular;
use super::super::scalar::Scalar;
use super::order::{Order, order};
use sprs::CsMatI;

/// While refilling, a pivot below this share of its column's largest scaled entry asks for a new order. It is far
/// below the share asked of a new pivot, so that changing numbers seldom lead to a new order.
const GUARD: f64 = 1e-4;

type Structure = CsMatI<(), u32>;

/// What does not depend on the numbers.
#[derive(Clone, Debug)]
struct Structured {
    row_order: Vec<u32>,
    column_order: Vec<u32>,
    /// Place (in pivot order) of each row of the matrix.
    places: Vec<u32>,
    /// Below the diagonal, by column, places ascending.
    lower: Structure,
    /// Above the diagonal, by column, places ascending.
    upper: Structure,
    /// Row scales in pivot order.
    scales: Vec<f64>,
}

/// Factors of a sparse square matrix.
#[derive(Clone, Debug)]
pub struct SparseLu<T> {
    size: usize,
    structured: Option<Structured>,
    lower: Vec<T>,
    upper: Vec<T>,
    reciprocals: Vec<T>,
    spread: Vec<T>,
}

impl Structured {
    fn new(order: Order) -> Self {
        let size = order.rows.len();
        let places = inverse(&order.rows);
        let column_places = inverse(&order.columns);
        let mut upper = vec![Vec::new(); size];
        for (place, behind) in order.behind.iter().enumerate() {
            for &column in behind {
                upper[column_places[column as usize] as usize].push(place as u32);
            }
        }
        let lower: Vec<Vec<u32>> = order
            .below
            .iter()
            .map(|below| {
                let mut column: Vec<u32> = below.iter().map(|&row| places[row as usize]).collect();
                column.sort_unstable();
                column
            })
            .collect();
        Structured {
            scales: order
                .rows
                .iter()
                .map(|&row| order.scales[row as usize])
                .collect(),
            row_order: order.rows,
            column_order: order.columns,
            lower: compressed(size, &lower),
            upper: compressed(size, &upper),
            places,
        }
    }
}

fn inverse(order: &[u32]) -> Vec<u32> {
    let mut places = vec![0; order.len()];
    for (place, &line) in order.iter().enumerate() {
        places[line as usize] = place as u32;
    }
    places
}

fn compressed(size: usize, columns: &[Vec<u32>]) -> Structure {
    let mut starts = vec![0_u32];
    let mut places = Vec::new();
    for column in columns {
        places.extend_from_slice(column);
        starts.push(places.len() as u32);
    }
    let values = vec![(); places.len()];
    CsMatI::new_csc((size, size), starts, places, values)
}

impl<T: Scalar> SparseLu<T> {
    /// Room for a matrix of this size.
    pub fn new(size: usize) -> Self {
        SparseLu {
            size,
            structured: None,
            lower: Vec::new(),
            upper: Vec::new(),
            reciprocals: vec![T::ZERO; size],
            spread: vec![T::ZERO; size],
        }
    }

    /// Entries stored in L and U, diagonals counted once.
    pub fn filled(&self) -> usize {
        self.lower.len() + self.upper.len() + self.size
    }

    /// Factors the matrix compressed by column, with the pivots of last time where they serve.
    pub fn factor(
        &mut self,
        starts: &[usize],
        rows: &[usize],
        values: &[T],
    ) -> Result<(), Singular> {
        if let Some(structured) = self.structured.take() {
            let served = self.refill(&structured, starts, rows, values, GUARD);
            self.structured = Some(structured);
            if served.is_ok() {
                return Ok(());
            }
        }
        let structured = Structured::new(order(starts, rows, values)?);
        self.lower.resize(structured.lower.nnz(), T::ZERO);
        self.upper.resize(structured.upper.nnz(), T::ZERO);
        let done = self.refill(&structured, starts, rows, values, 0.0);
        self.structured = Some(structured);
        done
    }

    fn refill(
        &mut self,
        structured: &Structured,
        starts: &[usize],
        rows: &[usize],
        values: &[T],
        guard: f64,
    ) -> Result<(), Singular> {
        let (lower_starts, lower_rows) = parts(&structured.lower);
        let (upper_starts, upper_rows) = parts(&structured.upper);
        for k in 0..self.size {
            let column = structured.column_order[k] as usize;
            for slot in starts[column]..starts[column + 1] {
                self.spread[structured.places[rows[slot]] as usize] = values[slot];
            }
            for slot in span(upper_starts, k) {
                let j = upper_rows[slot] as usize;
                let factor = std::mem::take(&mut self.spread[j]);
                self.upper[slot] = factor;
                if factor != T::ZERO {
                    let below = span(lower_starts, j);
                    for (&row, &entry) in lower_rows[below.clone()].iter().zip(&self.lower[below]) {
                        self.spread[row as usize] -= entry * factor;
                    }
                }
            }
            let pivot = std::mem::take(&mut self.spread[k]);
            let reciprocal = T::ONE / pivot;
            let mut most = 0.0_f64;
            for slot in span(lower_starts, k) {
                let row = lower_rows[slot] as usize;
                let entry = std::mem::take(&mut self.spread[row]);
                most = most.max(entry.size() * structured.scales[row]);
                self.lower[slot] = entry * reciprocal;
            }
            self.reciprocals[k] = reciprocal;
            let size = pivot.size() * structured.scales[k];
            if !(size > f64::MIN_POSITIVE && size >= guard * most && most.is_finite()) {
                self.spread.fill(T::ZERO);
                return Err(Singular { column });
            }
        }
        Ok(())
    }

    /// Solves A x = b: `x` holds b on entry; `work` is any vector of the same length.
    pub fn solve(&self, x: &mut [T], work: &mut [T]) {
        let Some(structured) = &self.structured else {
            return;
        };
        let (lower_starts, lower_rows) = parts(&structured.lower);
        let (upper_starts, upper_rows) = parts(&structured.upper);
        for (value, &row) in work.iter_mut().zip(&structured.row_order) {
            *value = x[row as usize];
        }
        for k in 0..self.size {
            let value = work[k];
            let below = span(lower_starts, k);
            for (&row, &entry) in lower_rows[below.clone()].iter().zip(&self.lower[below]) {
                work[row as usize] -= entry * value;
            }
        }
        for k in (0..self.size).rev() {
            let value = work[k] * self.reciprocals[k];
            x[structured.column_order[k] as usize] = value;
            let above = span(upper_starts, k);
            for (&row, &entry) in upper_rows[above.clone()].iter().zip(&self.upper[above]) {
                work[row as usize] -= entry * value;
            }
        }
    }
}

fn parts(structure: &Structure) -> (&[u32], &[u32]) {
    (structure.indptr().into_raw_storage(), structure.indices())
}

#[inline]
fn span(starts: &[u32], k: usize) -> std::ops::Range<usize> {
    starts[k] as usize..starts[k + 1] as usize
}
