//! `take: value_at`: the value at an instant, `at: 5 ms` or `at: k1_driver opens`; where the signal jumps there,
//! the value before it, as an edge begins at its instant with the old value.

use super::final_value::Final;
use super::{Needs, ReadingKind, kinds};

/// The kind.
pub const KIND: ReadingKind = ReadingKind {
    word: "value_at",
    needs: Needs::Instant,
    about: "the value at an instant",
    result: kinds::own,
    // Its window is that one instant.
    make: |_| Box::new(Final::default()),
};
