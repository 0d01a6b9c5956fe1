//! coilbreak.

pub mod dae;
pub mod diag;
pub mod limits;
pub mod magnetics;
pub mod math;
pub mod netlist;
pub mod readings;
pub mod report;
pub mod signals;
pub mod sizing;
pub mod units;
