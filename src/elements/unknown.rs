//! The number of an unknown, which is the number of its row too.

/// An unknown of the equations and the row of the same number. Ground is `Unknown::GROUND`, always 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Unknown(pub u32);

impl Unknown {
    /// The reference node: reads as zero, and what is stamped to it is dropped.
    pub const GROUND: Unknown = Unknown(u32::MAX);

    /// Value of this unknown in `x`; zero for ground.
    #[inline]
    pub fn of(self, x: &[f64]) -> f64 {
        x.get(self.0 as usize).copied().unwrap_or(0.0)
    }
}
