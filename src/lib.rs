//! coilbreak.

pub mod dae;
pub mod report;
pub mod sizing;
