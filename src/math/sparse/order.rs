//! The choice of pivots for a sparse elimination: little fill, and large enough.
//!
//! Among the entries that are not small beside the rest of their column, the one is taken whose row and column
//! hold the fewest others: Markowitz, *Management Science* 3 (1957) 255; Duff, Erisman & Reid, *Direct Methods for
//! Sparse Matrices*, chapter 7 (both from memory). The elimination is carried out on the way, so that zeros on
//! the diagonal (sources, windings) need no treatment of their own.

use super::super::matrix::Singular;
use super::super::scalar::Scalar;
use std::collections::BTreeSet;

/// A pivot must reach this share of the largest scaled entry left in its column.
const THRESHOLD: f64 = 0.1;
/// Rows and columns looked through for the best pivot: more cost time and hardly lessen the fill.
const SEARCHED: usize = 4;

/// Pivots in their order, and the structure that they leave.
#[derive(Clone, Debug, Default)]
pub struct Order {
    /// Row of each pivot.
    pub rows: Vec<u32>,
    /// Column of each pivot.
    pub columns: Vec<u32>,
    /// Per pivot, the rows below it that its column reaches.
    pub below: Vec<Vec<u32>>,
    /// Per pivot, the columns behind it that its row reaches.
    pub behind: Vec<Vec<u32>>,
    /// Reciprocal of each row's largest entry in the matrix.
    pub scales: Vec<f64>,
}

/// What is left of the matrix while it is eliminated. Entries of finished columns stay in `rows` until merged.
struct Rest<T> {
    rows: Vec<Vec<(u32, T)>>,
    columns: Vec<Vec<u32>>,
    row_counts: Vec<u32>,
    row_done: Vec<bool>,
    column_done: Vec<bool>,
    by_row: BTreeSet<(u32, u32)>,
    by_column: BTreeSet<(u32, u32)>,
    scales: Vec<f64>,
}

/// Orders the pivots of the matrix compressed by column.
pub fn order<T: Scalar>(starts: &[usize], rows: &[usize], values: &[T]) -> Result<Order, Singular> {
    let size = starts.len() - 1;
    let mut rest = Rest::new(starts, rows, values)?;
    let mut order = Order::default();
    for _ in 0..size {
        let (row, column) = rest.pivot()?;
        let (below, behind) = rest.eliminate(row, column);
        order.rows.push(row);
        order.columns.push(column);
        order.below.push(below);
        order.behind.push(behind);
    }
    order.scales = rest.scales;
    Ok(order)
}

impl<T: Scalar> Rest<T> {
    fn new(starts: &[usize], positions: &[usize], values: &[T]) -> Result<Self, Singular> {
        let size = starts.len() - 1;
        let mut rows = vec![Vec::new(); size];
        let mut columns = vec![Vec::new(); size];
        let mut scales = vec![0.0_f64; size];
        for column in 0..size {
            for slot in starts[column]..starts[column + 1] {
                let (row, value) = (positions[slot], values[slot]);
                if !value.is_finite() {
                    return Err(Singular { column });
                }
                rows[row].push((column as u32, value));
                columns[column].push(row as u32);
                scales[row] = scales[row].max(value.size());
            }
        }
        if let Some(row) = scales.iter().position(|&largest| largest == 0.0) {
            return Err(Singular { column: row });
        }
        let row_counts: Vec<u32> = rows.iter().map(|row| row.len() as u32).collect();
        Ok(Rest {
            by_row: (0..size as u32)
                .map(|k| (row_counts[k as usize], k))
                .collect(),
            by_column: (0..size as u32)
                .map(|k| (columns[k as usize].len() as u32, k))
                .collect(),
            row_done: vec![false; size],
            column_done: vec![false; size],
            scales: scales.into_iter().map(|largest| 1.0 / largest).collect(),
            rows,
            columns,
            row_counts,
        })
    }

    fn value(&self, row: u32, column: u32) -> T {
        let entries = &self.rows[row as usize];
        entries
            .binary_search_by_key(&column, |entry| entry.0)
            .map_or(T::ZERO, |k| entries[k].1)
    }

    fn scaled(&self, row: u32, column: u32) -> f64 {
        self.value(row, column).size() * self.scales[row as usize]
    }

    fn column_peak(&self, column: u32) -> f64 {
        self.columns[column as usize]
            .iter()
            .fold(0.0, |most: f64, &row| most.max(self.scaled(row, column)))
    }

