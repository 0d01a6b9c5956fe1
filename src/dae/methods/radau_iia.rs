//! Radau IIA: collocation at the right Radau points, with the numbers that its steps need.
//!
//! L-stable, stiffly accurate, order 2 S - 1 with S stages, of which none is explicit: a restart after an edge needs
//! charges alone, and unknowns of index 2 keep order S. Hairer & Wanner, *Solving Ordinary Differential Equations
//! II*, IV.5 and IV.8 (from memory). All numbers follow from the points: the tests hold them against closed forms.

use super::{Family, Method};
use crate::math::dense::DenseLu;
use nalgebra::DMatrix;
use num_complex::Complex64;
use std::any::Any;
use std::sync::OnceLock;

/// Three stages or five, as it pays: the orders are those of three.
pub const GRADED: Method = Method {
    name: "graded_radau",
    order: 5,
    estimated: 4,
    local: (0.5, 1.0),
    family: Family::Graded,
};

/// Three stages, order 5.
pub const METHOD: Method = Method {
    name: "radau_iia",
    order: 5,
    estimated: 4,
    local: (0.5, 1.0),
    family: Family::Collocation3,
};

/// Five stages, order 9: for smooth problems and high accuracy.
pub const FIVE: Method = Method {
    name: "radau_iia_9",
    order: 9,
    estimated: 6,
    local: (0.5, 1.0),
    family: Family::Collocation5,
};

/// Coefficients for S stages; S is odd. W is the inverse of Butcher's matrix.
#[derive(Clone, Debug)]
pub(crate) struct Coefficients<const S: usize> {
    /// 0 and the collocation points, the last of which is 1.
    pub points: Vec<f64>,
    /// W: derivative of the collocation polynomial at point i from the increments at the points j.
    pub inverse: [[f64; S]; S],
    /// The same at the step's start.
    pub at_start: [f64; S],
    /// The polynomial half-way between each stage and the next, and the number of the widest of these gaps.
    pub between: Vec<Between<S>>,
    pub widest: usize,
    /// T, in which W is block diagonal: W T = T diag(real, pairs).
    pub transform: [[f64; S]; S],
    /// Inverse of T.
    pub back: [[f64; S]; S],
    /// The real eigenvalue of W.
    pub real: f64,
    /// One of each pair of complex eigenvalues.
    pub pairs: Vec<Complex64>,
}

/// The collocation polynomial at one point within the step.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Between<const S: usize> {
    /// The point, as a share of the step.
    pub share: f64,
    /// Weights of the stages' increments in its value,
    pub weights: [f64; S],
    /// and in its slope per step.
    pub slopes: [f64; S],
}

fn between<const S: usize>(points: &[f64], share: f64) -> Between<S> {
    let mut at = Between {
        share,
        weights: [0.0; S],
        slopes: [0.0; S],
    };
    for j in 0..S {
        let (mut value, mut slope) = (1.0, 0.0);
        for k in (0..=S).filter(|&k| k != j + 1) {
            let reciprocal = 1.0 / (points[j + 1] - points[k]);
            slope = (slope * (share - points[k]) + value) * reciprocal;
            value *= (share - points[k]) * reciprocal;
        }
        (at.weights[j], at.slopes[j]) = (value, slope);
    }
    at
}

static THREE: OnceLock<Coefficients<3>> = OnceLock::new();
static FIVE_STAGES: OnceLock<Coefficients<5>> = OnceLock::new();

