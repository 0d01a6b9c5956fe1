//! Quantities: dimensions, the kinds of quantity a netlist knows, reading them from text and printing them.
//!
//! Text comes in (`4.7 kΩ ± 10 %`), SI numbers go out (`Amount`); `engineering` is the way back.

mod amount;
mod dimension;
mod engineering;
mod error;
mod kind;
mod newtypes;
mod number;
mod odd_number;
mod spread;
mod symbols;
mod unit;

#[cfg(test)]
mod tests;

pub use amount::{Amount, parse_amount};
pub use dimension::Dimension;
pub use engineering::{Unit, engineering, prefix_of, takes_prefix};
pub use error::UnitError;
pub use kind::*;
pub use newtypes::{Metres, SquareMetres};
