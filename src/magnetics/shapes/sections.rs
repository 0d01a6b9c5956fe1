//! Effective figures of a path of several sections in series.
//!
//! IEC 60205: C1 = Σ l/A, C2 = Σ l/A²; effective length C1²/C2, area C1/C2, volume C1³/C2². A corner is a quarter of a
//! circle that joins the centres of area of its two neighbours, its section the mean of theirs.

use crate::magnetics::geometry::Geometry;
use std::f64::consts::{FRAC_PI_4, PI};

/// A part of a path: its shares of C1 [1/m] and C2 [1/m³], and its smallest section [m²].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Part {
    c1: f64,
    c2: f64,
    smallest: f64,
}

impl Part {
    /// A part of constant section [m, m²].
    pub fn straight(length: f64, area: f64) -> Self {
        Part {
            c1: length / area,
            c2: length / (area * area),
            smallest: area,
        }
    }

    /// `count` corners in series between sections [m²] whose centres of area lie `one` and `other` [m] from the inner edge.
    pub fn corners(count: usize, (one, first): (f64, f64), (other, second): (f64, f64)) -> Self {
        let area = 0.5 * (first + second);
        Part {
            smallest: f64::INFINITY,
            ..Part::straight(count as f64 * FRAC_PI_4 * (one + other), area)
        }
    }

    /// `count` discs in series, `thick` [m], that the flux crosses from the radius `inner` to `outer` [m].
    pub fn discs(count: usize, thick: f64, inner: f64, outer: f64) -> Self {
        let count = count as f64;
        Part {
            c1: count * (outer / inner).ln() / (2.0 * PI * thick),
            c2: count * (1.0 / inner - 1.0 / outer) / (4.0 * PI * PI * thick * thick),
            smallest: 2.0 * PI * inner * thick,
        }
    }
}

/// The closed path of these parts in series.
pub fn path(parts: &[Part]) -> Geometry {
    let c1: f64 = parts.iter().map(|part| part.c1).sum();
    let c2: f64 = parts.iter().map(|part| part.c2).sum();
    let smallest = parts.iter().map(|part| part.smallest);
    let mut geometry = Geometry::closed(c1 * c1 / c2, c1 / c2);
    geometry.minimum_area = smallest.fold(f64::INFINITY, f64::min);
    geometry
}

/// How far the centre of area of half a disc lies from its rim [m]: r (1 - 4/(3 π)).
pub fn half_disc(radius: f64) -> f64 {
    radius * (1.0 - 4.0 / (3.0 * PI))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::math::quadrature::Rule;

    #[test]
    fn a_disc_is_the_integral_over_its_rings() {
        let (thick, inner, outer) = (0.002, 0.004, 0.011);
        let disc = Part::discs(2, thick, inner, outer);
        let rule = Rule::legendre(30);
        let area = |r: f64| 2.0 * PI * r * thick;
        let c1 = 2.0 * rule.integrate(inner, outer, |r| 1.0 / area(r));
        let c2 = 2.0 * rule.integrate(inner, outer, |r| area(r).powi(-2));
        assert!((disc.c1 / c1 - 1.0).abs() < 1e-12 && (disc.c2 / c2 - 1.0).abs() < 1e-12);
    }

    #[test]
    fn one_section_all_round_is_itself() {
        let parts = [Part::straight(0.03, 5e-5), Part::straight(0.05, 5e-5)];
        let geometry = path(&parts);
        assert!((geometry.length - 0.08).abs() < 1e-15 && (geometry.area - 5e-5).abs() < 1e-18);
        assert_eq!(geometry.minimum_area, 5e-5);
    }
}
