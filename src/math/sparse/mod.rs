//! Sparse LU factors of a matrix compressed by column.
//!
//! `order` chooses pivots that keep the fill small and are large enough; `structure` is what they leave; `lu` refills
//! it with numbers for as long as the same pivots serve.

mod buckets;
mod lists;
mod lu;
mod order;
mod structure;

pub use lu::SparseLu;
