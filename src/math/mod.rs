//! Numbers without a meaning: matrices and their factors, and whatever else of mathematics the rooms above share.
//!
//! Linear algebra: [`Matrix`] takes values on a fixed sparsity pattern, factors them and solves; it chooses
//! between the [`dense`] and the [`sparse`] elimination. Both serve real and complex numbers.
//! Fields of circles, curves of materials, eddy currents: [`elliptic`], [`quadrature`], [`curves`], [`root`], [`bessel`].

pub mod bessel;
pub mod curves;
pub mod dense;
pub mod elliptic;
pub mod matrix;
pub mod quadrature;
pub mod root;
pub mod scalar;
pub mod singular;
pub mod sparse;

pub use matrix::{Elimination, Matrix};
pub use scalar::Scalar;
pub use singular::Singular;

#[cfg(test)]
mod tests;
