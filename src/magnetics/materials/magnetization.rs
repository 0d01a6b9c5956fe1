//! What a core's material is to a magnetic path: B over H, its inverse, and the energy of magnetizing it.

use std::fmt::Debug;

/// A single-valued magnetization curve, odd, with mu0 <= dB/dH everywhere. SI units.
pub trait Magnetization: Debug + Send + Sync {
    /// Flux density B [T] at a field strength H [A/m], and dB/dH [H/m].
    fn flux_density(&self, field: f64) -> (f64, f64);

    /// Field strength H [A/m] at a flux density B [T], and dH/dB [m/H]; the inverse of `flux_density`.
    fn field(&self, flux_density: f64) -> (f64, f64);

    /// ∫ H dB from 0 to B [J/m³]: what magnetizing a cubic metre takes, not negative.
    fn energy_density(&self, flux_density: f64) -> f64;

    /// Flux densities above 0, rising, that cut the curve into stretches on which dH/dB only rises or only falls;
    /// beyond the last it only rises. Empty for a straight line.
    fn bends(&self) -> Vec<f64>;

    /// The flux density [T] up to which measured data reach, where they end.
    fn known_to(&self) -> Option<f64> {
        None
    }
}
