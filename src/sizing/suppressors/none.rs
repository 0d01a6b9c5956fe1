//! No suppressor: what the switch has to stand as it is.

use super::Suppressor;

/// Nothing.
pub const NONE: Suppressor = Suppressor {
    word: "none",
    family: "none",
    about: "no suppressor",
    place: "",
    elements: &[],
    choices: |_, _| Vec::new(),
    wire: |_, _| {},
};
