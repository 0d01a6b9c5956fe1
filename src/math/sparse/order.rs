//! The choice of pivots for a sparse elimination: little fill, and large enough.
//!
//! Among the entries that are not small beside the rest of their column, the one is taken whose row and column
//! hold the fewest others: Markowitz, *Management Science* 3 (1957) 255; Duff, Erisman & Reid, *Direct Methods for
//! Sparse Matrices*, chapter 7 (both from memory). The elimination is carried out on the way, so that zeros on
//! the diagonal (sources, windings) need no treatment of their own. A row or column with one entry left costs
//! nothing and comes first: nodes held by ideal sources and currents that are only looked at never meet the rest,
//! which is what a block triangular form would gain.

use super::super::scalar::Scalar;
use super::super::singular::Singular;
use super::buckets::Buckets;
use super::lists::Lists;

/// A pivot must reach this share of the largest scaled entry left in its column.
const THRESHOLD: f64 = 0.1;
/// Rows and columns looked through for the best pivot: more cost time and hardly lessen the fill.
const SEARCHED: usize = 4;

/// Pivots in their order, and the structure that they leave.
#[derive(Clone, Debug, Default)]
pub(super) struct Order {
    /// Row of each pivot.
    pub rows: Vec<u32>,
    /// Column of each pivot.
    pub columns: Vec<u32>,
    /// Per pivot, the rows below it that its column reaches.
    pub below: Lists,
    /// Per pivot, the columns behind it that its row reaches.
    pub behind: Lists,
    /// Factor of each column that brings its largest entry to between 1 and 2: a power of two, so that nothing rounds.
    pub weights: Vec<f64>,
}

/// What is left of the matrix while it is eliminated.
struct Rest<T> {
    /// Entries of each row that is left, by ascending column; columns that are done hold none.
    rows: Vec<Vec<(u32, T)>>,
    /// Rows of each column that is left, in no order.
    columns: Vec<Vec<u32>>,
    by_row: Buckets,
    by_column: Buckets,
    column_done: Vec<bool>,
    /// Reciprocal of each row's largest entry in the matrix, columns measured by their own largest entries.
    scales: Vec<f64>,
    merged: Vec<(u32, T)>,
}

/// An entry that may be the pivot: least cost first, then the diagonal (which keeps a symmetric pattern symmetric), then
/// the first row and column.
type Candidate = (u64, bool, u32, u32);

/// Orders the pivots of the matrix compressed by column.
pub(super) fn order<T: Scalar>(
    starts: &[usize],
    rows: &[usize],
    values: &[T],
) -> Result<Order, Singular> {
    let size = starts.len() - 1;
    let weights = column_weights(starts, values);
    let mut rest = Rest::new(starts, rows, values, &weights)?;
    let mut order = Order {
        weights,
        ..Order::default()
    };
    for _ in 0..size {
        let (row, column) = rest.pivot()?;
        rest.eliminate(row, column, &mut order);
    }
    Ok(order)
}

