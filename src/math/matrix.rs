//! A square matrix on a fixed pattern with its factors: the choice between dense and sparse elimination.

use super::dense::DenseLu;
use super::scalar::Scalar;
use super::singular::Singular;
use super::sparse::SparseLu;

/// How a matrix is eliminated.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Elimination {
    /// Sparse, unless the pattern is [nearly full](NEARLY_FULL).
    #[default]
    Automatic,
    /// Dense at any size.
    Dense,
    /// Sparse at any size.
    Sparse,
}

/// A pattern is nearly full when this share of its positions is stored. The choice is measured (`tests/benches`,
/// candidates): over the matrices of whole runs the sparse elimination refills and solves more quickly than our dense one,
/// nalgebra's dense one and faer's sparse one at every size that circuits had, because few entries of a circuit's matrix
/// are ever touched and none is looked for.
///
/// | refactorisation, solution | 6 unknowns | 9 | 35 | 18, three stages | 3 002 |
/// |---|---|---|---|---|---|
/// | sparse | 71 ns, 25 ns | 92 ns, 33 ns | 0.41 us, 0.12 us | 0.33 us, 0.11 us | 27 us, 17 us |
/// | dense | 114 ns, 33 ns | 182 ns, 59 ns | 1.8 us, 0.57 us | 0.67 us, 0.18 us | |
/// | nalgebra | 108 ns, 61 ns | 219 ns, 97 ns | 3.8 us, 0.45 us | 0.89 us, 0.20 us | |
/// | faer | 255 ns, 77 ns | 329 ns, 86 ns | 1.7 us, 0.30 us | 1.5 us, 0.17 us | 91 us, 20 us |
pub const NEARLY_FULL: f64 = 0.8;

/// A matrix whose non-zero positions are fixed and whose values are refilled often.
#[derive(Clone, Debug)]
pub struct Matrix<T> {
    size: usize,
    starts: Vec<usize>,
    rows: Vec<usize>,
    values: Vec<T>,
    work: Vec<T>,
    factors: Factors<T>,
}

#[derive(Clone, Debug)]
enum Factors<T> {
    Dense(DenseLu<T>),
    Sparse(Box<SparseLu<T>>),
}

impl<T: Scalar> Matrix<T> {
    /// A matrix on a pattern compressed by column: column c holds the rows `rows[starts[c]..starts[c + 1]]`, ascending.
    pub fn new(size: usize, starts: &[usize], rows: &[usize], elimination: Elimination) -> Self {
        let dense = match elimination {
            Elimination::Automatic => rows.len() as f64 > NEARLY_FULL * (size * size) as f64,
            Elimination::Dense => true,
            Elimination::Sparse => false,
        };
        Matrix {
            size,
            starts: starts.to_vec(),
            rows: rows.to_vec(),
            values: vec![T::ZERO; rows.len()],
            work: vec![T::ZERO; size],
            factors: if dense {
                Factors::Dense(DenseLu::new(size))
            } else {
                Factors::Sparse(Box::new(SparseLu::new(size)))
            },
        }
    }

    /// Number of rows and columns.
    pub fn size(&self) -> usize {
        self.size
    }

    /// Values on the pattern, in its order; to be filled before [`Matrix::factor`].
    pub fn values_mut(&mut self) -> &mut [T] {
        &mut self.values
    }

    /// Adds to the diagonal entry of a row, where the pattern holds it (nothing otherwise).
    pub fn add_to_diagonal(&mut self, row: usize, value: T) {
        let span = self.starts[row]..self.starts[row + 1];
        if let Ok(k) = self.rows[span.clone()].binary_search(&row) {
            self.values[span.start + k] += value;
        }
    }

    /// Takes over the pivots of a factored matrix on the same pattern, of numbers of like sizes, where none have been chosen
    /// yet: an order costs as much as many factorisations. They are judged as those of the last factorisation are.
    pub fn take_order<U: Scalar>(&mut self, other: &Matrix<U>) {
        if let (Factors::Sparse(own), Factors::Sparse(other)) = (&mut self.factors, &other.factors)
        {
            own.take_order(other);
        }
    }

    /// Factors the present values. On failure names the column (the unknown) that has no pivot.
    pub fn factor(&mut self) -> Result<(), Singular> {
        match &mut self.factors {
            Factors::Dense(lu) => {
                let entries = lu.entries_mut();
                entries.fill(T::ZERO);
                for column in 0..self.size {
                    for slot in self.starts[column]..self.starts[column + 1] {
                        entries[self.rows[slot] * self.size + column] = self.values[slot];
                    }
                }
                lu.factor()
            }
            Factors::Sparse(lu) => lu.factor(&self.starts, &self.rows, &self.values),
        }
    }

    /// Solves A x = b with the last factors; `x` holds b on entry.
    pub fn solve(&mut self, x: &mut [T]) {
        match &self.factors {
            Factors::Dense(lu) => lu.solve(x, &mut self.work),
            Factors::Sparse(lu) => lu.solve(x, &mut self.work),
        }
    }

    /// Number of entries of L and U that the elimination stores, diagonals counted once.
    pub fn filled(&self) -> usize {
        match &self.factors {
            Factors::Dense(_) => self.size * self.size,
            Factors::Sparse(lu) => lu.filled(),
        }
    }

    /// How often the sparse elimination has chosen its pivots; 0 for a dense one, which chooses them every time.
    pub fn orders(&self) -> u64 {
        match &self.factors {
            Factors::Dense(_) => 0,
            Factors::Sparse(lu) => lu.orders(),
        }
    }

    /// True where the sparse elimination is in use.
    pub fn is_sparse(&self) -> bool {
        matches!(self.factors, Factors::Sparse(_))
    }
}
