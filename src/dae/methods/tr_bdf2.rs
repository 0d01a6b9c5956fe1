//! A trapezoidal stage to 2 - sqrt 2 of the step, then a stage of backward differentiation to its end.
//!
//! L-stable, order 2, the estimate from a companion of order 3. Bank et al., *IEEE Trans. Computer-Aided Design* 4
//! (1985) 436; companion weights: Hosea & Shampine, *Appl. Numer. Math.* 20 (1996) 21 (both from memory; the tests
//! check the order conditions).

use super::{Family, Method, Table};
use std::f64::consts::SQRT_2;

const D: f64 = 1.0 - SQRT_2 / 2.0;
const W: f64 = SQRT_2 / 4.0;

/// The method.
pub const METHOD: Method = Method {
    name: "tr_bdf2",
    order: 2,
    estimated: 3,
    local: (0.5, 1.5),
    family: Family::Diagonal(Table {
        diagonal: D,
        nodes: &[0.0, 2.0 * D, 1.0],
        rows: &[&[], &[D], &[W, W]],
        companion: &[(1.0 - W) / 3.0, W + 1.0 / 3.0, D / 3.0],
    }),
};

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn the_companion_fulfils_the_conditions_of_order_three_and_the_method_those_of_order_two() {
        // Hairer, Norsett & Wanner I, table II.2.2 (from memory): sum b = 1, sum b c = 1/2, sum b c^2 = 1/3,
        // sum b a c = 1/6.
        let Family::Diagonal(table) = METHOD.family else {
            panic!("of another family")
        };
        let row = |i: usize| -> Vec<f64> {
            let mut row = table.rows[i].to_vec();
            if i > 0 {
                row.push(table.diagonal);
            }
            row.resize(3, 0.0);
            row
        };
        let moment = |weights: &[f64], power: i32| -> f64 {
            weights
                .iter()
                .zip(table.nodes)
                .map(|(b, c)| b * c.powi(power))
                .sum()
        };
        for i in 0..3 {
            assert_relative_eq!(moment(&row(i), 0), table.nodes[i], epsilon = 1e-15);
        }
        let (method, companion) = (row(2), table.companion);
        assert_relative_eq!(moment(&method, 1), 0.5, epsilon = 1e-15);
        assert_relative_eq!(moment(companion, 0), 1.0, epsilon = 1e-15);
        assert_relative_eq!(moment(companion, 1), 0.5, epsilon = 1e-15);
        assert_relative_eq!(moment(companion, 2), 1.0 / 3.0, epsilon = 1e-15);
        let nested: f64 = (0..3).map(|i| companion[i] * moment(&row(i), 1)).sum();
        assert_relative_eq!(nested, 1.0 / 6.0, epsilon = 1e-15);
    }
}
