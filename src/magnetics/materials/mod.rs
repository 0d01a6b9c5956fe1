//! Materials of cores.

pub mod linear;
pub mod magnetization;
pub mod smooth;
pub mod table;

#[cfg(test)]
mod laws;

pub use linear::Linear;
pub use magnetization::Magnetization;
pub use smooth::Smooth;
pub use table::{Table, TableFault};
