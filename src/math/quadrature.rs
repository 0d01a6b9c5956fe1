//! Gauss-Legendre quadrature: ∫ f over an interval, exact for polynomials up to degree 2 n - 1.

use std::f64::consts::PI;

/// ∫ f(x) dx from `from` to `to` by two points, exact for cubics: the ends' midpoint ± span/(2 √3).
#[inline]
pub fn two_points(from: f64, to: f64, mut f: impl FnMut(f64) -> f64) -> f64 {
    let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
    let away = half / 3f64.sqrt();
    half * (f(middle - away) + f(middle + away))
}

/// Points and weights of one rule on [0, 1].
#[derive(Clone, Debug)]
pub struct Rule {
    points: Vec<(f64, f64)>,
}

impl Rule {
    /// The Gauss-Legendre rule of `n` points (at least 1), each to the last digits.
    ///
    /// Zeros of the Legendre polynomial by Newton from cos(π (i + 3/4)/(n + 1/2)); weights 2/((1 - x²) P'²).
    /// Abramowitz and Stegun 25.4.29 and 22.16.6 (from memory; the tests check the degree).
    pub fn legendre(n: usize) -> Self {
        let n = n.max(1);
        let mut points = Vec::with_capacity(n);
        for i in 0..n {
            let mut x = (PI * (i as f64 + 0.75) / (n as f64 + 0.5)).cos();
            let mut slope = 1.0;
            for _ in 0..8 {
                let (value, rise) = legendre(n, x);
                slope = rise;
                x -= value / rise;
            }
            points.push((0.5 * (1.0 - x), 1.0 / ((1.0 - x * x) * slope * slope)));
        }
        Rule { points }
    }

    /// Points and weights moved to [`from`, `to`].
    pub fn over(&self, from: f64, to: f64) -> impl Iterator<Item = (f64, f64)> + '_ {
        let span = to - from;
        self.points
            .iter()
            .map(move |&(x, weight)| (from + span * x, span * weight))
    }

    /// ∫ f(x) dx from `from` to `to`.
    pub fn integrate(&self, from: f64, to: f64, mut f: impl FnMut(f64) -> f64) -> f64 {
        self.over(from, to).map(|(x, weight)| weight * f(x)).sum()
    }
}

/// The Legendre polynomial of degree `n` and its derivative at |x| < 1.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    for k in 2..=n {
        let k = k as f64;
        (before, value) = (
            value,
            ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k,
        );
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_rule_of_n_points_is_exact_to_degree_2n_less_1() {
        for n in 1..=24 {
            let rule = Rule::legendre(n);
            for degree in 0..2 * n as i32 {
                let reached = rule.integrate(0.0, 1.0, |x| x.powi(degree));
                let exact = 1.0 / f64::from(degree + 1);
                assert!(
                    (reached / exact - 1.0).abs() < 1e-13,
                    "n = {n}, degree {degree}: {reached}"
                );
            }
            let beyond = rule.integrate(-1.0, 1.0, |x| legendre(n, x).0.powi(2));
            assert!(
                beyond.abs() < 1e-25,
                "the square of P_n vanishes on its own zeros"
            );
        }
    }
}
