//! Studies: one netlist at many values.

pub mod corners;
mod spreads;
pub mod workers;

pub use corners::{Corner, Side, Tried, Worst, worst};
pub use spreads::{Spread, in_words, spreads};
