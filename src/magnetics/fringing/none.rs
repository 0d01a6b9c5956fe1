//! No fringing: the field crosses the gap straight.

use super::Rule;

/// `fringing: none`.
pub const RULE: Rule = Rule {
    word: "none",
    about: "the field crosses the gap straight",
    source: "definition",
    needs_section: false,
    needs_height: false,
    factor: |_| Some(1.0),
};
