//! What a coil's element needs: the current over the flux linkage of one winding on a path, and its inverse.

use super::path::Path;

/// One winding of `turns` on a path. SI units; odd in its argument.
#[derive(Clone, Debug)]
pub struct Linkage {
    path: Path,
    turns: f64,
}

/// A point of the table over current.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CurvePoint {
    /// Current [A].
    pub current: f64,
    /// Flux linkage [Wb].
    pub flux_linkage: f64,
    /// Incremental inductance [H].
    pub inductance: f64,
    /// Flux density over the effective area [T].
    pub flux_density: f64,
}

impl Linkage {
    /// A winding of `turns` (above 0) on a path.
    pub fn new(path: Path, turns: f64) -> Self {
        Linkage { path, turns }
    }

    /// The path, for windings that share it.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Number of turns.
    pub fn turns(&self) -> f64 {
        self.turns
    }

    /// Winding current [A] and its slope [1/H] at a flux `linkage` [Wb].
    #[inline]
    pub fn current(&self, linkage: f64) -> (f64, f64) {
        let (force, slope) = self.path.magnetomotive(linkage / self.turns);
        (force / self.turns, slope / (self.turns * self.turns))
    }

    /// Magnetomotive force [A] and its slope [1/H] at a `flux` [Wb] of the path.
    #[inline]
    pub fn magnetomotive(&self, flux: f64) -> (f64, f64) {
        self.path.magnetomotive(flux)
    }

    /// Flux linkage [Wb] at a winding `current` [A]: the inverse of `current`, by iteration.
    pub fn linkage_at(&self, current: f64) -> f64 {
        self.turns * self.path.flux(self.turns * current)
    }

    /// Energy [J] of the field at a flux `linkage` [Wb].
    pub fn energy(&self, linkage: f64) -> f64 {
        self.path.energy(linkage / self.turns)
    }

    /// Flux density over the effective area [T].
    pub fn flux_density(&self, linkage: f64) -> f64 {
        self.path.flux_density(linkage / self.turns)
    }

    /// Flux density in the smallest section [T].
    pub fn peak_flux_density(&self, linkage: f64) -> f64 {
        self.path.peak_flux_density(linkage / self.turns)
    }

    /// Field strength in the core's material [A/m].
    pub fn field_strength(&self, linkage: f64) -> f64 {
        self.path.field_strength(linkage / self.turns)
    }

    /// Incremental inductance [H] at a flux `linkage` [Wb].
    pub fn inductance(&self, linkage: f64) -> f64 {
        1.0 / self.current(linkage).1
    }

    /// Incremental inductance [H] at zero.
    pub fn inductance_at_zero(&self) -> f64 {
        self.inductance(0.0)
    }

    /// 1 less incremental over initial inductance; negative where a material is softest above zero.
    pub fn saturation(&self, linkage: f64) -> f64 {
        1.0 - self.inductance(linkage) / self.inductance_at_zero()
    }

    /// The current [A], above the inductance's peak, at which the incremental inductance, together with a constant one
    /// `beside` it [H], has fallen to 70 % of that at zero; None where it never does.
    pub fn current_at_70_percent(&self, beside: f64) -> Option<f64> {
        // l + beside = 0.7 (l(0) + beside)
        let share = 0.7 - 0.3 * beside / self.inductance_at_zero();
        let flux = (share > 0.0).then(|| self.path.flux_at_inductance_share(share))??;
        Some(self.path.magnetomotive(flux).0 / self.turns)
    }

    /// Points at evenly spaced currents from 0 to `up_to` [A], both included (2 points at least).
    pub fn curve(&self, up_to: f64, points: usize) -> Vec<CurvePoint> {
        let last = points.max(2) - 1;
        (0..=last)
            .map(|k| self.point(up_to * k as f64 / last as f64))
            .collect()
    }

    /// The point of the curve at a winding `current` [A].
    pub fn point(&self, current: f64) -> CurvePoint {
        let flux_linkage = self.linkage_at(current);
        CurvePoint {
            current,
            flux_linkage,
            inductance: self.inductance(flux_linkage),
            flux_density: self.flux_density(flux_linkage),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::MU0;
    use crate::magnetics::geometry::Geometry;
    use crate::magnetics::materials::Smooth;
    use std::sync::Arc;

    fn relay() -> Linkage {
        // The design's example: 60 mm of iron, 50 mm², 0.15 mm gap, mu_i 3000, 1.5 T, 4000 turns.
        let geometry = Geometry::closed(0.06, 5e-5).with_gap(0.15e-3, None);
        Linkage::new(
            Path::new(&geometry, Arc::new(Smooth::new(3000.0, 1.5))),
            4000.0,
        )
    }

    #[test]
    fn the_initial_inductance_is_that_of_the_reluctances() {
        let expected = 4000f64.powi(2) * MU0 * 5e-5 / (0.06 / 3000.0 + 0.15e-3);
        assert!((relay().inductance_at_zero() / expected - 1.0).abs() < 1e-14);
    }

    #[test]
    fn the_law_of_the_path_holds_at_every_current() {
        let relay = relay();
        for point in relay.curve(0.5, 50) {
            let h = relay.field_strength(point.flux_linkage);
            let force = h * 0.06 + point.flux_density / MU0 * 0.15e-3;
            assert!((force - 4000.0 * point.current).abs() < 1e-12 * force.max(1e-3));
            let b = MU0 * h + 1.5 * h / (h + 1.5 / (MU0 * 2999.0));
            assert!((b - point.flux_density).abs() < 1e-14);
        }
    }

    #[test]
    fn seventy_per_cent_are_left_at_the_current_told() {
        let relay = relay();
        for beside in [0.0, 0.3 * relay.inductance_at_zero()] {
            let current = relay.current_at_70_percent(beside).unwrap();
            let left = relay.point(current).inductance + beside;
            let whole = relay.inductance_at_zero() + beside;
            assert!((left / whole - 0.7).abs() < 1e-12);
        }
        let far = 3.0 * relay.inductance_at_zero();
        assert_eq!(relay.current_at_70_percent(far), None);
        let current = relay.current_at_70_percent(0.0).unwrap();
        assert!((relay.saturation(relay.linkage_at(current)) - 0.3).abs() < 1e-12);
    }

    #[test]
    fn co_energy_and_energy_make_up_the_product() {
        // W + ∫ λ di = λ i, the integral by the trapezoidal rule over 4000 points.
        let relay = relay();
        let curve = relay.curve(0.2, 4001);
        let co_energy: f64 = curve
            .windows(2)
            .map(|pair| {
                0.5 * (pair[0].flux_linkage + pair[1].flux_linkage)
                    * (pair[1].current - pair[0].current)
            })
            .sum();
        let last = curve[4000];
        let product = last.flux_linkage * last.current;
        assert!((relay.energy(last.flux_linkage) + co_energy - product).abs() < 1e-7 * product);
    }
}
