//! Counts, words, names and texts of a mapping.

use super::{Fields, Written};
use crate::diag::Diagnostic;
use crate::netlist::keys::Takes;
use crate::netlist::names::{Named, is_name, nearest};
use crate::netlist::node::{Data, Node};
use crate::netlist::shortened;

impl<'a> Fields<'a> {
    /// A whole number from 1.
    pub fn count(&self, key: &str) -> Option<usize> {
        let (node, text) = self.scalar(key, "a whole number")?;
        match text.parse::<usize>() {
            Ok(count) if count > 0 && count <= 1_000_000_000 => Some(count),
            _ => {
                let headline = format!(
                    "{key} takes a whole number from 1, got {}",
                    shortened(&text)
                );
                self.fault(
                    node,
                    "bad-number",
                    headline,
                    "not such a number".into(),
                    None,
                );
                None
            }
        }
    }

    /// One of the words that the table lists.
    pub fn word(&self, key: &str) -> Option<&'static str> {
        let Takes::Word(words) = self.key(key).takes else {
            panic!(
                "the table of {} lists `{key}`, but not as a word",
                self.own.path
            );
        };
        let (node, text) = self.scalar(key, "a word")?;
        if let Some(word) = words.iter().find(|word| **word == text) {
            return Some(word);
        }
        let label = match nearest(&text, words.iter().copied()) {
            Some(near) => format!("did you mean `{near}`?"),
            None => "not one of its words".into(),
        };
        let headline = format!(
            "{key} is one of {}, got {}",
            words.join(", "),
            shortened(&text)
        );
        self.fault(node, "unknown-word", headline, label, None);
        None
    }

    /// A name.
    pub fn name(&self, key: &str) -> Option<Named> {
        let named = self.text(key)?;
        self.checked_name(key, named)
    }

    /// Free text with its place; not empty.
    pub fn text(&self, key: &str) -> Option<Named> {
        let (node, text) = self.scalar(key, "a text")?;
        Some(Named {
            text,
            span: node.map_or(self.head(), |node| node.span),
        })
    }

    pub(super) fn checked_name(&self, key: &str, named: Named) -> Option<Named> {
        if is_name(&named.text) {
            return Some(named);
        }
        let headline = format!("{key} takes a name, got {}", shortened(&named.text));
        let diagnostic = Diagnostic::error("bad-name", headline)
            .at(named.span, "not a name")
            .help("a name has letters, digits, `_` and `-`, and starts with a letter");
        self.reader.sink.report(diagnostic);
        None
    }

    /// A scalar's text; the node is None for a default.
    pub(super) fn scalar(&self, key: &str, what: &str) -> Option<(Option<&'a Node>, String)> {
        match self.written(key) {
            Written::Node(node, _) => match &node.data {
                Data::Scalar(text) if !text.is_empty() => Some((Some(node), text.clone())),
                _ => {
                    let headline = format!("{key} takes {what}, got {}", node.what());
                    self.fault(
                        Some(node),
                        "wrong-type",
                        headline,
                        self.key(key).about.into(),
                        None,
                    );
                    None
                }
            },
            Written::Default(text, _) => Some((None, text.to_owned())),
            Written::Absent => None,
        }
    }
}
