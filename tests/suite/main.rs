//! The integration tests, one module per theme.

mod closed_forms;
mod coils;
mod e_series;
mod inductance_of_air_coils;
mod netlists;
mod peers;
mod plots;
mod record;
mod rings;
mod saturating_cores;
mod table;
mod wire;
