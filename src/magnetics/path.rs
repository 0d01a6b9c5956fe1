//! A magnetic path: magnetomotive force over flux. Windings and legs share it.
//!
//! F = H(B) iron + (B/mu0) air with B = flux/area: the design's law of `effective`.

use super::MU0;
use super::geometry::Geometry;
use super::materials::Magnetization;
use crate::math::root;
use std::sync::Arc;

/// Material and air in series, of one section. SI units.
#[derive(Clone, Debug)]
pub struct Path {
    area: f64,
    minimum_area: f64,
    section: f64,
    iron: f64,
    /// Reluctivity of air times the length of air: magnetomotive force per tesla [A/T].
    air: f64,
    material: Arc<dyn Magnetization>,
}

impl Path {
    /// The path of a geometry filled with a material.
    pub fn new(geometry: &Geometry, material: Arc<dyn Magnetization>) -> Self {
        Path {
            area: geometry.area,
            minimum_area: geometry.minimum_area,
            section: geometry.section,
            iron: geometry.iron,
            air: geometry.air / MU0,
            material,
        }
    }

    /// The path without a `permeance` [H] that is counted elsewhere; None where it has no more than that. For paths
    /// that are all air.
    pub fn less(&self, permeance: f64) -> Option<Self> {
        let left = self.area / self.air - permeance;
        (self.iron == 0.0 && left > 0.0).then(|| Path {
            air: self.area / left,
            ..self.clone()
        })
    }

    /// The path without its air.
    pub fn without_air(&self) -> Self {
        Path {
            air: 0.0,
            ..self.clone()
        }
    }

    /// The path with a gap of its own section and this length [m] more, without fringing.
    pub fn with_gap(&self, gap: f64) -> Self {
        Path {
            air: self.air + gap / MU0,
            ..self.clone()
        }
    }

    /// Effective area [m²].
    pub fn area(&self) -> f64 {
        self.area
    }

    /// Section of the material itself [m²]: that of the path, but for open cores.
    pub fn section(&self) -> f64 {
        self.section
    }

    /// Magnetomotive force [A] at a `flux` [Wb], and its slope [1/H].
    #[inline]
    pub fn magnetomotive(&self, flux: f64) -> (f64, f64) {
        let b = flux / self.area;
        let (h, slope) = self.material.field(b);
        (
            h * self.iron + b * self.air,
            (slope * self.iron + self.air) / self.area,
        )
    }

    /// Length of the material [m].
    pub fn iron(&self) -> f64 {
        self.iron
    }

    /// Magnetomotive force of the air per flux [1/H].
    pub fn reluctance_of_air(&self) -> f64 {
        self.air / self.area
    }

    /// Field strength [A/m] at a flux density [T] of the material, and its slope [m/H].
    #[inline]
    pub fn iron_field(&self, flux_density: f64) -> (f64, f64) {
        self.material.field(flux_density)
    }

    /// Energy [J/m³] that magnetizes the material to a flux density [T].
    pub fn iron_energy_density(&self, flux_density: f64) -> f64 {
        self.material.energy_density(flux_density)
    }

    /// Flux densities [T] of the material that cut its curve; see [`Magnetization::bends`].
    pub fn bends(&self) -> Vec<f64> {
        self.material.bends()
    }

    /// Flux [Wb] at a magnetomotive force [A]: the inverse of `magnetomotive`, to the last digits.
    pub fn flux(&self, magnetomotive: f64) -> f64 {
        let force = magnetomotive.abs();
        if force == 0.0 {
            return 0.0;
        }
        // The straight line through the origin with the slope of air alone bounds the flux from below; the
        // chord of the steepest material is not known, so the upper end is found by doubling.
        let low = force * self.area / (self.iron / MU0 + self.air);
        let excess = |flux: f64| self.magnetomotive(flux).0 - force;
        let Some(high) = root::above(excess, 2.0 * low) else {
            return f64::NAN;
        };
        let first = force / self.magnetomotive(0.0).1;
        let slope = |flux: f64| (excess(flux), self.magnetomotive(flux).1);
        root::increasing(slope, 0.5 * low, high, first).copysign(magnetomotive)
    }

    /// Energy [J] that brings the path to a `flux` [Wb].
    pub fn energy(&self, flux: f64) -> f64 {
        let b = flux / self.area;
        self.area * (self.iron * self.material.energy_density(b) + 0.5 * self.air * b * b)
    }

    /// Flux density over the effective area [T].
    pub fn flux_density(&self, flux: f64) -> f64 {
        flux / self.area
    }

    /// Flux density in the smallest section [T].
    pub fn peak_flux_density(&self, flux: f64) -> f64 {
        flux / self.minimum_area
    }

    /// Field strength in the material [A/m]; in air where the path is all air.
    pub fn field_strength(&self, flux: f64) -> f64 {
        let b = flux / self.area;
        if self.iron > 0.0 {
            self.material.field(b).0
        } else {
            b / MU0
        }
    }

