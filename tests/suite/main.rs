//! The integration tests, one module per theme.

mod accuracy;
mod bad_input;
mod binary;
#[path = "../circuits/mod.rs"]
mod circuits;
mod closed_forms;
mod coils;
mod command_line;
mod contacts;
mod core_losses;
mod core_shapes;
mod coupled_windings;
mod e_series;
mod eddy_currents;
mod engine;
mod floors;
mod hard_circuits;
mod inductance_of_air_coils;
mod ladder;
mod long_runs;
mod netlists;
mod numerical_error;
mod open_cores;
mod peers;
mod pilot;
mod plots;
mod powders;
#[path = "../random/mod.rs"]
mod random;
mod random_circuits;
mod readme;
mod record;
mod relays;
mod release;
mod ringing_windings;
mod rings;
mod saturating_cores;
mod sensitivities;
mod shipped_netlists;
mod sizing;
mod steady_state;
mod structure;
mod table;
mod winding_losses;
mod wire;
