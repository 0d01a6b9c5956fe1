//! Phrases and instants as they stand in a netlist: read with their place, refused with a diagnostic.

use super::event::EventPhrase;
use super::phrase::Phrase;
use super::window::Instant;
use super::words::PhraseError;
use crate::diag::{Diagnostic, Span};
use crate::netlist::{Fields, Node, Reader, Value, Values};
use crate::units;

/// A signal phrase and where it stands.
#[derive(Clone, Debug, PartialEq)]
pub struct WrittenPhrase {
    /// The phrase.
    pub phrase: Phrase,
    /// Its place.
    pub span: Span,
}

/// An instant as written: a time with its parameter, or an event.
#[derive(Clone, Debug, PartialEq)]
pub enum WrittenInstant {
    /// A time.
    Time(Value),
    /// An event, and where it stands.
    Event(EventPhrase, Span),
}

impl WrittenInstant {
    /// The instant with the values in force.
    pub fn with(&self, values: &Values) -> Instant {
        match self {
            WrittenInstant::Time(value) => Instant::Time(values[*value]),
            WrittenInstant::Event(event, _) => Instant::Event(event.clone()),
        }
    }

    /// The event, where it is one.
    pub fn event(&self) -> Option<(&EventPhrase, Span)> {
        match self {
            WrittenInstant::Time(_) => None,
            WrittenInstant::Event(event, span) => Some((event, *span)),
        }
    }
}

/// Reads the signal phrase behind a key; None where there is none or it was refused.
pub fn read_phrase(fields: &Fields<'_>, key: &str) -> Option<WrittenPhrase> {
    let written = fields.text(key)?;
    match Phrase::parse(&written.text) {
        Ok(phrase) => Some(WrittenPhrase {
            phrase,
            span: written.span,
        }),
        Err(error) => {
            refuse(fields.reader(), fields.node(key), written.span, error);
            None
        }
    }
}

/// Reads the instant behind a key, `20 ms` or `k1_driver opens 3`; a time becomes the parameter of its path.
pub fn read_instant(fields: &Fields<'_>, key: &str) -> Option<WrittenInstant> {
    let (node, path) = fields.node_and_path(key)?;
    let reader = fields.reader();
    let written = node.text().unwrap_or("");
    // Names start with a letter, numbers do not.
    if !written.starts_with(char::is_alphabetic) {
        let amount = reader.amount(node, key, units::TIME)?;
        if amount.low < 0.0 {
            let headline = format!("{key} must be zero or more, got {written}");
            reader.error(node, "out-of-range", headline, "a run starts at 0 s");
            return None;
        }
        return reader
            .value(node, &path, units::TIME)
            .map(WrittenInstant::Time);
    }
    match EventPhrase::parse(written) {
        Ok(event) => Some(WrittenInstant::Event(event, node.span)),
        Err(error) => {
            refuse(reader, Some(node), node.span, error);
            None
        }
    }
}

fn refuse(reader: &Reader<'_>, node: Option<&Node>, whole: Span, error: PhraseError) {
    let span = node.map_or(whole, |node| node.part(error.range));
    let diagnostic = Diagnostic::error(error.word, error.headline).at(span, error.label);
    reader.sink.report(diagnostic.help(error.help));
}
