//! coilbreak: a circuit transient simulator for magnetic parts.
//!
//! It answers what happens when somebody interrupts the current of a coil: how high the voltage kicks with this
//! core, this winding and this stray capacitance, how fast the coil lets go, and which standard part tames it. One
//! YAML netlist comes in; readings, margins, plots and a recommended part go out.
//!
//! # The way of the data
//!
//! ```text
//! netlist text -> document with positions     netlist::load
//!   -> circuit with its magnetics             circuit::build, magnetics::Library
//!   -> equations d/dt q(x) + f(x, t) = 0      elements::Element stamps, circuit::Circuit is a dae::System
//!   -> operating point, transient             analysis::Simulation, dae::March
//!   -> waveforms -> readings -> limits        signals::Piece, readings::Reading, limits::Limit
//!   -> outcome                                run::run
//!   -> sizing                                 sizing
//!   -> tables, plots, JSON, CSV               report
//! ```
//!
//! Each stage is one room (a module) with one clear type handed on; a room imports only from the rooms below it.
//!
//! # From Rust
//!
//! ```
//! use coilbreak::netlist::Input;
//! use std::ops::ControlFlow;
//!
//! let text = "
//! elements:
//!   supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}
//!   valve:  {kind: inductor, nodes: [rail, drive], inductance: 0.5 H, series_resistance: 48 Ω}
//!   driver: {kind: switch, nodes: [drive, ground], closed_resistance: 50 mΩ, open_resistance: 1 MΩ,
//!            transition: 1 µs, initially: closed, opens_at: [1 ms]}
//!   catch:  {kind: diode, anode: drive, cathode: rail, saturation_current: 1 nA, ideality_factor: 1.8}
//! analysis: {transient: {duration: 50 ms}}
//! readings:
//!   kick: {signal: voltage at drive, take: highest}
//! ";
//! let input = Input::Text { name: "valve".into(), bytes: text.into(), folder: None };
//! let netlist = coilbreak::run::read(&input, &[]).map_err(|_| "the netlist is wrong").unwrap();
//! let outcome = coilbreak::run::run(&netlist, &mut |_, _| ControlFlow::Continue(())).unwrap();
//! let kick = outcome.reading("kick").unwrap().value.unwrap();
//! assert!((24.5..25.5).contains(&kick));
//! ```

pub mod analysis;
pub mod circuit;
pub mod cli;
pub mod dae;
pub mod diag;
pub mod elements;
pub mod limits;
pub mod magnetics;
pub mod math;
pub mod netlist;
pub mod readings;
pub mod report;
pub mod run;
pub mod signals;
pub mod sizing;
pub mod studies;
pub mod units;
