//! The integration tests, one module per theme.

mod e_series;
mod plots;
