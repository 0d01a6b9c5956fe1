//! The structure of sparse factors: all that does not depend on the numbers.
//!
//! With rows and columns in pivot order, the rows of L and U stand one after the other in one piece of memory:
//! ```text
//! row i:   l l l | pivot | u u u u        places of the columns ascend; the pivot's is i
//!        starts[i]  pivots[i]        starts[i + 1]
//! ```

use super::lists::Lists;
use super::order::Order;

/// Where subtracted rows fall is noted entry by entry when there are at most so many of these per stored entry, and
/// looked up in a spread-out row otherwise. Noted, 9 unknowns of a converter are refilled in half the time; with a
/// full trailing block the notes outgrow the numbers.
const NOTED: usize = 8;

/// Places of all entries of L and U.
#[derive(Clone, Debug)]
pub(super) struct Structure {
    /// Row of the matrix at each place.
    pub rows: Vec<u32>,
    /// Column of the matrix at each place.
    pub columns: Vec<u32>,
    /// First position of each row, and one more.
    pub starts: Vec<u32>,
    /// Position of each row's pivot.
    pub pivots: Vec<u32>,
    /// Factor of each column of the matrix (not by place), from when the order was chosen.
    pub weights: Vec<f64>,
    /// Column place of each position.
    pub places: Vec<u32>,
    /// Position of each stored entry of the matrix, in the matrix's own order.
    pub positions: Vec<u32>,
    /// Where the rows that are subtracted fall: a position per multiplication, counted from the start of the row that they
    /// are subtracted from, in the order of the elimination.
    pub targets: Option<Vec<u32>>,
}

impl Structure {
    /// The structure that an order of pivots leaves of the matrix compressed by column.
    pub fn new(order: Order, column_starts: &[usize], column_rows: &[usize]) -> Self {
        let size = order.rows.len();
        let row_places = inverse(&order.rows);
        let column_places = inverse(&order.columns);
        let mut below = Lists::default();
        for k in 0..size {
            let rows = order.below.of(k).iter();
            below.push(rows.map(|&row| row_places[row as usize]));
        }
        let before = below.transposed(size);
        let stored = before.items().len() + size + order.behind.items().len();
        let mut starts = Vec::with_capacity(size + 1);
        let mut pivots = Vec::with_capacity(size);
        let mut places = Vec::with_capacity(stored);
        let mut behind = Vec::new();
        for k in 0..size {
            starts.push(places.len() as u32);
            places.extend_from_slice(before.of(k));
            pivots.push(places.len() as u32);
            places.push(k as u32);
            behind.clear();
            behind.extend(
                order
                    .behind
                    .of(k)
                    .iter()
                    .map(|&column| column_places[column as usize]),
            );
            behind.sort_unstable();
            places.extend_from_slice(&behind);
        }
        starts.push(places.len() as u32);
        let mut positions = Vec::with_capacity(column_rows.len());
        for (column, &place) in column_places.iter().enumerate() {
            for &row in &column_rows[column_starts[column]..column_starts[column + 1]] {
                let first = starts[row_places[row] as usize];
                let end = starts[row_places[row] as usize + 1];
                let found = places[first as usize..end as usize].binary_search(&place);
                let within = found.expect("the elimination has met every entry of the matrix");
                positions.push(first + within as u32);
            }
        }
        let multiplications: usize = (0..size)
            .map(|k| order.below.of(k).len() * order.behind.of(k).len())
            .sum();
        let mut structure = Structure {
            rows: order.rows,
            columns: order.columns,
            starts,
            pivots,
            weights: order.weights,
            places,
            positions,
            targets: None,
        };
        if multiplications <= NOTED * stored {
            structure.targets = Some(structure.note_targets(multiplications));
        }
        structure
    }

    fn note_targets(&self, multiplications: usize) -> Vec<u32> {
        let mut targets = Vec::with_capacity(multiplications);
        let mut at = vec![0; self.size()];
        for row in 0..self.size() {
            for position in self.starts[row]..self.starts[row + 1] {
                at[self.places[position as usize] as usize] = position - self.starts[row];
            }
            for &above in self.before(row) {
                targets.extend(
                    self.behind(above as usize)
                        .iter()
                        .map(|&place| at[place as usize]),
                );
            }
        }
        targets
    }

    /// Number of rows.
    pub fn size(&self) -> usize {
        self.pivots.len()
    }

    /// Places of the entries of L in a row.
    fn before(&self, row: usize) -> &[u32] {
        &self.places[self.starts[row] as usize..self.pivots[row] as usize]
    }

    /// Places of the entries of U in a row, behind its pivot.
    fn behind(&self, row: usize) -> &[u32] {
        &self.places[self.pivots[row] as usize + 1..self.starts[row + 1] as usize]
    }
}

fn inverse(order: &[u32]) -> Vec<u32> {
    let mut places = vec![0; order.len()];
    for (place, &line) in order.iter().enumerate() {
        places[line as usize] = place as u32;
    }
    places
}
