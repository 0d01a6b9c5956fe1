//! Core shapes: from drawing dimensions to a magnetic path, a mean turn and a winding window.

mod effective;
mod solenoid;
mod toroid;

use super::geometry::{Fault, Geometry};
use super::winding::WindingPlan;
use crate::netlist::{Fields, Key, Values};

/// The shapes, in the order in which they are listed.
pub const SHAPES: &[ShapeKind] = &[effective::KIND, toroid::KIND, solenoid::KIND];

/// The shapes' words.
pub const WORDS: [&str; SHAPES.len()] = {
    let mut words = [""; SHAPES.len()];
    let mut k = 0;
    while k < words.len() {
        words[k] = SHAPES[k].word;
        k += 1;
    }
    words
};

/// One shape: its word, its keys and how it is read.
pub struct ShapeKind {
    /// The word as written behind `shape`.
    pub word: &'static str,
    /// What it is, in a phrase.
    pub about: &'static str,
    /// Tables of its keys.
    pub keys: &'static [&'static [Key]],
    /// Whether a material can fill it.
    pub takes_material: bool,
    /// Reads the keys; what is wrong is reported.
    pub read: fn(&Fields<'_>) -> Option<Box<dyn Shape>>,
}

/// A shape as written: handles of its numbers.
pub trait Shape: std::fmt::Debug + Send + Sync {
    /// The geometry with the values in force; `winding` where the coil on it is known.
    fn derive(&self, values: &Values, winding: Option<&WindingPlan>) -> Result<Geometry, Fault>;
}

/// Reports where `larger` may not exceed `smaller` over the whole of both spreads.
fn ordered(fields: &Fields<'_>, smaller: &str, larger: &str) -> Option<()> {
    let (low, high) = (fields.amount(smaller)?, fields.amount(larger)?);
    if low.high < high.low {
        return Some(());
    }
    let headline = format!("{smaller} must be smaller than {larger}");
    let spread = low.nominal < high.nominal;
    let label = if spread {
        "not with the spreads of both"
    } else {
        "not smaller"
    };
    fields.error(smaller, "out-of-range", headline, label, None);
    None
}