impl<const S: usize> Coefficients<S> {
    /// The coefficients, worked out once for the whole program: a short run would spend a share of its time on them.
    pub fn shared() -> &'static Self {
        let table: &'static dyn Any = if S == 3 {
            THREE.get_or_init(Coefficients::new)
        } else {
            FIVE_STAGES.get_or_init(Coefficients::new)
        };
        table
            .downcast_ref()
            .expect("the methods have three stages or five")
    }

    fn new() -> Self {
        let mut points = vec![0.0];
        points.extend(right_radau_points(S));
        let slopes = differentiation(&points);
        let mut inverse = [[0.0; S]; S];
        for (i, row) in inverse.iter_mut().enumerate() {
            row.copy_from_slice(&slopes[i + 1][1..]);
        }
        let mut at_start = [0.0; S];
        at_start.copy_from_slice(&slopes[0][1..]);
        let w = DMatrix::from_fn(S, S, |i, j| inverse[i][j]);
        let eigenvalues = w.complex_eigenvalues();
        let real = eigenvalues
            .iter()
            .min_by(|a, b| a.im.abs().total_cmp(&b.im.abs()))
            .map_or(1.0, |value| value.re);
        let mut pairs: Vec<Complex64> = eigenvalues
            .iter()
            .filter(|value| value.im > 1e-6)
            .map(|value| Complex64::new(value.re, value.im))
            .collect();
        pairs.sort_by(|a, b| a.im.total_cmp(&b.im));
        let mut t = DMatrix::zeros(S, S);
        for (row, entry) in eigenvector(&inverse, Complex64::new(real, 0.0))
            .into_iter()
            .enumerate()
        {
            t[(row, 0)] = entry.re;
        }
        for (pair, &value) in pairs.iter().enumerate() {
            // With W v = value v and v = p + i r, z = y1 + i y2 on the columns (p, -r) obeys W -> value z.
            for (row, entry) in eigenvector(&inverse, value).into_iter().enumerate() {
                t[(row, 1 + 2 * pair)] = entry.re;
                t[(row, 2 + 2 * pair)] = -entry.im;
            }
        }
        let inverted = t
            .clone()
            .try_inverse()
            .expect("the eigenvectors of distinct eigenvalues are independent");
        let array = |m: &DMatrix<f64>| std::array::from_fn(|i| std::array::from_fn(|j| m[(i, j)]));
        let gaps = points[1..].windows(2);
        let between: Vec<_> = gaps
            .map(|gap| between(&points, 0.5 * (gap[0] + gap[1])))
            .collect();
        let width = |k: usize| points[k + 2] - points[k + 1];
        let widest = (0..S - 1)
            .max_by(|&a, &b| width(a).total_cmp(&width(b)))
            .unwrap_or(0);
        Coefficients {
            between,
            widest,
            points,
            inverse,
            at_start,
            transform: array(&t),
            back: array(&inverted),
            real,
            pairs,
        }
    }
}

/// The zeros in (0, 1] of P_s(2 x - 1) - P_(s-1)(2 x - 1), ascending: bisection between the signs on a fine grid.
fn right_radau_points(stages: usize) -> Vec<f64> {
    let value = |x: f64| {
        let z = 2.0 * x - 1.0;
        let (mut before, mut here) = (1.0, z);
        for k in 2..=stages {
            let k = k as f64;
            (before, here) = (here, ((2.0 * k - 1.0) * z * here - (k - 1.0) * before) / k);
        }
        here - before
    };
    let mut points = Vec::new();
    for cell in 0..63 {
        let (mut low, mut high) = (f64::from(cell) / 64.0, f64::from(cell + 1) / 64.0);
        if value(low) * value(high) > 0.0 {
            continue;
        }
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if value(low) * value(middle) <= 0.0 {
                high = middle;
            } else {
                low = middle;
            }
        }
        points.push(0.5 * (low + high));
    }
    points.push(1.0);
    points
}

/// D(i, j): slope at point i of the polynomial that is 1 at point j and 0 at the others (barycentric form).
fn differentiation(points: &[f64]) -> Vec<Vec<f64>> {
    let n = points.len();
    let weight = |j: usize| -> f64 {
        (0..n)
            .filter(|&k| k != j)
            .map(|k| points[j] - points[k])
            .product()
    };
    let mut slopes = vec![vec![0.0; n]; n];
    for i in 0..n {
        for j in (0..n).filter(|&j| j != i) {
            slopes[i][j] = weight(i) / weight(j) / (points[i] - points[j]);
        }
        slopes[i][i] = -slopes[i].iter().sum::<f64>();
    }
    slopes
}

