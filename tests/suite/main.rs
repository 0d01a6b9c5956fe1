//! The integration tests, one module per theme.

#[path = "../circuits/mod.rs"]
mod circuits;
mod closed_forms;
mod coils;
mod e_series;
mod engine;
mod inductance_of_air_coils;
mod netlists;
mod peers;
mod plots;
mod record;
mod rings;
mod saturating_cores;
mod table;
mod wire;
