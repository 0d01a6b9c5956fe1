//! Elimination against the definition (residuals), dense against sparse, and the fill of a line.

use super::{Elimination, Matrix, Scalar};
use num_complex::Complex64;

/// Numbers between -1 and 1 from a fixed seed (linear congruence; Knuth's multiplier).
struct Numbers(u64);

impl Numbers {
    fn next(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        (self.0 >> 11) as f64 / (1_u64 << 52) as f64 - 1.0
    }
}

struct Sample<T> {
    size: usize,
    starts: Vec<usize>,
    rows: Vec<usize>,
    values: Vec<T>,
}

impl<T: Scalar> Sample<T> {
    /// About `per_column` entries a column, sizes over eight decades, and no dependable diagonal.
    fn random(size: usize, per_column: usize, make: impl Fn(&mut Numbers) -> T) -> Self {
        let mut numbers = Numbers(size as u64);
        let mut sample = Sample {
            size,
            starts: vec![0],
            rows: Vec::new(),
            values: Vec::new(),
        };
        for column in 0..size {
            // One entry on a shifted diagonal makes the matrix structurally regular; the diagonal itself is zero.
            let mut rows = vec![column, (column + 1) % size];
            for _ in 0..per_column {
                rows.push(((numbers.next() + 1.0) * 0.5 * size as f64) as usize % size);
            }
            rows.sort_unstable();
            rows.dedup();
            for row in rows {
                let value = if row == column {
                    T::ZERO
                } else {
                    make(&mut numbers)
                };
                sample.rows.push(row);
                sample.values.push(value);
            }
            sample.starts.push(sample.rows.len());
        }
        sample
    }

    fn matrix(&self, elimination: Elimination) -> Matrix<T> {
        let mut matrix = Matrix::new(self.size, &self.starts, &self.rows, elimination);
        matrix.values_mut().copy_from_slice(&self.values);
        matrix
    }

    /// Largest residual of A x = b relative to its row's entries times the largest unknown: of the order of rounding
    /// for a stable elimination (Golub & Van Loan, 3.3, from memory), however badly the rows are scaled.
    fn residual(&self, x: &[T], b: &[T]) -> f64 {
        let mut sums: Vec<T> = b.iter().map(|&b| -b).collect();
        let mut terms: Vec<f64> = b.iter().map(|b| b.size()).collect();
        let largest = x.iter().fold(0.0_f64, |most, x| most.max(x.size()));
        for (column, &x) in x.iter().enumerate() {
            for slot in self.starts[column]..self.starts[column + 1] {
                let term = self.values[slot] * x;
                sums[self.rows[slot]] += term;
                terms[self.rows[slot]] += self.values[slot].size() * largest;
            }
        }
        sums.iter()
            .zip(&terms)
            .map(|(sum, terms)| sum.size() / terms.max(1e-300))
            .fold(0.0, f64::max)
    }
}

fn spread(numbers: &mut Numbers) -> f64 {
    numbers.next() * 10.0_f64.powf(4.0 * numbers.next())
}

fn solves<T: Scalar>(sample: &Sample<T>, elimination: Elimination) -> Vec<T> {
    let b: Vec<T> = (0..sample.size)
        .map(|k| T::from_real((k as f64 * 0.7).sin()))
        .collect();
    let mut matrix = sample.matrix(elimination);
    let mut x = b.clone();
    matrix.factor().unwrap();
    matrix.solve(&mut x);
    let residual = sample.residual(&x, &b);
    assert!(
        residual < 1e-12,
        "size {} {elimination:?}: {residual:e}",
        sample.size
    );
    x
}

#[test]
fn dense_and_sparse_elimination_solve_the_same_equations_real_and_complex() {
    for size in [2, 3, 5, 8, 13, 30, 80, 200] {
        let real = Sample::random(size, 3, spread);
        let complex = Sample::random(size, 3, |n| Complex64::new(spread(n), spread(n)));
        let pairs = [(
            solves(&real, Elimination::Dense),
            solves(&real, Elimination::Sparse),
        )];
        for (dense, sparse) in pairs {
            let largest = dense.iter().fold(0.0_f64, |most, x| most.max(x.abs()));
            for (a, b) in dense.iter().zip(&sparse) {
                assert!((a - b).abs() <= 1e-6 * largest, "size {size}: {a} {b}");
            }
        }
        solves(&complex, Elimination::Dense);
        solves(&complex, Elimination::Sparse);
    }
}

#[test]
fn refilling_with_other_numbers_keeps_solving_also_where_old_pivots_vanish() {
    for elimination in [Elimination::Dense, Elimination::Sparse] {
        let mut sample = Sample::random(60, 3, spread);
        let mut matrix = sample.matrix(elimination);
        let mut numbers = Numbers(7);
        for round in 0..20 {
            matrix.values_mut().copy_from_slice(&sample.values);
            matrix.factor().unwrap();
            let b: Vec<f64> = (0..60).map(|_| numbers.next()).collect();
            let mut x = b.clone();
            matrix.solve(&mut x);
            let residual = sample.residual(&x, &b);
            assert!(
                residual < 1e-12,
                "{elimination:?} round {round}: {residual:e}"
            );
            for value in &mut sample.values {
                // A switch's conductance: some entries move over eight decades.
                if numbers.next() > 0.6 {
                    *value *= 10.0_f64.powf(8.0 * numbers.next());
                }
            }
        }
    }
}

#[test]
fn an_undetermined_unknown_is_named() {
    for elimination in [Elimination::Dense, Elimination::Sparse] {
        // Rows: x0 + x1 = 0, x0 - x1 = 0, and x2 in no equation; then two equal equations for x1 and x2.
        let mut matrix = Matrix::new(3, &[0, 2, 4, 5], &[0, 1, 0, 1, 2], elimination);
        matrix
            .values_mut()
            .copy_from_slice(&[1.0, 1.0, 1.0, -1.0, 0.0]);
        assert_eq!(matrix.factor().unwrap_err().column, 2, "{elimination:?}");
        let mut matrix = Matrix::new(3, &[0, 1, 3, 5], &[0, 1, 2, 1, 2], elimination);
        matrix
            .values_mut()
            .copy_from_slice(&[1.0, 1.0, 1.0, 1.0, 1.0]);
        assert!(matrix.factor().unwrap_err().column > 0, "{elimination:?}");
        let mut matrix = Matrix::new(1, &[0, 1], &[0], elimination);
        matrix.values_mut()[0] = f64::NAN;
        assert!(matrix.factor().is_err(), "{elimination:?}");
    }
}

#[test]
fn a_line_fills_no_more_than_a_few_entries_a_section() {
    let filled = |size: usize| {
        // Three diagonals, as the nodes of a line have them.
        let (mut starts, mut rows, mut values) = (vec![0], Vec::new(), Vec::new());
        for column in 0..size {
            for row in column.saturating_sub(1)..(column + 2).min(size) {
                rows.push(row);
                values.push(if row == column { 2.1 } else { -1.0 });
            }
            starts.push(rows.len());
        }
        let mut matrix = Matrix::new(size, &starts, &rows, Elimination::Sparse);
        matrix.values_mut().copy_from_slice(&values);
        matrix.factor().unwrap();
        matrix.filled()
    };
    let (small, large) = (filled(1000), filled(10_000));
    assert!(
        small < 5 * 1000 && large < 10 * small + 50,
        "{small} {large}"
    );
}
