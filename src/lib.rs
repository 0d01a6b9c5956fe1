//! coilbreak.

pub mod analysis;
pub mod circuit;
pub mod cli;
pub mod dae;
pub mod diag;
pub mod elements;
pub mod limits;
pub mod magnetics;
pub mod math;
pub mod netlist;
pub mod readings;
pub mod report;
pub mod run;
pub mod signals;
pub mod sizing;
pub mod units;
