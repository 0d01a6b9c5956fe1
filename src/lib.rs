//! coilbreak.

pub mod dae;
