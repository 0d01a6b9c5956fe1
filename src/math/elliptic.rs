//! Complete elliptic integrals by the arithmetic-geometric mean, in combinations free of cancellation.
//!
//! With a₀ = 1, b₀ = k', c₀ = k and aₙ₊₁ = (aₙ + bₙ)/2, bₙ₊₁ = √(aₙ bₙ), cₙ₊₁ = (aₙ - bₙ)/2:
//! K = π/(2 a∞) and (K - E)/K = Σ 2ⁿ⁻¹ cₙ² (n from 0). Abramowitz and Stegun, Handbook of Mathematical Functions,
//! 17.6.3 and 17.6.4 (from memory; checked in the tests). Magnetic fields of circles need differences of K
//! and E that vanish with k² or k⁴; here every such difference is a sum of positive terms.
//!
//! The complementary modulus k' is the argument, because it is what a geometry gives without cancellation
//! where two circles come close (k' to 0).

use std::f64::consts::{FRAC_PI_2, PI};

/// Complete elliptic integrals of one modulus k, 0 <= k < 1.
#[derive(Clone, Copy, Debug)]
pub struct Elliptic {
    /// First kind, K(k).
    pub first: f64,
    /// Second kind, E(k).
    pub second: f64,
    /// D = (K - E)/k²; π/4 at k = 0.
    pub d: f64,
    /// C = (2 D - K)/k²; π/16 at k = 0.
    pub c: f64,
}

impl Elliptic {
    /// Integrals for the complementary modulus `complement` = k' = √(1 - k²), 0 < k' <= 1.
    ///
    /// Relative error about 1e-15 each. At k' = 0 all but the second kind are infinite.
    pub fn complementary(complement: f64) -> Self {
        if complement <= 0.0 {
            let (first, second) = (f64::INFINITY, 1.0);
            return Elliptic {
                first,
                second,
                d: first,
                c: first,
            };
        }
        // c₁ = (1 - k')/2 = k²/(2 (1 + k')); the sums are kept divided by k² and k⁴.
        let modulus2 = (1.0 - complement) * (1.0 + complement);
        let mut a = 0.5 * (1.0 + complement);
        let mut b = complement.sqrt();
        let c1 = 0.5 / (1.0 + complement); // c₁/k²
        let mut c = c1 * modulus2;
        let mut weight = 2.0;
        let mut reduced = 2.0 * c1 * c1; // Σ 2ⁿ cₙ²/k⁴, n from 1
        // cₙ₊₁ = cₙ²/(4 aₙ₊₁), so that cₙ₊₁²/k⁴ = (cₙ/k²)² (cₙ/(4 aₙ₊₁))².
        let mut share = c1;
        while c > 1e-9 * a {
            let next = 0.5 * (a + b);
            b = (a * b).sqrt();
            a = next;
            share *= c / (4.0 * a);
            c *= c / (4.0 * a);
            weight *= 2.0;
            reduced += weight * share * share;
        }
        // One more mean: a and b differ by less than 2e-9, their means by less than 1e-18.
        a = 0.5 * (a + b);
        let first = FRAC_PI_2 / a;
        let c = first * reduced;
        let d = 0.5 * first * (1.0 + modulus2 * reduced);
        Elliptic {
            first,
            second: first - modulus2 * d,
            d,
            c,
        }
    }
}

/// E(k) - 1 for the complementary modulus k', without cancellation for k' near 0 (E near 1).
///
/// From Legendre's relation E K' + E' K - K K' = π/2: E - 1 = (K (K' - E') - (K' - π/2))/K', where the primed
/// integrals belong to the modulus k'.
pub fn second_kind_less_one(complement: f64) -> f64 {
    if complement > 0.5 {
        return Elliptic::complementary(complement).second - 1.0;
    }
    if complement == 0.0 {
        return 0.0;
    }
    let k2 = complement * complement;
    let modulus = (1.0 - k2).sqrt();
    let primed = Elliptic::complementary(modulus);
    let first = Elliptic::complementary(complement).first;
    (first * k2 * primed.d - first_kind_excess(complement, modulus)) / primed.first
}

