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
