//! Materials of cores: how they are told in a netlist, and the curves they come out as.
//!
//! A material has no word for its kind; the key that only one kind has tells it.

pub mod curve;
pub mod linear;
pub mod losses;
pub mod magnetization;
pub mod roll_off;
mod saturation;
pub mod smooth;

#[cfg(test)]
mod laws;

pub use curve::{Table, TableFault};
pub use linear::Linear;
pub use losses::{Losses, Steinmetz};
pub use magnetization::Magnetization;
pub use roll_off::Powder;
pub use smooth::Smooth;

use super::geometry::{Fault, Remark};
use super::library::told_already;
use crate::netlist::{Fields, Key, NamedNode, Reader, Takes, Values};
use crate::units::PERMEABILITY;
use std::sync::Arc;

/// The kinds of material; the first whose `told_by` is written is meant.
pub const MATERIALS: &[MaterialKind] = &[curve::KIND, smooth::KIND, roll_off::KIND, linear::KIND];

const INITIAL_PERMEABILITY: Key = Key::optional(
    "initial_permeability",
    Takes::Quantity(PERMEABILITY),
    "relative permeability at zero field",
);

/// One way of telling a material.
pub struct MaterialKind {
    /// What it is called in the reference.
    pub word: &'static str,
    /// What it is, in a phrase.
    pub about: &'static str,
    /// The key that tells it.
    pub told_by: &'static str,
    /// Its keys.
    pub keys: &'static [Key],
    /// Reads the keys; what is wrong is reported.
    pub read: fn(&Fields<'_>) -> Option<Box<dyn Material>>,
}

/// A material as written: handles of its numbers.
pub trait Material: std::fmt::Debug + Send + Sync {
    /// The curve with the values in force at a `temperature` [K].
    fn derive(&self, values: &Values, temperature: f64) -> Result<Magnetized, Fault>;
}

/// A material with numbers.
#[derive(Clone, Debug)]
pub struct Magnetized {
    /// Its curve.
    pub curve: Arc<dyn Magnetization>,
    /// What somebody should know.
    pub remarks: Vec<Remark>,
}

/// What fills a core: a magnetization, and what the material loses.
#[derive(Debug)]
pub struct Filling {
    /// B over H.
    pub magnetization: Box<dyn Material>,
    /// Losses as written.
    pub losses: losses::Written,
}

/// Reads one entry of `materials`.
pub fn read<'a>(entry: &NamedNode<'a>, reader: &'a Reader<'a>) -> Option<Arc<Filling>> {
    // The table with all of the common keys goes first: a message names its keys as examples.
    let mut fields = Fields::new(entry.node, entry.path.clone(), smooth::KIND.keys, reader);
    for kind in MATERIALS {
        fields = fields.also(kind.keys);
    }
    fields = fields.also(losses::KEYS);
    fields.finish();
    let losses = losses::Written::read(&fields);
    let told: Vec<&MaterialKind> = MATERIALS
        .iter()
        .filter(|kind| fields.has(kind.told_by))
        .collect();
    let Some(kind) = told.first() else {
        untold(&fields);
        return None;
    };
    if let Some(stray) = strays(&fields, kind) {
        let headline = format!(
            "{} is told by `{}`, which leaves no room for `{stray}`",
            entry.path, kind.told_by
        );
        fields.error(
            stray,
            "conflicting-keys",
            headline,
            format!("not with `{}`", kind.told_by),
            None,
        );
        return None;
    }
    let magnetization = (kind.read)(&fields)?;
    Some(Arc::new(Filling {
        magnetization,
        losses: losses?,
    }))
}

/// A written key that belongs to another kind of material.
fn strays(fields: &Fields<'_>, kind: &MaterialKind) -> Option<&'static str> {
    let all = MATERIALS.iter().flat_map(|other| other.keys);
    let own = |key: &Key| kind.keys.iter().any(|mine| mine.name == key.name);
    all.filter(|key| fields.has(key.name) && !own(key))
        .map(|key| key.name)
        .next()
}

fn untold(fields: &Fields<'_>) {
    let mut all: Vec<&[Key]> = MATERIALS.iter().map(|kind| kind.keys).collect();
    all.push(losses::KEYS);
    if told_already(fields, &all) {
        return;
    }
    let ways: Vec<&str> = MATERIALS.iter().map(|kind| kind.told_by).collect();
    let headline = format!("{} needs one of {}", fields.path(), ways.join(", "));
    let diagnostic = crate::diag::Diagnostic::error("missing-key", headline)
        .at(fields.head(), "no magnetization told");
    fields
        .reader()
        .sink
        .report(diagnostic.help("{initial_permeability: 2300, saturation: 0.45 T}"));
}
