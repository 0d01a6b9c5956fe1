//! Sparsity pattern of a square matrix, compressed by column: built once, refilled often.

/// Positions (row, column) that a matrix may fill, sorted by column and then by row, without repeats.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Pattern {
    /// Number of rows and columns.
    pub size: usize,
    /// `starts[c]..starts[c + 1]` are the stored positions of column c.
    pub starts: Vec<usize>,
    /// Row of each stored position.
    pub rows: Vec<usize>,
}

impl Pattern {
    /// Adds to each row the magnitudes of what it sums up at `x`: |slope| times |x|, position by position.
    ///
    /// In a row whose terms cancel (a current law) the sum tells nothing of its rounding; these do.
    pub(crate) fn add_magnitudes(&self, slope: impl Fn(usize) -> f64, x: &[f64], rows: &mut [f64]) {
        for (column, value) in x.iter().enumerate() {
            for slot in self.starts[column]..self.starts[column + 1] {
                rows[self.rows[slot]] += (slope(slot) * value).abs();
            }
        }
    }

    /// Collects positions in any order, repeats allowed; every diagonal position is added.
    pub fn from_positions(size: usize, positions: &[(usize, usize)]) -> Self {
        let mut sorted: Vec<(usize, usize)> = positions
            .iter()
            .map(|&(row, column)| (column, row))
            .chain((0..size).map(|k| (k, k)))
            .collect();
        sorted.sort_unstable();
        sorted.dedup();
        let mut starts = vec![0; size + 1];
        for &(column, _) in &sorted {
            starts[column + 1] += 1;
        }
        for column in 0..size {
            starts[column + 1] += starts[column];
        }
        Pattern {
            size,
            starts,
            rows: sorted.into_iter().map(|(_, row)| row).collect(),
        }
    }

    /// Number of stored positions.
    pub fn len(&self) -> usize {
        self.rows.len()
    }

    /// True for a pattern of size zero.
    pub fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// Index of a position among the stored ones.
    pub fn slot(&self, row: usize, column: usize) -> Option<usize> {
        let range = *self.starts.get(column)?..*self.starts.get(column + 1)?;
        self.rows[range.clone()]
            .binary_search(&row)
            .ok()
            .map(|k| range.start + k)
    }
}
