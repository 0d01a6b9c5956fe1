//! Netlist text to a document with positions, and the typed reading of its fields.

pub mod keys;
pub mod parameters;

pub use keys::{Key, Need, Takes};
pub use parameters::{Parameter, Parameters, Value, Values};
