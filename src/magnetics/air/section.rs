//! A thick coil: current spread evenly over a rectangular section.
//!
//! L/N² = 1/(b² c²) ∫∫∫∫ M(r, r', z - z') dr dr' dz dz' over the section (b axial, c radial), the limit of the sum over
//! coaxial filaments (Maxwell's M). With z = |axial distance|, δ = |r - r'| and m = (r + r')/2 it is
//! 4/(b² c²) ∫₀ᵇ (b - z) ∫₀ᶜ ∫ M dm dδ dz. M grows as -ln √(δ² + z²) towards δ = z = 0 and is smooth elsewhere:
//!
//! ```text
//!  z b +-------+      the corner square is cut along its diagonal, both triangles drawn out to squares
//!      | panel |      (distance ρ, ratio t) with ρ = s v³, which turns ρ ln ρ into v⁵ ln v; the rest of the
//!      +-------+      longer side is cut into panels, each as long as its distance from the corner, on which
//!      | panel |      Gauss-Legendre converges by a factor of about 30 per point
//!    s +---+---+
//!      |  /|
//!      | / |
//!      +---+- δ
//! ```

use super::loops::mutual_about;
use crate::math::quadrature::Rule;

/// A rectangular winding section [m].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Section {
    /// Inner radius, 0 or more.
    pub inner: f64,
    /// Outer radius, above the inner one.
    pub outer: f64,
    /// Axial length, above 0.
    pub length: f64,
}

/// Inductance per turn squared [H]. Relative error below 1e-10 for length/depth from 1e-6 to 1e6 and depth/outer radius from 1e-6.
pub fn permeance(section: Section) -> f64 {
    let integral = Integral::new(section);
    let (b, c) = (section.length, section.outer - section.inner);
    4.0 * (integral.corner(b.min(c)) + integral.panels(b.min(c))) / (b * b * c * c)
}

struct Integral {
    section: Section,
    depth: f64,
    corner: Rule,
    across: Rule,
    mean: Rule,
}

impl Integral {
    fn new(section: Section) -> Self {
        Integral {
            section,
            depth: section.outer - section.inner,
            corner: Rule::legendre(16),
            across: Rule::legendre(12),
            mean: Rule::legendre(12),
        }
    }

    /// The square of side `s` at the corner, as two triangles.
    fn corner(&self, s: f64) -> f64 {
        let mut sum = 0.0;
        for (v, weight) in self.corner.over(0.0, 1.0) {
            let rho = s * v * v * v;
            let stretch = weight * 3.0 * s * v * v * rho;
            for (t, share) in self.across.over(0.0, 1.0) {
                sum += stretch * share * (self.line(rho, rho * t) + self.line(rho * t, rho));
            }
        }
        sum
    }

    /// What is left of the longer side beyond the square.
    fn panels(&self, s: f64) -> f64 {
        let (b, c) = (self.section.length, self.depth);
        let mut sum = 0.0;
        let mut from = s;
        while from < b.max(c) {
            let to = if 2.5 * from > b.max(c) {
                b.max(c)
            } else {
                2.0 * from
            };
            for (far, weight) in self.across.over(from, to) {
                for (near, share) in self.across.over(0.0, s) {
                    let (delta, z) = if b > c { (near, far) } else { (far, near) };
                    sum += weight * share * self.line(delta, z);
                }
            }
            from = to;
        }
        sum
    }

    /// (b - z) ∫ M dm over all pairs of radii `delta` apart.
    ///
    /// Towards the axis M behaves as m ln m, so a coil that nearly reaches the axis is cut by halves there.
    fn line(&self, delta: f64, z: f64) -> f64 {
        // Counted from the innermost mean radius, so that a thin section keeps its depth.
        let low = self.section.inner + 0.5 * delta;
        let mut high = self.depth - delta;
        let end = low.max(2e-3 * self.section.outer);
        let mut sum = 0.0;
        while high > 0.0 {
            let halve = low + high > 3.0 * end;
            let from = if halve { 0.5 * (high - low) } else { 0.0 };
            sum += self
                .mean
                .integrate(from, high, |m| mutual_about(low + m, delta, z));
            high = from;
        }
        (self.section.length - z) * sum
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::MU0;
    use crate::magnetics::air::sheet;

    #[test]
    fn a_thin_winding_comes_to_the_current_sheet() {
        // The difference is of first order in the depth over the length: halving the depth halves it.
        for length in [0.002, 0.02, 0.2] {
            let at = |depth: f64| {
                let section = Section {
                    inner: 0.01 - depth / 2.0,
                    outer: 0.01 + depth / 2.0,
                    length,
                };
                permeance(section) / sheet::permeance(0.02, length) - 1.0
            };
            let (one, half) = (at(2e-5), at(1e-5));
            assert!(one.abs() < 2e-5 / length.min(0.01), "{length}: {one}");
            assert!((one / half - 2.0).abs() < 0.05, "{length}: {one} {half}");
        }
    }

    #[test]
    fn more_points_change_nothing() {
        let extremes = [
            (0.0, 0.01, 0.01),
            (0.0, 0.01, 1e-4),
            (0.0, 0.01, 1.0),
            (1e-4, 0.02, 0.01),
            (0.01, 0.0101, 1.0),
            (0.01, 0.03, 2e-6),
            (0.1, 0.1001, 0.0001),
            (0.01, 0.02, 0.013),
            (0.01, 0.010001, 0.01),
            (0.01, 0.01000001, 0.01),
            (0.01, 0.01000001, 1e-8),
            (0.0, 0.01, 1e-8),
            (0.01, 0.012, 2e3),
        ];
        for (inner, outer, length) in extremes {
            let section = Section {
                inner,
                outer,
                length,
            };
            let fine = Integral {
                corner: Rule::legendre(40),
                across: Rule::legendre(24),
                mean: Rule::legendre(24),
                ..Integral::new(section)
            };
            let (b, c) = (length, outer - inner);
            let better = 4.0 * (fine.corner(b.min(c)) + fine.panels(b.min(c))) / (b * b * c * c);
            let deviation = permeance(section) / better - 1.0;
            assert!(deviation.abs() < 1e-10, "{section:?}: {deviation:e}");
        }
    }

    #[test]
    fn inductance_scales_with_size() {
        let one = permeance(Section {
            inner: 0.01,
            outer: 0.02,
            length: 0.01,
        });
        let three = permeance(Section {
            inner: 0.03,
            outer: 0.06,
            length: 0.03,
        });
        assert!((three / one - 3.0).abs() < 1e-12 && one > MU0 * 0.01);
    }
}
