//! Sizing: from what a coil does to the standard part that tames it.

pub mod standard_values;
