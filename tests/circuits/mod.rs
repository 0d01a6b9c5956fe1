//! Circuits written by hand as systems of equations, for tests and benchmarks of the engine alone.

#![allow(dead_code)] // each user takes what it needs

pub mod buck;
pub mod cases;
pub mod closed;
pub mod kinks;
pub mod ladder;
pub mod laws;
pub mod measure;
pub mod problems;
pub mod published;
pub mod relay;
pub mod stamps;
