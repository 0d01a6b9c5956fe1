//! Netlist text to a document with positions, and the typed reading of its fields.

pub mod document;
mod events;
pub mod expected;
pub mod fields;
mod fields_as;
pub mod keys;
pub mod load;
mod names;
mod node;
pub mod parameters;
mod reader;
mod set;
mod syntax;
mod writer;

#[cfg(test)]
mod tests;

pub use document::{Document, read_document, read_fragment};
pub use fields::{Fields, NamedNode, join};
pub use keys::{Key, Need, Takes};
pub use load::{Failure, Input, LoadError, Loaded, load};
pub use names::{Named, is_name, nearest};
pub use node::{Data, Entry, Node};
pub use parameters::{Parameter, Parameters, Value, Values};
pub use reader::{DefaultUsed, Reader};

/// A text cut to a length that fits into a sentence.
pub(crate) fn shortened(text: &str) -> String {
    let line = text.split(['\n', '\r']).next().unwrap_or("");
    if line.chars().take(41).count() <= 40 && line.len() == text.len() {
        return line.to_owned();
    }
    format!("{}…", line.chars().take(39).collect::<String>())
}
