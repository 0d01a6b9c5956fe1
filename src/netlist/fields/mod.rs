//! Typed reading of one mapping against its table of keys. Errors go to the sink and reading goes on.

use crate::diag::{Diagnostic, Span};
use crate::netlist::keys::{Key, Need, Takes};
use crate::netlist::names::Named;
use crate::netlist::node::{Data, Node};
use crate::netlist::reader::{Reader, place};
use crate::units::Kind;

mod finish;
mod lists;
mod quantities;
mod words;

/// One mapping under its path.
#[derive(Clone)]
struct Layer<'a> {
    node: &'a Node,
    path: String,
}

/// A mapping being read: its own keys, and behind them those of a part.
#[derive(Clone)]
pub struct Fields<'a> {
    own: Layer<'a>,
    behind: Option<Layer<'a>>,
    tables: Vec<&'static [Key]>,
    reader: &'a Reader<'a>,
}

/// An entry of a mapping from names to mappings.
#[derive(Clone, Debug)]
pub struct NamedNode<'a> {
    /// The name.
    pub name: Named,
    /// What stands behind it.
    pub node: &'a Node,
    /// Its path: `elements.k1_coil`.
    pub path: String,
}

/// `key` under `path`.
pub fn join(path: &str, key: &str) -> String {
    if path.is_empty() {
        key.to_owned()
    } else {
        format!("{path}.{key}")
    }
}

impl<'a> Fields<'a> {
    /// Reads `node` with the keys of a table. What is no mapping is reported and read as an empty one.
    pub fn new(
        node: &'a Node,
        path: impl Into<String>,
        keys: &'static [Key],
        reader: &'a Reader<'a>,
    ) -> Self {
        let path = path.into();
        if !matches!(node.data, Data::Map(_)) {
            let headline = format!(
                "{} takes a mapping of keys, got {}",
                last(&path),
                node.what()
            );
            let known: Vec<&str> = keys.iter().map(|key| key.name).take(3).collect();
            let label = format!("keys here are {} ...", known.join(", "));
            reader.error(node, "wrong-type", headline, label);
        }
        Fields {
            own: Layer { node, path },
            behind: None,
            tables: vec![keys],
            reader,
        }
    }

    /// Adds the keys of another table.
    #[must_use]
    pub fn also(mut self, keys: &'static [Key]) -> Self {
        self.tables.push(keys);
        self
    }

    /// Lets a part supply the keys that are not written here; their values have paths under `path`.
    #[must_use]
    pub fn behind(mut self, node: &'a Node, path: impl Into<String>) -> Self {
        self.behind = Some(Layer {
            node,
            path: path.into(),
        });
        self
    }

    /// The reader that values go to.
    pub fn reader(&self) -> &'a Reader<'a> {
        self.reader
    }

    /// The path of this mapping.
    pub fn path(&self) -> &str {
        &self.own.path
    }

    /// Where to point when the mapping as a whole is meant: its name.
    pub fn head(&self) -> Span {
        self.own.node.head
    }

