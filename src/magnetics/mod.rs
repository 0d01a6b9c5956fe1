//! Magnetics.

pub mod air;
pub mod materials;

/// Magnetic constant [H/m], 4e-7 π by the design's law; the measured value of SI 2019 differs by 5e-10.
pub const MU0: f64 = 4e-7 * std::f64::consts::PI;
