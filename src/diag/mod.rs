//! Diagnostics: what is wrong, where it stands in which text, and what would be right.

mod diagnostic;
pub mod drawing;
mod sink;
mod sources;

#[cfg(test)]
mod tests;

pub use diagnostic::{Diagnostic, Severity, to_json};
pub use drawing::{Paint, draw, draw_all};
pub use sink::Sink;
pub use sources::{FileId, Place, Sources, Span};