    /// The acceptable entry with the least product of other entries in its row and its column.
    fn pivot(&self) -> Result<(u32, u32), Singular> {
        let mut best: Option<(u64, u32, u32)> = None;
        let mut searched = 0;
        let mut columns = self.by_column.iter().peekable();
        let mut rows = self.by_row.iter().peekable();
        loop {
            let column_count = columns.peek().map_or(u32::MAX, |line| line.0);
            let row_count = rows.peek().map_or(u32::MAX, |line| line.0);
            let least = u64::from(column_count.min(row_count).saturating_sub(1));
            if best.is_some_and(|(cost, ..)| searched >= SEARCHED || cost <= least * least) {
                break;
            }
            let found = if column_count <= row_count {
                match columns.next() {
                    Some(&(_, column)) => self.best_in_column(column),
                    None => break,
                }
            } else {
                match rows.next() {
                    Some(&(_, row)) => self.best_in_row(row),
                    None => break,
                }
            };
            if let Some(found) = found {
                searched += 1;
                best = Some(best.map_or(found, |best| best.min(found)));
            }
        }
        best.map(|(_, row, column)| (row, column))
            .ok_or_else(|| Singular {
                column: self.undetermined(),
            })
    }

    fn best_in_column(&self, column: u32) -> Option<(u64, u32, u32)> {
        let peak = self.column_peak(column);
        let others = (self.columns[column as usize].len() as u64).saturating_sub(1);
        self.columns[column as usize]
            .iter()
            .filter(|&&row| {
                peak > f64::MIN_POSITIVE && self.scaled(row, column) >= THRESHOLD * peak
            })
            .map(|&row| {
                (
                    others * u64::from(self.row_counts[row as usize] - 1),
                    row,
                    column,
                )
            })
            .min()
    }

    fn best_in_row(&self, row: u32) -> Option<(u64, u32, u32)> {
        let others = u64::from(self.row_counts[row as usize]).saturating_sub(1);
        self.rows[row as usize]
            .iter()
            .filter(|entry| !self.column_done[entry.0 as usize])
            .filter(|entry| {
                let scaled = entry.1.size() * self.scales[row as usize];
                scaled > f64::MIN_POSITIVE && scaled >= THRESHOLD * self.column_peak(entry.0)
            })
            .map(|entry| {
                (
                    others * (self.columns[entry.0 as usize].len() as u64 - 1),
                    row,
                    entry.0,
                )
            })
            .min()
    }

    /// The first column that is left, for the report.
    fn undetermined(&self) -> usize {
        self.column_done.iter().position(|done| !done).unwrap_or(0)
    }

    /// Takes the pivot out and subtracts its row; returns the rows and columns that it reaches.
    fn eliminate(&mut self, row: u32, column: u32) -> (Vec<u32>, Vec<u32>) {
        let below: Vec<u32> = std::mem::take(&mut self.columns[column as usize]);
        self.by_column.remove(&(below.len() as u32, column));
        self.by_row.remove(&(self.row_counts[row as usize], row));
        self.row_done[row as usize] = true;
        self.column_done[column as usize] = true;
        let pivot = self.value(row, column);
        let mut line = std::mem::take(&mut self.rows[row as usize]);
        line.retain(|entry| !self.column_done[entry.0 as usize]);
        for &(reached, _) in &line {
            let count = self.columns[reached as usize].len() as u32;
            self.by_column.remove(&(count, reached));
            self.columns[reached as usize].retain(|&other| other != row);
        }
        let below: Vec<u32> = below.into_iter().filter(|&other| other != row).collect();
        for &other in &below {
            let multiplier = self.value(other, column) / pivot;
            self.subtract(other, multiplier, &line);
        }
        for &(reached, _) in &line {
            self.by_column
                .insert((self.columns[reached as usize].len() as u32, reached));
        }
        (below, line.into_iter().map(|entry| entry.0).collect())
    }

    /// Row `row` less `multiplier` times the pivot's `line`: both sorted by column, so a merge.
    fn subtract(&mut self, row: u32, multiplier: T, line: &[(u32, T)]) {
        let old = std::mem::take(&mut self.rows[row as usize]);
        let mut merged = Vec::with_capacity(old.len() + line.len());
        let mut line = line.iter().peekable();
        for (column, value) in old
            .into_iter()
            .filter(|entry| !self.column_done[entry.0 as usize])
        {
            while let Some(&&(reached, above)) = line.peek().filter(|entry| entry.0 < column) {
                merged.push((reached, -(multiplier * above)));
                self.columns[reached as usize].push(row);
                line.next();
            }
            match line.peek() {
                Some(&&(reached, above)) if reached == column => {
                    merged.push((column, value - multiplier * above));
                    line.next();
                }
                _ => merged.push((column, value)),
            }
        }
        for &(reached, above) in line {
            merged.push((reached, -(multiplier * above)));
            self.columns[reached as usize].push(row);
        }
        self.by_row.remove(&(self.row_counts[row as usize], row));
        self.row_counts[row as usize] = merged.len() as u32;
        self.by_row.insert((merged.len() as u32, row));
        self.rows[row as usize] = merged;
    }
}
