//! Zener diode: a diode whose breakdown is its purpose, so its voltage and slope resistance must be written.

use super::diode::{keys, read_diode};
use super::kind::ElementKind;
use crate::netlist::Key;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "zener",
    about: "A diode used in breakdown: the breakdown voltage holds at the breakdown current, above it the slope resistance.",
    keys: &KEYS,
    read: |fields, around| read_diode(fields, around, true),
};

/// The keys.
pub const KEYS: [Key; 14] = keys(true);
