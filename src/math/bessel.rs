//! Ratios of modified Bessel functions of neighbouring orders, for complex arguments: all that skin effect needs.

use num_complex::Complex64;

/// Levels of the continued fraction, beside half the argument's magnitude.
const LEVELS: f64 = 24.0;
/// Most levels: far out the tail's estimate alone is exact to the last digits.
const MOST_LEVELS: f64 = 4000.0;

/// p I(ν-1, p)/I(ν, p) at p² = `square`, for an order ν >= 1/2 and |arg p| <= π/4; its value at zero is 2 ν.
///
/// The continued fraction 2 ν + p²/(2 (ν + 1) + p²/(2 (ν + 2) + ...)), DLMF 10.33.1, from below. Its tail at order μ is
/// put at μ + sqrt(μ² + p²), the leading term for large orders (DLMF 10.41.1). With ν = 1/2 it is p coth p, with ν = 1 the skin
/// effect of a round wire.
pub fn ratio(order: f64, square: Complex64) -> Complex64 {
    let levels = (LEVELS + 0.5 * square.norm().sqrt()).min(MOST_LEVELS) as usize;
    let last = Complex64::from(order + levels as f64);
    let mut value = last + (last * last + square).sqrt();
    for level in (0..levels).rev() {
        value = 2.0 * (order + level as f64) + square / value;
    }
    value
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn half_orders_are_the_hyperbolic_cotangent() {
        for exponent in -40..=40 {
            let x = 10f64.powf(0.05 * f64::from(exponent));
            let p = Complex64::new(x, x);
            let decay = (-2.0 * p).exp();
            let exact = p * (1.0 + decay) / (1.0 - decay);
            let reached = ratio(0.5, p * p);
            assert!(
                (reached / exact - 1.0).norm() < 1e-12,
                "{x}: {reached} {exact}"
            );
        }
    }

    #[test]
    fn neighbouring_orders_obey_the_recurrence() {
        // I(ν-1) - I(ν+1) = 2 ν I(ν)/p, DLMF 10.29.1, so ratio(ν) = 2 ν + p²/ratio(ν + 1).
        for exponent in -3..=6 {
            let square = Complex64::new(0.0, 10f64.powi(exponent));
            for order in [0.5, 1.0, 2.0, 5.5] {
                let other = 2.0 * order + square / ratio(order + 1.0, square);
                assert!((ratio(order, square) / other - 1.0).norm() < 1e-14);
            }
        }
    }

    #[test]
    fn far_out_the_ratio_is_that_of_exponentials() {
        // p I0/I1 = p + 1/2 + 3/(8 p) + ..., from the expansions DLMF 10.40.1.
        let p = Complex64::new(3e5, 3e5);
        let exact = p + 0.5 + 0.375 / p;
        assert!((ratio(1.0, p * p) / exact - 1.0).norm() < 1e-11);
    }
}
