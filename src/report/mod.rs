//! What people look at: tables, plots, waveforms as CSV, JSON, files. Values come in, texts and bytes go out.

pub mod chart;
pub mod coil;
pub mod csv;
mod drawing;
pub mod engineering;
pub mod files;
pub mod json;
pub mod plots;
pub mod run;
pub mod size;
pub mod tables;
