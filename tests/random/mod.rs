//! Random circuits: made from a seed, written as netlists, read and run by the tool, and judged.

pub mod circuit;
mod cores;
pub mod dice;
pub mod judge;
mod wound;
