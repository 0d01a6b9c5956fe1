//! Reading of fields whose kind is known only where they are read, and of choices between keys.

use super::fields::{Fields, NamedNode, join};
use super::keys::{Key, Takes};
use super::names::{Named, nearest};
use super::node::{Data, Node};
use super::parameters::Value;
use crate::diag::{Diagnostic, Span};
use crate::units::Kind;

impl<'a> Fields<'a> {
    /// True where the key is written and has a mapping behind it.
    pub fn is_map(&self, key: &str) -> bool {
        self.node(key)
            .is_some_and(|node| matches!(node.data, Data::Map(_)))
    }

    /// A quantity of a kind that the table leaves open (`Kind` of any dimension there).
    pub fn value_as(&self, key: &str, kind: Kind) -> Option<Value> {
        match self.node_and_path(key) {
            Some((node, path)) => self.reader().value(node, &path, kind),
            None => {
                self.missing_as(key, Takes::Quantity(kind));
                None
            }
        }
    }

    /// A list of quantities of one kind; a single quantity stands for a list of one.
    pub fn list_as(&self, key: &str, kind: Kind) -> Option<Vec<Value>> {
        let (node, path) = self.node_and_path(key)?;
        let items = match &node.data {
            Data::List(items) => items.as_slice(),
            _ => std::slice::from_ref(node),
        };
        let read = |(k, item): (usize, &Node)| {
            self.reader()
                .value(item, &join(&path, &k.to_string()), kind)
        };
        let values: Vec<Option<Value>> = items.iter().enumerate().map(read).collect();
        values.into_iter().collect()
    }

    /// Pairs `[[x, y], ...]` of two kinds, at least one; paths are `key.0.0`, `key.0.1`, ...
    pub fn pairs_as(&self, key: &str, first: Kind, second: Kind) -> Option<Vec<(Value, Value)>> {
        let Some((node, path)) = self.node_and_path(key) else {
            self.missing(key);
            return None;
        };
        let items = match &node.data {
            Data::List(items) if !items.is_empty() => items,
            _ => {
                self.error(
                    key,
                    "wrong-type",
                    format!("{key} takes a list of pairs, got {}", node.what()),
                    "pairs are written [[x, y], ...]",
                    None,
                );
                return None;
            }
        };
        let read = |(k, item): (usize, &Node)| {
            let Data::List(pair) = &item.data else {
                self.reader().error(
                    item,
                    "wrong-type",
                    format!("{key} takes pairs, got {}", item.what()),
                    "a pair is written [x, y]",
                );
                return None;
            };
            let [x, y] = pair.as_slice() else {
                let headline = format!("{key} takes pairs, got a list of {}", pair.len());
                self.reader()
                    .error(item, "wrong-length", headline, "a pair is written [x, y]");
                return None;
            };
            let at = |part: &str| join(&join(&path, &k.to_string()), part);
            let x = self.reader().value(x, &at("0"), first);
            let y = self.reader().value(y, &at("1"), second);
            x.zip(y)
        };
        let pairs: Vec<Option<(Value, Value)>> = items.iter().enumerate().map(read).collect();
        pairs.into_iter().collect()
    }

    /// The quantity behind a name of a mapping.
    pub fn entry_value(&self, entry: &NamedNode<'a>, kind: Kind) -> Option<Value> {
        self.reader().value(entry.node, &entry.path, kind)
    }

    /// The mapping behind a name, read with its own table of keys.
    pub fn inside(&self, entry: &NamedNode<'a>, keys: &'static [Key]) -> Fields<'a> {
        Fields::new(entry.node, entry.path.clone(), keys, self.reader())
    }

    /// The mapping behind a key, read with a table of its own; None where the key is not written.
    pub fn map_with(&self, key: &str, keys: &'static [Key]) -> Option<Fields<'a>> {
        let (node, path) = self.node_and_path(key)?;
        Some(Fields::new(node, path, keys, self.reader()))
    }

    /// A quantity within bounds, both allowed.
    pub fn within(&self, key: &str, low: f64, high: f64) -> Option<Value> {
        let bound = |value: f64| {
            if value == 0.0 || value.abs() >= 1e-3 {
                format!("{value}")
            } else {
                format!("{value:e}")
            }
        };
        let must_be = format!("between {} and {}", bound(low), bound(high));
        self.checked(key, &must_be, |amount| {
            amount.low >= low && amount.high <= high
        })
    }

    /// A positive quantity that is needed where another key stands beside it.
    pub fn needed_with(&self, key: &str, other: &str) -> Option<Value> {
        if self.has(key) || !self.has(other) {
            return self.positive(key);
        }
        let headline = format!("`{other}` needs `{key}` beside it");
        self.error(
            other,
            "missing-key",
            headline,
            format!("`{key}` is missing"),
            None,
        );
        None
    }

    /// Reports an error on the mapping as a whole.
    pub fn error_here(&self, word: &'static str, headline: String, label: &str, help: &str) {
        self.error_at(self.head(), word, headline, label, help);
    }

    /// Reports an error at a place.
    pub fn error_at(
        &self,
        span: Span,
        word: &'static str,
        headline: String,
        label: &str,
        help: &str,
    ) {
        self.reader()
            .sink
            .report(Diagnostic::error(word, headline).at(span, label).help(help));
    }

    /// Reports a name that is none of the known words.
    pub fn unknown_word(&self, name: &Named, what: &str, words: &[&str]) {
        let headline = format!("`{}` is no {what}", super::shortened(&name.text));
        let diagnostic = Diagnostic::error("unknown-word", headline);
        let diagnostic = match nearest(&name.text, words.iter().copied()) {
            Some(near) => diagnostic.at(name.span, format!("did you mean `{near}`?")),
            None => diagnostic
                .at(name.span, "unknown")
                .help(format!("known: {}", words.join(", "))),
        };
        self.reader().sink.report(diagnostic);
    }
}
