//! `take: highest`: the highest value and its first instant. At a jump both values count.

use super::extreme::Extreme;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "highest",
    needs: Needs::Window,
    about: "the highest value and its first instant",
    result: kinds::own,
    make: |_| Box::new(Extreme::new(|v| v)),
};