    /// The mapping itself.
    pub fn mapping(&self) -> &'a Node {
        self.own.node
    }

    /// True where the key is written, here or in the part.
    pub fn has(&self, key: &str) -> bool {
        self.find(key).is_some()
    }

    /// The value behind a key as it stands.
    pub fn node(&self, key: &str) -> Option<&'a Node> {
        self.find(key).map(|(node, _)| node)
    }

    /// The value behind a key and its path (under the part's where that supplies it).
    pub fn node_and_path(&self, key: &str) -> Option<(&'a Node, String)> {
        self.find(key)
    }

    /// Where the key's value stands; the mapping's name where the key is not written.
    pub fn span(&self, key: &str) -> Span {
        self.node(key).map_or(self.head(), place)
    }

    fn find(&self, key: &str) -> Option<(&'a Node, String)> {
        [Some(&self.own), self.behind.as_ref()]
            .into_iter()
            .flatten()
            .find_map(|layer| Some((layer.node.get(key)?, join(&layer.path, key))))
    }

    fn key(&self, key: &str) -> &'static Key {
        let mut all = self.tables.iter().flat_map(|table| table.iter());
        all.find(|entry| entry.name == key).unwrap_or_else(|| {
            panic!(
                "the reader of {} asks for `{key}`, which its table does not list",
                self.own.path
            )
        })
    }

    fn kind(&self, key: &str) -> Kind {
        match self.key(key).takes {
            Takes::Quantity(kind)
            | Takes::List(kind)
            | Takes::Waveform(kind)
            | Takes::Pairs(kind, _) => kind,
            _ => panic!(
                "the table of {} lists `{key}`, but not as a quantity",
                self.own.path
            ),
        }
    }

    /// The value behind a key, or what its absence means: an error, nothing, or the default's text (noted).
    fn written(&self, key: &str) -> Written<'a> {
        if let Some((node, path)) = self.find(key) {
            return Written::Node(node, path);
        }
        match self.key(key).need {
            Need::Optional => Written::Absent,
            Need::Required => {
                self.missing(key);
                Written::Absent
            }
            Need::Default(text) => {
                let path = join(&self.own.path, key);
                self.reader.note_default(&path, text);
                Written::Default(text, path)
            }
        }
    }

    /// Reports that a key has to be written; where it is only misspelt, `finish` says so.
    pub fn missing(&self, key: &str) {
        self.missing_as(key, self.key(key).takes);
    }

    /// The same for a key whose table leaves open what it takes.
    pub(in crate::netlist) fn missing_as(&self, key: &str, takes: Takes) {
        let entry = self.key(key);
        if self
            .own
            .node
            .entries()
            .iter()
            .any(|written| self.meant(&self.own, written) == Some(key))
        {
            return;
        }
        let subject = if self.own.path.is_empty() {
            "the netlist"
        } else {
            &self.own.path
        };
        let mut diagnostic = Diagnostic::error(
            "missing-key",
            format!("{subject} needs `{key}`, {}", entry.about),
        )
        .at(self.head(), format!("`{key}` is missing"));
        if let Takes::Quantity(kind) | Takes::Waveform(kind) = takes {
            diagnostic = diagnostic.help(format!("{} is written in {}", kind.name, kind.examples));
        } else if let Takes::Word(words) = takes {
            diagnostic = diagnostic.help(format!("`{key}` is one of {}", words.join(", ")));
        }
        self.reader.sink.report(diagnostic);
    }

    /// The mapping behind a key, read with the keys that the table gives it. Where both the element and its part
    /// have it, the part's stands behind the element's.
    pub fn map(&self, key: &str) -> Option<Fields<'a>> {
        let Takes::Map(keys) = self.key(key).takes else {
            panic!(
                "the table of {} lists `{key}`, but not as a mapping",
                self.own.path
            );
        };
        let Written::Node(node, path) = self.written(key) else {
            return None;
        };
        let fields = Fields::new(node, path, keys, self.reader);
        let part = self
            .behind
            .as_ref()
            .and_then(|layer| Some((layer.node.get(key)?, join(&layer.path, key))));
        match part {
            Some((behind, path)) if !std::ptr::eq(behind, node) => {
                Some(fields.behind(behind, path))
            }
            _ => Some(fields),
        }
    }

    /// The entries of a mapping from names to mappings (`elements`, `windings`); each name is checked.
    pub fn entries(&self, key: &str) -> Vec<NamedNode<'a>> {
        let Written::Node(node, path) = self.written(key) else {
            return Vec::new();
        };
        if !matches!(node.data, Data::Map(_)) {
            let headline = format!("{key} takes a mapping of names, got {}", node.what());
            self.fault(
                Some(node),
                "wrong-type",
                headline,
                self.key(key).about.into(),
                None,
            );
        }
        let named = |entry: &'a crate::netlist::node::Entry| {
            let name = self.checked_name(
                key,
                Named {
                    text: entry.key.clone(),
                    span: entry.key_span,
                },
            )?;
            let path = join(&path, &name.text);
            Some(NamedNode {
                name,
                node: &entry.value,
                path,
            })
        };
        node.entries().iter().filter_map(named).collect()
    }

    /// Reports an error on the value of a key (on the mapping's name where the key is not written).
    pub fn error(
        &self,
        key: &str,
        word: &'static str,
        headline: impl Into<String>,
        label: impl Into<String>,
        help: Option<&str>,
    ) {
        self.fault(
            self.node(key),
            word,
            headline.into(),
            label.into(),
            help.map(str::to_owned),
        );
    }

    fn fault(
        &self,
        node: Option<&Node>,
        word: &'static str,
        headline: String,
        label: String,
        help: Option<String>,
    ) {
        let mut diagnostic =
            Diagnostic::error(word, headline).at(node.map_or(self.head(), place), label);
        diagnostic.help.extend(help);
        self.reader.sink.report(diagnostic);
    }
}

/// What stands behind a key.
enum Written<'a> {
    Node(&'a Node, String),
    Default(&'static str, String),
    Absent,
}

fn last(path: &str) -> &str {
    path.rsplit('.')
        .next()
        .filter(|word| !word.is_empty())
        .unwrap_or("a netlist")
}

#[cfg(test)]
mod tests;
