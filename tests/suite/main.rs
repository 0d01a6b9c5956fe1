//! The integration tests, one module per theme.

mod closed_forms;
mod e_series;
mod netlists;
mod peers;
mod plots;
mod record;