    /// The flux density [T] up to which the material's data reach, where they end.
    pub fn known_to(&self) -> Option<f64> {
        self.material.known_to().filter(|_| self.iron > 0.0)
    }

    /// The flux [Wb] beyond the inductance's peak at which the slope of the magnetomotive force has risen to
    /// 1/`share` of that at zero; None where it never does (a straight path, or a gap that holds the most of it).
    pub fn flux_at_inductance_share(&self, share: f64) -> Option<f64> {
        let bends = self.material.bends();
        let slope = |b: f64| self.magnetomotive(b * self.area).1;
        let goal = slope(0.0) / share;
        // Far out every material is as air.
        let ceiling = (self.iron / MU0 + self.air) / self.area;
        if self.iron == 0.0 || bends.is_empty() || goal >= ceiling {
            return None;
        }
        // The peak is at zero or at a bend; from there on, the first stretch that ends above the goal holds the point.
        let mut places = vec![0.0];
        places.extend(&bends);
        let peak =
            (0..places.len()).min_by(|&j, &k| slope(places[j]).total_cmp(&slope(places[k])))?;
        let excess = |b: f64| slope(b) - goal;
        for pair in places[peak..].windows(2) {
            if excess(pair[1]) > 0.0 {
                return Some(self.area * root::halving(excess, pair[0], pair[1]));
            }
        }
        let last = *places.last()?;
        let high = root::above(excess, 2.0 * last)?;
        Some(self.area * root::halving(excess, last, high))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::materials::{Linear, Smooth, Table};

    fn paths() -> Vec<Path> {
        let ring = Geometry::closed(0.1, 5e-5);
        let gapped = Geometry::closed(0.06, 5e-5).with_gap(0.15e-3, None);
        let air = Geometry::in_air(0.02, 1e-4, 3e-8);
        let steel = Table::new(
            &[20.0, 60.0, 200.0, 1000.0, 5000.0],
            &[0.05, 0.9, 1.3, 1.5, 1.7],
        )
        .unwrap();
        vec![
            Path::new(&ring, Arc::new(Smooth::new(3000.0, 0.45))),
            Path::new(&gapped, Arc::new(Smooth::new(3000.0, 1.5))),
            Path::new(&gapped, Arc::new(steel)),
            Path::new(&ring, Arc::new(Linear::relative(125.0))),
            Path::new(&air, Arc::new(Linear::AIR)),
        ]
    }

    #[test]
    fn flux_undoes_the_magnetomotive_force() {
        for path in paths() {
            for exponent in -9..5 {
                let flux = 2e-5 * 10f64.powi(exponent);
                let (force, slope) = path.magnetomotive(flux);
                let back = path.flux(force);
                let rounding = 4e-16 * (1.0 + force / (flux * slope));
                assert!(
                    (back / flux - 1.0).abs() < rounding,
                    "{path:?} at {flux}: {back}"
                );
                assert_eq!(path.flux(-force), -back);
            }
            assert_eq!(path.flux(0.0), 0.0);
        }
    }

    #[test]
    fn energy_is_the_integral_of_the_magnetomotive_force() {
        let rule = crate::math::quadrature::Rule::legendre(8);
        for path in paths() {
            for step in 1..40 {
                let (from, to) = (2.5e-6 * f64::from(step), 2.5e-6 * f64::from(step + 1));
                let sum: f64 = (0..64)
                    .map(|k| (to - from) / 64.0 * f64::from(k) + from)
                    .map(|low| {
                        rule.integrate(low, low + (to - from) / 64.0, |flux| {
                            path.magnetomotive(flux).0
                        })
                    })
                    .sum();
                let gained = path.energy(to) - path.energy(from);
                assert!(
                    (gained / sum - 1.0).abs() < 1e-7,
                    "{path:?} at {to}: {gained} {sum}"
                );
            }
        }
    }

    #[test]
    fn the_slope_reaches_its_goal_beyond_the_peak() {
        let mut straight = 0;
        for path in paths() {
            let Some(flux) = path.flux_at_inductance_share(0.7) else {
                straight += 1;
                continue;
            };
            let start = path.magnetomotive(0.0).1;
            assert!((path.magnetomotive(flux).1 * 0.7 / start - 1.0).abs() < 1e-12);
            // Beyond it the inductance stays below, however far the flux goes.
            for k in 1..100 {
                let further = flux * (1.0 + 0.05 * f64::from(k));
                assert!(path.magnetomotive(further).1 * 0.7 > start);
            }
        }
        assert_eq!(
            straight, 2,
            "the linear ring and the air coil have no such point"
        );
    }

    #[test]
    fn a_gap_that_holds_nearly_everything_never_loses_its_inductance() {
        let wide = Geometry::closed(0.01, 1e-4).with_gap(0.05, None);
        let path = Path::new(&wide, Arc::new(Smooth::new(2000.0, 0.4)));
        assert_eq!(path.flux_at_inductance_share(0.7), None);
    }
}
