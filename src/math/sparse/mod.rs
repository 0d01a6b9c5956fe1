//! Sparse LU factors of a matrix compressed by column, for circuits too large for the dense elimination.
//!
//! `order` chooses pivots that keep the fill small and are large enough; `lu` keeps the resulting structure and
//! refills the numbers for as long as the same pivots serve.

mod lu;
mod order;

pub use lu::SparseLu;
