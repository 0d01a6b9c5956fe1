//! What reading a netlist fills: messages, parameters, defaults. Values outside a table of keys are read here too.

use super::keys::Key;
use super::node::{Data, Node};
use super::parameters::{Parameter, Parameters, Value};
use crate::diag::{Diagnostic, Sink, Span};
use crate::units::{Amount, Kind, UnitError, parse_amount};
use std::cell::RefCell;
use std::collections::BTreeSet;

/// A default that held because its key was not written.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct DefaultUsed {
    /// `elements.catch.built_in_potential`.
    pub path: String,
    /// The value as one would write it: `0.7 V`.
    pub text: String,
}

/// The shared goal of all readers of one netlist.
pub struct Reader<'a> {
    /// Where messages go.
    pub sink: &'a Sink,
    /// Every number with a path.
    pub parameters: RefCell<Parameters>,
    /// Defaults used, in the order of reading, each once.
    pub defaults: RefCell<Vec<DefaultUsed>>,
    /// Paths in `defaults`, for finding them among many.
    noted: RefCell<BTreeSet<String>>,
}

impl<'a> Reader<'a> {
    /// Nothing read yet.
    pub fn new(sink: &'a Sink) -> Self {
        Reader {
            sink,
            parameters: RefCell::default(),
            defaults: RefCell::default(),
            noted: RefCell::default(),
        }
    }

    /// Reads a node as a quantity; `subject` is what a message calls it. Nothing is registered.
    pub fn amount(&self, node: &Node, subject: &str, kind: Kind) -> Option<Amount> {
        match &node.data {
            Data::Scalar(text) if !text.is_empty() => match parse_amount(text, kind) {
                Ok(amount) => Some(amount),
                Err(error) => {
                    self.refused(node, subject, &error);
                    None
                }
            },
            _ => {
                let headline = format!("{subject} takes {}, got {}", kind.takes, node.what());
                let label = format!("{} is written in {}", kind.name, kind.examples);
                self.sink
                    .report(Diagnostic::error("wrong-type", headline).at(place(node), label));
                None
            }
        }
    }

    /// Reads a node as a quantity and registers it as the parameter of `path`.
    pub fn value(&self, node: &Node, path: &str, kind: Kind) -> Option<Value> {
        let subject = path
            .rsplit('.')
            .find(|part| part.parse::<usize>().is_err())
            .unwrap_or(path);
        let amount = self.amount(node, subject, kind)?;
        Some(self.register(path, kind, amount, Some(node.span)))
    }

    /// Registers a number under its path; the first one of a path stays.
    pub fn register(&self, path: &str, kind: Kind, amount: Amount, span: Option<Span>) -> Value {
        self.parameters.borrow_mut().add(Parameter {
            path: path.to_owned(),
            kind,
            nominal: amount.nominal,
            spread: (amount.low, amount.high),
            span,
        })
    }

    /// Notes that a default was used.
    pub fn note_default(&self, path: &str, text: &str) {
        if self.noted.borrow_mut().insert(path.to_owned()) {
            self.defaults.borrow_mut().push(DefaultUsed {
                path: path.to_owned(),
                text: text.to_owned(),
            });
        }
    }

    /// Reports an error on a node.
    pub fn error(
        &self,
        node: &Node,
        word: &'static str,
        headline: impl Into<String>,
        label: impl Into<String>,
    ) {
        self.sink
            .report(Diagnostic::error(word, headline).at(place(node), label));
    }

    fn refused(&self, node: &Node, subject: &str, error: &UnitError) {
        let mut diagnostic = Diagnostic::error(error.word, error.headline(subject))
            .at(node.part(error.range.clone()), &error.label);
        if let Some(help) = &error.help {
            diagnostic = diagnostic.help(help.clone());
        }
        self.sink.report(diagnostic);
    }
}

/// Where to point at a value: at its key where nothing stands behind it.
pub(super) fn place(node: &Node) -> Span {
    if node.is_empty() {
        node.head
    } else {
        node.span
    }
}

/// The words of some tables of keys.
pub(super) fn words<'t>(tables: &'t [&'static [Key]]) -> impl Iterator<Item = &'static str> + 't {
    tables
        .iter()
        .flat_map(|table| table.iter().map(|key| key.name))
}
