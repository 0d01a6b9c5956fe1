//! Sparse LU factors with a structure that is found once and refilled with numbers thereafter.
//!
//! With rows and columns in pivot order, P A Q = L U is computed row by row: the entries of a row before its pivot
//! become multipliers, from the first on, and each multiplier's row of U is subtracted from the rest ("up-looking";
//! Duff, Erisman & Reid, *Direct Methods for Sparse Matrices*, chapter 10, from memory).
//!
//! Columns are brought to one size by powers of two (currents beside voltages beside flux linkages). What is subtracted
//! from a row, held against the row's own largest entry, says whether the pivots of last time still serve: it is the
//! growth of the elimination, whatever the rows' scales. Where it becomes large the order is chosen anew.

use super::super::scalar::Scalar;
use super::super::singular::Singular;
use super::order::order;
use super::structure::Structure;
use std::sync::Arc;

/// While refilling, a multiple of a row of U that is subtracted may be so many times the largest entry of the row that it
/// is subtracted from. A new pivot allows ten times an entry, so that changing numbers seldom lead to a new order.
const GROWTH: f64 = 1e3;
/// Or so many times what it was with fresh pivots.
const WORN: f64 = 10.0;

/// Factors of a sparse square matrix.
#[derive(Clone, Debug)]
pub struct SparseLu<T> {
    structure: Option<Arc<Structure>>,
    /// Entries of L and U by position; reciprocals in the pivots' places.
    entries: Vec<T>,
    /// Sum of the sizes of each row of U.
    held: Vec<f64>,
    /// One row spread out, where targets are not noted.
    spread: Vec<T>,
    /// Growth with fresh pivots.
    growth: f64,
    orders: u64,
}

/// Why the pivots at hand do not serve: the place at which it showed.
struct Worn(usize);

impl<T: Scalar> SparseLu<T> {
    /// Room for a matrix of this size.
    pub fn new(size: usize) -> Self {
        SparseLu {
            structure: None,
            entries: Vec::new(),
            held: vec![0.0; size],
            spread: vec![T::ZERO; size],
            growth: 0.0,
            orders: 0,
        }
    }

    /// Entries stored in L and U, diagonals counted once.
    pub fn filled(&self) -> usize {
        self.entries.len()
    }

    /// How often pivots have been chosen.
    pub fn orders(&self) -> u64 {
        self.orders
    }

    /// Takes over the pivots of a matrix on the same pattern where none have been chosen yet. They are judged as those of
    /// last time are.
    pub fn take_order<U>(&mut self, other: &SparseLu<U>) {
        if self.structure.is_none()
            && let Some(structure) = &other.structure
        {
            self.entries.resize(structure.places.len(), T::ZERO);
            self.growth = other.growth;
            self.structure = Some(Arc::clone(structure));
        }
    }

    /// Factors the matrix compressed by column, with the pivots of last time where they serve.
    pub fn factor(
        &mut self,
        starts: &[usize],
        rows: &[usize],
        values: &[T],
    ) -> Result<(), Singular> {
        if let Some(structure) = self.structure.take() {
            let most = GROWTH.max(WORN * self.growth);
            let served = self.refill(&structure, starts, values, most);
            self.structure = Some(structure);
            if served.is_ok() {
                return Ok(());
            }
        }
        let order = order(starts, rows, values)?;
        let structure = Arc::new(Structure::new(order, starts, rows));
        self.orders += 1;
        self.entries.clear();
        self.entries.resize(structure.places.len(), T::ZERO);
        let filled = self.refill(&structure, starts, values, f64::MAX);
        let columns = filled.map_err(|worn| Singular {
            column: structure.columns[worn.0] as usize,
        });
        self.structure = Some(structure);
        self.growth = columns?;
        Ok(())
    }

    /// Computes L and U; the largest growth in any row, which may be `most`.
    fn refill(
        &mut self,
        structure: &Structure,
        starts: &[usize],
        values: &[T],
        most: f64,
    ) -> Result<f64, Worn> {
        self.entries.fill(T::ZERO);
        for (span, &weight) in starts.windows(2).zip(&structure.weights) {
            let span = span[0]..span[1];
            for (&position, value) in structure.positions[span.clone()].iter().zip(&values[span]) {
                self.entries[position as usize] = value.scaled(weight);
            }
        }
        let mut growth = 0.0_f64;
        let mut targets = structure.targets.as_deref();
        for row in 0..structure.size() {
            let (start, end) = (structure.starts[row], structure.starts[row + 1]);
            let pivot = structure.pivots[row] as usize;
            let mut peak = 0.0_f64;
            let mut subtracted = 0.0;
            if (start as usize) < pivot {
                let own = &self.entries[start as usize..end as usize];
                peak = own.iter().fold(peak, |most, entry| {
                    // One instruction, where `max` would look for what is not a number.
                    let size = entry.size();
                    if size > most { size } else { most }
                });
                subtracted = match &mut targets {
                    Some(targets) => self.subtract_noted(structure, row, targets),
                    None => self.subtract_spread(structure, row),
                };
                if subtracted > growth * peak {
                    growth = subtracted / peak;
                }
            }
            let size = self.entries[pivot].size();
            let upper = &self.entries[pivot..end as usize];
            let held = upper.iter().fold(0.0, |sum: f64, entry| sum + entry.size());
            self.held[row] = held;
            // Written so that what is not a number fails.
            let serves = size > f64::MIN_POSITIVE && held.is_finite() && subtracted <= most * peak;
            if !serves {
                return Err(Worn(row));
            }
            self.entries[pivot] = T::ONE / self.entries[pivot];
        }
        Ok(growth)
    }

