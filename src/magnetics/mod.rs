//! Magnetics: from a core's geometry, its material and a winding to flux linkage over current. Plain numbers:
//! no time and no unknowns of a circuit.
//!
//! ```text
//!  cores: shape ──► Geometry ─┐
//!  materials: curve ──────────┼─► Path: magnetomotive force over flux ──► Linkage: current over flux linkage
//!  wire ──► Wire ──► Winding ─┘   (shared by windings)                    (one winding)
//! ```
//!
//! A new shape is a file in `shapes/` and a line in [`shapes::SHAPES`]; likewise [`materials::MATERIALS`] and
//! [`fringing::RULES`].

pub mod air;
pub mod core;
pub mod eddy;
pub mod fringing;
pub mod gaps;
pub mod geometry;
pub mod leakage;
pub mod library;
pub mod linkage;
pub mod losses;
pub mod materials;
pub mod moving;
pub mod network;
pub mod open_core;
pub mod path;
pub mod shapes;
pub mod winding;
pub mod wire;

pub use core::{Core, Wound};
pub use eddy::Shells;
pub use geometry::{Fault, Geometry, Remark};
pub use library::{KEYS, Library};
pub use linkage::{CurvePoint, Linkage};
pub use materials::{Losses, Steinmetz};
pub use moving::MovingGap;
pub use network::{Network, Seen};
pub use path::Path;
pub use winding::WindingPlan;
pub use wire::{WIRE_KEYS, Wire, WireSpec};

/// Magnetic constant [H/m], 4e-7 π by the design's law; the measured value of SI 2019 differs by 5e-10.
pub const MU0: f64 = 4e-7 * std::f64::consts::PI;

#[cfg(test)]
mod tests;
