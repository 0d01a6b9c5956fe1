//! One layer as a current sheet: the inductance of a thin cylinder of uniform circumferential current.
//!
//! L = mu0 N² (π D²/4)/l · K(D/l), with the end correction
//! K = 4/(3 π k') ((k'²/k²)(K - E) + E - k), k² = D²/(D² + l²): L. Lorenz 1879; H. Nagaoka, J. Coll. Sci. Tokyo 27
//! (1909); Rosa and Grover, Bull. Bureau of Standards 8 (1912). Exact for the sheet.

use crate::magnetics::MU0;
use crate::math::elliptic::{Elliptic, second_kind_less_one};
use std::f64::consts::PI;

/// End correction for a ratio `diameter`/`length` (both > 0, any unit). Relative error about 1e-15 for any ratio.
pub fn end_correction(diameter: f64, length: f64) -> f64 {
    let diagonal = diameter.hypot(length);
    let (k, complement) = (diameter / diagonal, length / diagonal);
    let e = Elliptic::complementary(complement);
    // Long coils: (K - E)/k² is the integral D, without the bracket that cancels. Short coils: E - k is the
    // difference of two small numbers, E - 1 and k - 1 = -k'²/(1 + k).
    let ends = if complement < 0.5 {
        second_kind_less_one(complement) + complement * complement / (1.0 + k)
    } else {
        e.second - k
    };
    4.0 / (3.0 * PI * complement) * (complement * complement * e.d + ends)
}

/// Inductance per turn squared [H] of a current sheet of `diameter` and `length` [m].
pub fn permeance(diameter: f64, length: f64) -> f64 {
    MU0 * PI * diameter * diameter / (4.0 * length) * end_correction(diameter, length)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn long_and_short_limits_are_met() {
        // K = 1 - 4/(3 π) x + x²/8 - x⁴/64 for a long coil of x = D/l; L = mu0 R (ln(8 R/l) - 1/2) for a short one
        // (Rayleigh and Niven; from memory). The neglected terms are of order x⁶ and (l/R)² ln.
        for x in [1e-9, 1e-4, 1e-3, 0.02] {
            let long = 1.0 - 4.0 / (3.0 * PI) * x + x * x / 8.0 - x.powi(4) / 64.0;
            assert!(
                (end_correction(x, 1.0) - long).abs() < 1e-15 + x.powi(6),
                "{x}"
            );
        }
        for x in [1e3, 1e6, 1e9] {
            let radius = x / 2.0;
            let short = MU0 * radius * ((8.0 * radius).ln() - 0.5);
            assert!(
                (permeance(x, 1.0) / short - 1.0).abs() < 1e-14 + 2.0 / (x * x),
                "{x}"
            );
        }
    }

    #[test]
    fn both_forms_agree_where_they_meet() {
        let length = 1.0;
        let diameter = 3f64.sqrt() * length; // k' = 1/2
        let (low, high) = (
            end_correction(diameter * (1.0 - 1e-12), length),
            end_correction(diameter * (1.0 + 1e-12), length),
        );
        assert!((low / high - 1.0).abs() < 3e-12);
    }
}
