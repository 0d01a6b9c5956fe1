//! The failure that every elimination knows.

/// A matrix without a usable pivot (or with a value that is not finite).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Singular {
    /// Column at which elimination ended: the unknown that the equations do not determine.
    pub column: usize,
}
