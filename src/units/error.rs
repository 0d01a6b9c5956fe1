//! What is wrong with a written quantity, with a byte range inside its text.

use std::fmt;
use std::ops::Range;

/// A refused quantity. Whoever knows its key and its place in a file makes a diagnostic of it.
#[derive(Clone, Debug, PartialEq)]
pub struct UnitError {
    /// The message's word: `wrong-dimension`, `missing-unit`, `unknown-unit`, `bad-number`, `bad-spread`.
    pub word: &'static str,
    /// Bytes of the text that are at fault.
    pub range: Range<usize>,
    /// Name of the quantity, used where no key is known: `resistance`.
    pub noun: &'static str,
    /// What is wrong, as the rest of a sentence about the key: `takes Ω, got 47 nF, a capacitance`.
    pub problem: String,
    /// What to write at the place.
    pub label: String,
    /// What would be right, ready to type; empty where nobody can know.
    pub help: Option<String>,
}

impl UnitError {
    /// The whole sentence about `subject`: `resistance takes Ω, got 47 nF, a capacitance`.
    pub fn headline(&self, subject: &str) -> String {
        format!("{subject} {}", self.problem)
    }
}

impl fmt::Display for UnitError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.headline(self.noun))
    }
}

impl std::error::Error for UnitError {}
