//! Core shapes: from drawing dimensions to a magnetic path, a mean turn and a winding window.

mod e_pair;
mod effective;
mod pot;
mod rod;
mod sections;
mod solenoid;
mod toroid;
mod u_pair;
mod yoke;

use super::geometry::{Fault, Geometry};
use super::winding::WindingPlan;
use crate::netlist::{Fields, Key, Values};

/// The shapes, in the order in which they are listed.
pub const SHAPES: &[ShapeKind] = &[
    effective::KIND,
    toroid::KIND,
    e_pair::KIND,
    u_pair::KIND,
    pot::KIND,
    yoke::KIND,
    rod::KIND,
    solenoid::KIND,
];

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
    /// The geometry with the values in force.
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault>;
}

/// What a shape may ask for besides its dimensions.
#[derive(Clone, Copy, Debug)]
pub struct Around<'a> {
    /// The coil on it, where it is known.
    pub winding: Option<&'a WindingPlan>,
    /// Relative permeability of the material at zero field, 1 or more.
    pub permeability: f64,
}

/// Share of a window that round wire on a bobbin fills: walls, insulation and lay take the rest. Common practice.
const BOBBIN_FILL: f64 = 0.7;

/// Refuses dimensions of which one comes out as nothing; reading has refused them already, a study may set them.
fn above_zero(lengths: &[f64]) -> Result<(), Fault> {
    if lengths.iter().all(|&length| length > 0.0) {
        return Ok(());
    }
    Err(no_iron())
}

/// Refuses open cores and coils out of all proportion, for which the numbers would fail.
fn slender(core: f64, coil: f64) -> Result<(), Fault> {
    let sane = |ratio: f64| (1e-3..=1e4).contains(&ratio);
    if sane(core) && sane(coil) {
        return Ok(());
    }
    Err(no_iron())
}

fn no_iron() -> Fault {
    Fault {
        word: "out-of-range",
        key: "shape",
        text: "these dimensions leave no iron or no window".into(),
        help: "check the dimensions against each other",
    }
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
