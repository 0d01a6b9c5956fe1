//! A sizing for people and programs: text, JSON, pictures.

pub mod charts;
pub mod json;
pub mod text;
mod words;