    /// Turns the entries before a row's pivot into multipliers and subtracts their rows; the size of the
    /// largest row subtracted. Takes the row's share off `targets`.
    #[inline]
    fn subtract_noted(&mut self, structure: &Structure, row: usize, targets: &mut &[u32]) -> f64 {
        let mut most = 0.0_f64;
        let (start, end) = (
            structure.starts[row] as usize,
            structure.starts[row + 1] as usize,
        );
        let pivot = structure.pivots[row] as usize;
        let (done, own) = self.entries.split_at_mut(start);
        let own = &mut own[..end - start];
        for (position, &above) in structure.places[start..pivot].iter().enumerate() {
            let above = above as usize;
            let first = structure.pivots[above] as usize;
            let (reciprocal, behind) = done[first..structure.starts[above + 1] as usize]
                .split_first()
                .expect("every row holds its pivot");
            let multiplier = own[position] * *reciprocal;
            own[position] = multiplier;
            most = larger(most, multiplier.size() * self.held[above]);
            let (here, rest) = targets.split_at(behind.len());
            *targets = rest;
            for (&target, &source) in here.iter().zip(behind) {
                own[target as usize] -= multiplier * source;
            }
        }
        most
    }

    /// The same with the row spread out over all places.
    fn subtract_spread(&mut self, structure: &Structure, row: usize) -> f64 {
        let (start, end) = (
            structure.starts[row] as usize,
            structure.starts[row + 1] as usize,
        );
        let pivot = structure.pivots[row] as usize;
        let places = &structure.places[start..end];
        for (&place, &entry) in places.iter().zip(&self.entries[start..end]) {
            self.spread[place as usize] = entry;
        }
        let mut most = 0.0_f64;
        for &above in &structure.places[start..pivot] {
            let first = structure.pivots[above as usize] as usize;
            let multiplier = self.spread[above as usize] * self.entries[first];
            self.spread[above as usize] = multiplier;
            if multiplier == T::ZERO {
                continue;
            }
            most = larger(most, multiplier.size() * self.held[above as usize]);
            let behind = first + 1..structure.starts[above as usize + 1] as usize;
            for (&place, &entry) in structure.places[behind.clone()]
                .iter()
                .zip(&self.entries[behind])
            {
                self.spread[place as usize] -= multiplier * entry;
            }
        }
        for (&place, entry) in places.iter().zip(&mut self.entries[start..end]) {
            *entry = self.spread[place as usize];
        }
        most
    }

    /// Solves A x = b: `x` holds b on entry; `work` is any vector of the same length.
    pub fn solve(&self, x: &mut [T], work: &mut [T]) {
        let Some(structure) = &self.structure else {
            return;
        };
        let rows = structure
            .rows
            .iter()
            .zip(structure.starts.iter().zip(&structure.pivots));
        for (k, (&row, (&start, &pivot))) in rows.enumerate() {
            let before = start as usize..pivot as usize;
            let mut sum = x[row as usize];
            for (&place, &entry) in structure.places[before.clone()]
                .iter()
                .zip(&self.entries[before])
            {
                sum -= entry * work[place as usize];
            }
            work[k] = sum;
        }
        let columns = structure
            .columns
            .iter()
            .zip(structure.pivots.iter().zip(&structure.starts[1..]));
        for (k, (&column, (&pivot, &end))) in columns.enumerate().rev() {
            let behind = pivot as usize + 1..end as usize;
            let mut sum = work[k];
            for (&place, &entry) in structure.places[behind.clone()]
                .iter()
                .zip(&self.entries[behind])
            {
                sum -= entry * work[place as usize];
            }
            let value = sum * self.entries[pivot as usize];
            work[k] = value;
            x[column as usize] = value.scaled(structure.weights[column as usize]);
        }
    }
}

/// The larger of two; what is not a number wins and stays.
#[inline]
fn larger(most: f64, here: f64) -> f64 {
    if here > most || here.is_nan() {
        here
    } else {
        most
    }
}