impl<T: Scalar> Rest<T> {
    fn new(
        starts: &[usize],
        positions: &[usize],
        values: &[T],
        weights: &[f64],
    ) -> Result<Self, Singular> {
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
                scales[row] = scales[row].max(value.size() * weights[column]);
            }
        }
        if let Some(row) = scales.iter().position(|&largest| largest == 0.0) {
            return Err(Singular { column: row });
        }
        Ok(Rest {
            by_row: Buckets::new(rows.iter().map(Vec::len)),
            by_column: Buckets::new(columns.iter().map(Vec::len)),
            column_done: vec![false; size],
            scales: scales.into_iter().map(|largest| 1.0 / largest).collect(),
            merged: Vec::new(),
            rows,
            columns,
        })
    }

    fn scaled(&self, row: u32, column: u32) -> f64 {
        let entries = &self.rows[row as usize];
        let place = entries.binary_search_by_key(&column, |entry| entry.0);
        let value = place.map_or(T::ZERO, |place| entries[place].1);
        value.size() * self.scales[row as usize]
    }

    fn column_peak(&self, column: u32) -> f64 {
        self.columns[column as usize]
            .iter()
            .fold(0.0, |most: f64, &row| most.max(self.scaled(row, column)))
    }

    /// The acceptable entry with the least product of other entries in its row and its column.
    fn pivot(&mut self) -> Result<(u32, u32), Singular> {
        let mut best: Option<Candidate> = None;
        let mut searched = 0;
        let least = self.by_row.least().min(self.by_column.least()).max(1);
        'search: for count in least..=self.rows.len() {
            // What a line of this count could cost at least.
            let others = count as u64 - 1;
            if best.is_some_and(|(cost, ..)| cost <= others * others) {
                break;
            }
            for column in self.by_column.of(count) {
                best = better(best, self.best_in_column(column));
                searched += 1;
                if best.is_some() && searched >= SEARCHED {
                    break 'search;
                }
            }
            if best.is_some_and(|(cost, ..)| cost <= others * (others + 1)) {
                break;
            }
            for row in self.by_row.of(count) {
                best = better(best, self.best_in_row(row));
                searched += 1;
                if best.is_some() && searched >= SEARCHED {
                    break 'search;
                }
            }
        }
        best.map(|(.., row, column)| (row, column))
            .ok_or_else(|| Singular {
                column: self.undetermined(),
            })
    }

    fn best_in_column(&self, column: u32) -> Option<Candidate> {
        let peak = self.column_peak(column);
        let others = (self.columns[column as usize].len() as u64).saturating_sub(1);
        self.columns[column as usize]
            .iter()
            .filter(|&&row| {
                peak > f64::MIN_POSITIVE && self.scaled(row, column) >= THRESHOLD * peak
            })
            .map(|&row| {
                let along = self.rows[row as usize].len() as u64 - 1;
                (others * along, row != column, row, column)
            })
            .min()
    }

    fn best_in_row(&self, row: u32) -> Option<Candidate> {
        let entries = &self.rows[row as usize];
        let others = (entries.len() as u64).saturating_sub(1);
        entries
            .iter()
            .filter(|entry| {
                let scaled = entry.1.size() * self.scales[row as usize];
                scaled > f64::MIN_POSITIVE && scaled >= THRESHOLD * self.column_peak(entry.0)
            })
            .map(|entry| {
                let along = self.columns[entry.0 as usize].len() as u64 - 1;
                (others * along, row != entry.0, row, entry.0)
            })
            .min()
    }

    /// The first column that is left, for the report.
    fn undetermined(&self) -> usize {
        self.column_done.iter().position(|done| !done).unwrap_or(0)
    }

    /// Takes the pivot out, subtracts its row from the others of its column, and notes what it reaches.
    fn eliminate(&mut self, row: u32, column: u32, order: &mut Order) {
        let below = std::mem::take(&mut self.columns[column as usize]);
        let mut line = std::mem::take(&mut self.rows[row as usize]);
        self.by_column.remove(column, below.len());
        self.by_row.remove(row, line.len());
        self.column_done[column as usize] = true;
        let mut pivot = T::ONE;
        line.retain(|entry| {
            if entry.0 == column {
                pivot = entry.1;
            }
            entry.0 != column
        });
        for &(reached, _) in &line {
            let rows = &mut self.columns[reached as usize];
            self.by_column.remove(reached, rows.len());
            if let Some(place) = rows.iter().position(|&other| other == row) {
                rows.swap_remove(place);
            }
        }
        let reciprocal = T::ONE / pivot;
        for &other in below.iter().filter(|&&other| other != row) {
            self.subtract(other, column, reciprocal, &line);
        }
        for &(reached, _) in &line {
            let count = self.columns[reached as usize].len();
            self.by_column.insert(reached, count);
        }
        order.rows.push(row);
        order.columns.push(column);
        order
            .below
            .push(below.into_iter().filter(|&other| other != row));
        order.behind.push(line.into_iter().map(|entry| entry.0));
    }

    /// Clears a row's entry in the pivot's column with the pivot's `line`: both ascend by column, so a merge.
    fn subtract(&mut self, row: u32, pivot_column: u32, reciprocal: T, line: &[(u32, T)]) {
        let old = &self.rows[row as usize];
        let place = old.binary_search_by_key(&pivot_column, |entry| entry.0);
        let multiplier = place.map_or(T::ZERO, |place| old[place].1) * reciprocal;
        self.by_row.remove(row, old.len());
        self.merged.clear();
        let mut line = line.iter().copied().peekable();
        for &(column, value) in old.iter().filter(|entry| entry.0 != pivot_column) {
            while let Some((reached, above)) = line.next_if(|entry| entry.0 < column) {
                self.merged.push((reached, -(multiplier * above)));
                self.columns[reached as usize].push(row);
            }
            match line.next_if(|entry| entry.0 == column) {
                Some((_, above)) => self.merged.push((column, value - multiplier * above)),
                None => self.merged.push((column, value)),
            }
        }
        for (reached, above) in line {
            self.merged.push((reached, -(multiplier * above)));
            self.columns[reached as usize].push(row);
        }
        // The old row's memory serves the next merge.
        std::mem::swap(&mut self.rows[row as usize], &mut self.merged);
        self.by_row.insert(row, self.rows[row as usize].len());
    }
}

fn better(best: Option<Candidate>, found: Option<Candidate>) -> Option<Candidate> {
    match (best, found) {
        (Some(best), Some(found)) => Some(best.min(found)),
        (best, found) => best.or(found),
    }
}

/// Powers of two that bring the largest entry of each column to between 1 and 2; 1 for a column of zeros.
fn column_weights<T: Scalar>(starts: &[usize], values: &[T]) -> Vec<f64> {
    const EXPONENT: u64 = 0x7ff << 52;
    let weight = |span: &[usize]| {
        let column = values[span[0]..span[1]].iter();
        let peak = column.fold(0.0, |most: f64, value| most.max(value.size()));
        if peak.is_normal() {
            1.0 / f64::from_bits(peak.to_bits() & EXPONENT)
        } else {
            1.0
        }
    };
    starts.windows(2).map(weight).collect()
}