/// K - π/2 for the modulus `k` with complement `complement`, exact to the last digits for small k.
fn first_kind_excess(k: f64, complement: f64) -> f64 {
    // 1 - agm(1, k') = Σ (aₙ - aₙ₊₁) = Σ cₙ₊₁, all positive.
    let mut a = 0.5 * (1.0 + complement);
    let mut b = complement.sqrt();
    let mut c = 0.5 * k * k / (1.0 + complement);
    let mut fall = c;
    for _ in 0..8 {
        let next = 0.5 * (a + b);
        b = (a * b).sqrt();
        a = next;
        c *= c / (4.0 * a);
        fall += c;
    }
    0.5 * PI * fall / a
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn legendre_relation_holds_over_the_whole_range() {
        for step in 1..1000 {
            let k = f64::from(step) / 1000.0;
            let complement = ((1.0 - k) * (1.0 + k)).sqrt();
            let one = Elliptic::complementary(complement);
            let two = Elliptic::complementary(k);
            let left = one.first * two.second + one.second * two.first - one.first * two.first;
            assert!((left - FRAC_PI_2).abs() < 1e-14, "k = {k}: {left}");
        }
    }

    #[test]
    fn the_lemniscate_and_the_limits_are_met() {
        // K(1/√2) = Γ(1/4)²/(4 √π), Abramowitz and Stegun 17.3 and 6.1.10 (from memory).
        let gamma_quarter: f64 = 3.625_609_908_221_908;
        let middle = Elliptic::complementary(0.5f64.sqrt());
        assert!((middle.first - gamma_quarter.powi(2) / (4.0 * PI.sqrt())).abs() < 1e-14);
        let zero = Elliptic::complementary(1.0);
        assert!((zero.first - FRAC_PI_2).abs() < 1e-15 && (zero.second - FRAC_PI_2).abs() < 1e-15);
        assert!((zero.d - PI / 4.0).abs() < 1e-15 && (zero.c - PI / 16.0).abs() < 1e-15);
    }

    #[test]
    fn small_moduli_follow_their_series() {
        // C = π/16 (1 + 3/4 k² ...) and D = π/4 (1 + 3/8 k² ...): from the series of K and E.
        for k2 in [1e-12f64, 1e-8, 1e-6] {
            let e = Elliptic::complementary((1.0 - k2).sqrt());
            let (c, d) = (PI / 16.0 * (1.0 + 0.75 * k2), PI / 4.0 * (1.0 + 0.375 * k2));
            assert!(
                (e.c / c - 1.0).abs() < 3.0 * k2 * k2 + 1e-15,
                "{k2}: {} {c}",
                e.c
            );
            assert!(
                (e.d / d - 1.0).abs() < 3.0 * k2 * k2 + 1e-15,
                "{k2}: {} {d}",
                e.d
            );
        }
    }

    #[test]
    fn the_second_kind_near_one_keeps_its_digits() {
        // E - 1 = k'²/2 (ln(4/k') - 1/2) + 3/16 k'⁴ (ln(4/k') - 13/12): Abramowitz and Stegun 17.3.36 family (from memory).
        for complement in [1e-9f64, 1e-6, 1e-3] {
            let log = (4.0 / complement).ln();
            let k2 = complement * complement;
            let series = 0.5 * k2 * (log - 0.5) + 3.0 / 16.0 * k2 * k2 * (log - 13.0 / 12.0);
            let reached = second_kind_less_one(complement);
            assert!(
                (reached / series - 1.0).abs() < 1e-13 + k2 * k2,
                "{complement}: {reached} {series}"
            );
        }
        let (low, high) = (
            second_kind_less_one(0.5),
            Elliptic::complementary(0.5).second - 1.0,
        );
        assert!((low - high).abs() < 1e-15);
    }
}
