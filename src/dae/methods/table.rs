//! Coefficients of a diagonally implicit method, and the polynomial that they lay through a step.

use nalgebra::{DMatrix, DVector};

/// Coefficients of a diagonally implicit method (Butcher's table, stiffly accurate, first stage explicit).
#[derive(Clone, Copy, Debug)]
pub struct Table {
    /// Diagonal coefficient of all implicit stages.
    pub diagonal: f64,
    /// Instants of the stages as shares of the step.
    pub nodes: &'static [f64],
    /// Coefficients left of the diagonal, one row per stage; the last row with the diagonal is the method.
    pub rows: &'static [&'static [f64]],
    /// Weights of the companion method whose difference is the error estimate.
    pub companion: &'static [f64],
}

/// Points of a step at which its polynomial is a sum of stages, ascending from 0 to 1.
#[derive(Clone, Debug)]
pub(crate) struct Polynomial {
    pub points: Vec<f64>,
    /// Weight of each stage, one row per point.
    pub weights: Vec<Vec<f64>>,
}

impl Table {
    /// Coefficient of stage `j` in stage `i`.
    fn coefficient(&self, i: usize, j: usize) -> f64 {
        match self.rows[i].get(j) {
            Some(&left) => left,
            None if i == j && i > 0 => self.diagonal,
            None => 0.0,
        }
    }

    /// The polynomial of the highest degree for which the stages suffice.
    ///
    /// A stage of order 2 is off by e_i h^3 with e_i = c_i^3/6 - sum a_ij c_j^2/2 and one and the same vector for all
    /// stages, so that weights w with sum w_i c_i^k = s^k up to k = 3 and sum w_i e_i = 0 give x(s) to h^4 although no
    /// stage within the step is that good. With fewer stages: up to k = 2. Of all such weights, the smallest.
    pub(crate) fn polynomial(&self) -> Polynomial {
        let stages = self.nodes.len();
        let degree = if stages >= 5 { 3 } else { 2 };
        let mut conditions = DMatrix::zeros(degree + 1 + usize::from(degree == 3), stages);
        for i in 0..stages {
            for k in 0..=degree {
                conditions[(k, i)] = self.nodes[i].powi(k as i32);
            }
            if degree == 3 {
                let squares: f64 = (0..stages)
                    .map(|j| self.coefficient(i, j) * self.nodes[j].powi(2))
                    .sum();
                conditions[(4, i)] = self.nodes[i].powi(3) / 6.0 - squares / 2.0;
            }
        }
        let smallest = conditions
            .clone()
            .pseudo_inverse(1e-13)
            .expect("the tolerance is positive");
        let points: Vec<f64> = (0..=degree).map(|k| k as f64 / degree as f64).collect();
        let weights = points.iter().map(|&s| {
            let mut single = vec![0.0; stages];
            if s == 0.0 || s == 1.0 {
                single[if s == 0.0 { 0 } else { stages - 1 }] = 1.0;
                return single;
            }
            let right = DVector::from_fn(conditions.nrows(), |k, _| {
                if k <= degree { s.powi(k as i32) } else { 0.0 }
            });
            (&smallest * right).iter().copied().collect()
        });
        Polynomial {
            weights: weights.collect(),
            points,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Family, METHODS};
    use super::*;
    use approx::assert_relative_eq;

    /// What is missing from the conditions of this order, the largest of each, for a row of weights.
    ///
    /// Hairer, Norsett & Wanner I, table II.2.2 (from memory): sum b = 1, sum b c = 1/2, sum b c^2 = 1/3,
    /// sum b a c = 1/6, sum b c^3 = 1/4, sum b c a c = 1/8, sum b a c^2 = 1/12, sum b a a c = 1/24.
    fn missing(table: &Table, weights: &[f64], order: u32) -> f64 {
        let s = table.nodes.len();
        let through = |v: &[f64]| -> Vec<f64> {
            (0..s)
                .map(|i| (0..s).map(|j| table.coefficient(i, j) * v[j]).sum())
                .collect()
        };
        let c = table.nodes;
        let power = |k: i32| -> Vec<f64> { c.iter().map(|c| c.powi(k)).collect() };
        let ac = through(c);
        let cac: Vec<f64> = c.iter().zip(&ac).map(|(c, ac)| c * ac).collect();
        let conditions = [
            (1, power(0), 1.0),
            (2, power(1), 2.0),
            (3, power(2), 3.0),
            (3, ac.clone(), 6.0),
            (4, power(3), 4.0),
            (4, cac, 8.0),
            (4, through(&power(2)), 12.0),
            (4, through(&ac), 24.0),
        ];
        let held = conditions.iter().filter(|(from, ..)| *from == order);
        held.map(|(_, moments, reciprocal)| {
            let sum: f64 = weights.iter().zip(moments).map(|(b, m)| b * m).sum();
            (sum - 1.0 / reciprocal).abs()
        })
        .fold(0.0, f64::max)
    }

    #[test]
    fn methods_and_companions_fulfil_the_conditions_of_their_orders_and_no_more() {
        for method in METHODS {
            let Family::Diagonal(table) = method.family else {
                continue;
            };
            let s = table.nodes.len();
            for i in 0..s {
                let sum: f64 = (0..s).map(|j| table.coefficient(i, j)).sum();
                assert_relative_eq!(sum, table.nodes[i], epsilon = 1e-15);
            }
            let last: Vec<f64> = (0..s).map(|j| table.coefficient(s - 1, j)).collect();
            // Where the companion's order is the higher one, the estimate is the error of the method itself.
            let companion = if method.estimated > method.order {
                method.order + 1
            } else {
                method.order - 1
            };
            for (weights, order) in [(&last[..], method.order), (table.companion, companion)] {
                for below in 1..=order {
                    let missing = missing(&table, weights, below);
                    assert!(
                        missing < 1e-14,
                        "{}: {below} of {order}: {missing:e}",
                        method.name
                    );
                }
                if order < 4 {
                    assert!(
                        missing(&table, weights, order + 1) > 1e-5,
                        "{}",
                        method.name
                    );
                }
            }
        }
    }

    #[test]
    fn a_polynomial_through_a_cubic_is_the_cubic() {
        for method in METHODS {
            let Family::Diagonal(table) = method.family else {
                continue;
            };
            let polynomial = table.polynomial();
            let degree = polynomial.points.len() as i32 - 1;
            for (&s, weights) in polynomial.points.iter().zip(&polynomial.weights) {
                for k in 0..=degree {
                    let stages = table.nodes.iter().map(|c| c.powi(k));
                    let value: f64 = stages.zip(weights).map(|(x, w)| x * w).sum();
                    assert_relative_eq!(value, s.powi(k), epsilon = 1e-12);
                }
            }
        }
    }
}
