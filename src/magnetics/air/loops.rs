//! Coaxial circular turns: mutual inductance, pull, self-inductance of a round wire.
//!
//! Maxwell, Treatise on Electricity and Magnetism, art. 701: M = mu0 √(A a) ((2/k - k) K - (2/k) E) with
//! k² = 4 A a/((A + a)² + d²). It is evaluated as mu0 √(A a) k³ C, with C = (2 D - K)/k² and D = (K - E)/k²
//! ([`crate::math::elliptic`]): the same, but no digits are lost where the circles are far apart.

use crate::magnetics::MU0;
use crate::math::elliptic::Elliptic;

/// Mutual inductance [H] of two coaxial circles of radii `one` and `other` [m] at an axial distance [m].
///
/// Relative error about 1e-15. Infinite where the circles coincide; 0 where a radius is 0.
#[inline]
pub fn mutual(one: f64, other: f64, distance: f64) -> f64 {
    let (product, near2, far2) = squares(one, other, distance);
    mutual_of(product, near2, far2)
}

/// The same by the `mean` of both radii and their `difference` [m]: exact where the radii are nearly equal.
#[inline]
pub(super) fn mutual_about(mean: f64, difference: f64, distance: f64) -> f64 {
    let d2 = distance * distance;
    let product = (mean + 0.5 * difference) * (mean - 0.5 * difference);
    mutual_of(
        product,
        difference * difference + d2,
        4.0 * mean * mean + d2,
    )
}

/// M from A a and the squares of the nearest and the farthest distance between points of the two circles.
#[inline]
fn mutual_of(product: f64, near2: f64, far2: f64) -> f64 {
    let k2 = 4.0 * product / far2;
    let c = Elliptic::complementary((near2 / far2).sqrt()).c;
    // √(A a) k³ = 2 A a k²/√far2
    2.0 * MU0 * product * k2 * c / far2.sqrt()
}

/// dM/dd [H/m] of two coaxial circles: times both currents it is the axial force, negative for attraction.
///
/// dM/dd = -mu0 d k⁵ (D - C)/(4 √(A a) k'²), from dK/dk and dE/dk in Maxwell's form.
pub fn mutual_slope(one: f64, other: f64, distance: f64) -> f64 {
    let (product, near2, far2) = squares(one, other, distance);
    let k2 = 4.0 * product / far2;
    let e = Elliptic::complementary((near2 / far2).sqrt());
    // k⁵/√(A a) = 2 k⁴/√far2, and k'² = near2/far2
    -0.5 * MU0 * distance * k2 * k2 * (e.d - e.c) * far2.sqrt() / near2
}

#[inline]
fn squares(one: f64, other: f64, distance: f64) -> (f64, f64, f64) {
    let (sum, difference, d2) = (one + other, one - other, distance * distance);
    (one * other, difference * difference + d2, sum * sum + d2)
}

/// Self-inductance [H] of a circular turn of `radius` [m], of round wire of `wire_radius` [m], uniform current.
///
/// mu0 R ((1 + q/8) ln(8 R/r) + q/24 - 7/4) with q = (r/R)²: Maxwell, in Rosa and Grover, Bull. Bureau of Standards
/// 8 (1912) (from memory; design law "turn by turn"). Meant for r well below R.
pub fn own(radius: f64, wire_radius: f64) -> f64 {
    let q = (wire_radius / radius).powi(2);
    MU0 * radius * ((1.0 + q / 8.0) * (8.0 * radius / wire_radius).ln() + q / 24.0 - 1.75)
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::PI;

    #[test]
    fn far_apart_circles_are_dipoles() {
        // M = mu0 pi A² a²/(2 d³) (1 - 3 (A² + a²)/(2 d²)) for d far above both radii: field of a dipole on its axis.
        let (one, other, d) = (0.02f64, 0.01, 50.0);
        let dipole = MU0 * PI * (one * other).powi(2) / (2.0 * d * d * d);
        let next = dipole * (1.0 - 1.5 * (one * one + other * other) / (d * d));
        assert!((mutual(one, other, d) / next - 1.0).abs() < 1e-12);
        assert!((mutual_slope(one, other, d) / (-3.0 * dipole / d) - 1.0).abs() < 1e-6);
    }

    #[test]
    fn the_slope_is_the_derivative() {
        let h = 1e-6;
        for (one, other, d) in [
            (0.02, 0.019, 0.003),
            (0.05, 0.01, 0.04),
            (0.02, 0.02, 0.005),
        ] {
            let difference = (mutual(one, other, d + h) - mutual(one, other, d - h)) / (2.0 * h);
            assert!((mutual_slope(one, other, d) / difference - 1.0).abs() < 1e-6);
        }
    }

    #[test]
    fn a_circle_of_no_radius_links_nothing() {
        assert_eq!(mutual(0.01, 0.0, 0.0), 0.0);
    }
}