/// Eigenvector of a matrix at a known eigenvalue, by inverse iteration.
fn eigenvector<const S: usize>(matrix: &[[f64; S]; S], eigenvalue: Complex64) -> Vec<Complex64> {
    let mut lu = DenseLu::new(S);
    let shifted = eigenvalue * (1.0 + 1e-10);
    for (k, entry) in lu.entries_mut().iter_mut().enumerate() {
        *entry = Complex64::new(matrix[k / S][k % S], 0.0);
        if k / S == k % S {
            *entry -= shifted;
        }
    }
    lu.factor()
        .expect("a matrix shifted beside its eigenvalue is regular");
    let mut vector = vec![Complex64::new(1.0, 0.0); S];
    let mut work = vector.clone();
    for _ in 0..4 {
        lu.solve(&mut vector, &mut work);
        let last = vector[S - 1];
        for entry in &mut vector {
            *entry /= last;
        }
    }
    vector
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn three_stages_have_the_points_and_eigenvalues_of_the_closed_form() {
        let table = Coefficients::<3>::new();
        let root = 6.0_f64.sqrt();
        for (point, known) in
            table
                .points
                .iter()
                .zip([0.0, (4.0 - root) / 10.0, (4.0 + root) / 10.0, 1.0])
        {
            assert_relative_eq!(*point, known, epsilon = 1e-15);
        }
        // Hairer & Wanner II, IV.8 (from memory): gamma = (6 + 81^(1/3) - 9^(1/3))/30 and its pair.
        let (a, b) = (81.0_f64.powf(1.0 / 3.0), 9.0_f64.powf(1.0 / 3.0));
        assert_relative_eq!(table.real, 30.0 / (6.0 + a - b), epsilon = 1e-11);
        let pair = Complex64::new((12.0 - a + b) / 60.0, -(a + b) * 3.0_f64.sqrt() / 60.0).inv();
        assert_relative_eq!(table.pairs[0].re, pair.re, epsilon = 1e-11);
        assert_relative_eq!(table.pairs[0].im, pair.im, epsilon = 1e-11);
    }

    #[test]
    fn three_stages_have_the_matrix_of_the_closed_form() {
        // W is the inverse of Butcher's matrix, Hairer & Wanner II, table IV.5.6 (from memory).
        let table = Coefficients::<3>::new();
        let r = 6.0_f64.sqrt();
        let a = [
            [
                (88.0 - 7.0 * r) / 360.0,
                (296.0 - 169.0 * r) / 1800.0,
                (-2.0 + 3.0 * r) / 225.0,
            ],
            [
                (296.0 + 169.0 * r) / 1800.0,
                (88.0 + 7.0 * r) / 360.0,
                (-2.0 - 3.0 * r) / 225.0,
            ],
            [(16.0 - r) / 36.0, (16.0 + r) / 36.0, 1.0 / 9.0],
        ];
        for (i, inverse) in table.inverse.iter().enumerate() {
            for j in 0..3 {
                let sum: f64 = inverse.iter().zip(&a).map(|(w, a)| w * a[j]).sum();
                assert_relative_eq!(sum, if i == j { 1.0 } else { 0.0 }, epsilon = 1e-14);
            }
        }
    }

    fn check_blocks<const S: usize>() {
        let table = Coefficients::<S>::new();
        let product = |a: &[[f64; S]; S], b: &[[f64; S]; S]| -> [[f64; S]; S] {
            std::array::from_fn(|i| {
                std::array::from_fn(|j| (0..S).map(|k| a[i][k] * b[k][j]).sum())
            })
        };
        let mut blocks = [[0.0; S]; S];
        blocks[0][0] = table.real;
        for (pair, value) in table.pairs.iter().enumerate() {
            let k = 1 + 2 * pair;
            (blocks[k][k], blocks[k][k + 1]) = (value.re, -value.im);
            (blocks[k + 1][k], blocks[k + 1][k + 1]) = (value.im, value.re);
        }
        let (left, right) = (
            product(&table.inverse, &table.transform),
            product(&table.transform, &blocks),
        );
        for i in 0..S {
            for j in 0..S {
                assert_relative_eq!(left[i][j], right[i][j], epsilon = 1e-9);
            }
        }
        assert_eq!(table.pairs.len(), (S - 1) / 2);
    }

    #[test]
    fn the_transform_makes_blocks() {
        check_blocks::<3>();
        check_blocks::<5>();
    }
}
