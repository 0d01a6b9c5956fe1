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

/// Solution of the sample's equations for its row sums: all ones, whatever the scales.
fn ones<T: Scalar>(sample: &Sample<T>, matrix: &mut Matrix<T>) -> Vec<T> {
    let mut x = vec![T::ZERO; sample.size];
    for (&row, &value) in sample.rows.iter().zip(&sample.values) {
        x[row] += value;
    }
    matrix.solve(&mut x);
    x
}

#[test]
fn pivots_are_kept_while_they_serve_and_chosen_anew_when_they_do_not() {
    // A chain of conductances as a switch sees it: the entry that was the natural pivot falls by fifteen decades; the matrix stays well conditioned.
    let mut sample = Sample {
        size: 3,
        starts: vec![0, 2, 5, 7],
        rows: vec![0, 1, 0, 1, 2, 1, 2],
        values: vec![4.0, -1.0, -1.0, 3.0, -1.0, -1.0, 2.0],
    };
    let mut matrix = sample.matrix(Elimination::Sparse);
    let mut solved = |sample: &Sample<f64>, orders: u64| {
        matrix.values_mut().copy_from_slice(&sample.values);
        matrix.factor().unwrap();
        assert_eq!(matrix.orders(), orders);
        for x in ones(sample, &mut matrix) {
            assert!((x - 1.0).abs() < 1e-14, "{x}");
        }
    };
    solved(&sample, 1);
    for factor in [0.5, 2.0, 10.0] {
        sample.values[0] = 4.0 * factor;
        solved(&sample, 1);
    }
    // Kept as a pivot, 1e-15 would leave nothing of the other entries of its row (Golub & Van Loan, 3.3, from memory).
    sample.values[0] = 4e-15;
    solved(&sample, 2);
    sample.values[0] = 8e-15;
    solved(&sample, 2);
}

#[test]
fn rows_and_columns_may_be_scaled_over_many_decades() {
    fn check<T: Scalar>(make: impl Fn(&mut Numbers) -> T) {
        for size in [3, 10, 40] {
            let mut sample = Sample::random(size, 3, &make);
            let mut numbers = Numbers(99);
            let mut decades = |most: f64| -> Vec<f64> {
                let scale = |_| 10.0_f64.powf(most * numbers.next());
                (0..size).map(scale).collect()
            };
            let (rows, columns) = (decades(12.0), decades(9.0));
            let mut plain = sample.matrix(Elimination::Sparse);
            plain.factor().unwrap();
            let b: Vec<T> = (0..size).map(|k| T::from_real((k as f64).cos())).collect();
            let mut x = b.clone();
            plain.solve(&mut x);
            for (column, scale) in columns.iter().enumerate() {
                for slot in sample.starts[column]..sample.starts[column + 1] {
                    let factor = rows[sample.rows[slot]] * scale;
                    sample.values[slot] = sample.values[slot].scaled(factor);
                }
            }
            let mut scaled = sample.matrix(Elimination::Sparse);
            scaled.factor().unwrap();
            let mut y: Vec<T> = b.iter().zip(&rows).map(|(b, row)| b.scaled(*row)).collect();
            scaled.solve(&mut y);
            // D A E y = D b has the solution y = x/E.
            let largest = x.iter().fold(0.0_f64, |most, x| most.max(x.size()));
            for ((x, y), column) in x.iter().zip(&y).zip(&columns) {
                let gap = (*x - y.scaled(*column)).size();
                assert!(gap < 1e-9 * largest, "size {size}: {gap:e} of {largest:e}");
            }
        }
    }
    check(|numbers| numbers.next());
    check(|numbers| Complex64::new(numbers.next(), numbers.next()));
}

#[test]
fn values_that_are_no_numbers_are_refused_with_old_pivots_too() {
    for place in 0..7 {
        let mut matrix = Matrix::new(
            3,
            &[0, 2, 5, 7],
            &[0, 1, 0, 1, 2, 1, 2],
            Elimination::Sparse,
        );
        let mut values = [4.0, -1.0, -1.0, 3.0, -1.0, -1.0, 2.0];
        matrix.values_mut().copy_from_slice(&values);
        matrix.factor().unwrap();
        for bad in [f64::NAN, f64::INFINITY] {
            values[place] = bad;
            matrix.values_mut().copy_from_slice(&values);
            assert!(matrix.factor().is_err(), "{bad} at {place}");
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

#[test]
fn a_grid_fills_within_a_tenth_of_the_order_of_minimum_degree() {
    // 402 664 entries of L and U in faer's order of approximate minimum degree (tests/benches/candidates, `grid 100`).
    let side = 100;
    let (mut starts, mut rows, mut values) = (vec![0], Vec::new(), Vec::new());
    for node in 0..side * side {
        let (i, j) = (node / side, node % side);
        let mut column = vec![node];
        column.extend((i > 0).then(|| node - side));
        column.extend((i + 1 < side).then_some(node + side));
        column.extend((j > 0).then(|| node - 1));
        column.extend((j + 1 < side).then_some(node + 1));
        column.sort_unstable();
        values.extend(
            column
                .iter()
                .map(|&row| if row == node { 4.1 } else { -1.0 }),
        );
        rows.extend(column);
        starts.push(rows.len());
    }
    let mut matrix = Matrix::new(side * side, &starts, &rows, Elimination::Sparse);
    matrix.values_mut().copy_from_slice(&values);
    matrix.factor().unwrap();
    assert!(matrix.filled() < 442_930, "{}", matrix.filled());
}
