//! A run for people and programs: the answer in a line, tables, JSON, charts, waveforms.

pub mod charts;
pub mod json;
pub mod text;
pub mod waveforms;
