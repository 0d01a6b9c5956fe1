//! Typed reading of one mapping against its table of keys. Errors go to the sink and reading goes on.

use super::keys::{Key, Need, Takes};
use super::names::{Named, is_name, nearest};
use super::node::{Data, Node};
use super::parameters::Value;
use super::reader::{Reader, place, words};
use super::shortened;
use crate::diag::{Diagnostic, Span};
use crate::units::{Amount, Kind, engineering, parse_amount};

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

    /// Reports that a key has to be written.
    pub fn missing(&self, key: &str) {
        let entry = self.key(key);
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
        if let Takes::Quantity(kind) = entry.takes {
            diagnostic = diagnostic.help(format!("{} is written in {}", kind.name, kind.examples));
        } else if let Takes::Word(words) = entry.takes {
            diagnostic = diagnostic.help(format!("`{key}` is one of {}", words.join(", ")));
        }
        self.reader.sink.report(diagnostic);
    }

    /// A quantity as a parameter with its path.
    pub fn value(&self, key: &str) -> Option<Value> {
        let kind = self.kind(key);
        match self.written(key) {
            Written::Node(node, path) => self.reader.value(node, &path, kind),
            Written::Default(text, path) => {
                Some(
                    self.reader
                        .register(&path, kind, self.default(key, text, kind), None),
                )
            }
            Written::Absent => None,
        }
    }

    /// A quantity without a parameter: for what no study varies.
    pub fn amount(&self, key: &str) -> Option<Amount> {
        let kind = self.kind(key);
        match self.written(key) {
            Written::Node(node, _) => self.reader.amount(node, key, kind),
            Written::Default(text, _) => Some(self.default(key, text, kind)),
            Written::Absent => None,
        }
    }

    fn default(&self, key: &str, text: &str, kind: Kind) -> Amount {
        parse_amount(text, kind)
            .unwrap_or_else(|error| panic!("the default of `{key}` is written wrongly: {error}"))
    }

    /// A quantity whose whole spread must lie above zero.
    pub fn positive(&self, key: &str) -> Option<Value> {
        self.checked(key, "above zero", |amount| amount.low > 0.0)
    }

    /// A quantity whose whole spread must not reach below zero.
    pub fn non_negative(&self, key: &str) -> Option<Value> {
        self.checked(key, "zero or more", |amount| amount.low >= 0.0)
    }

    /// A quantity whose whole spread must meet a condition, told in words: `duty must be between 0 and 1`.
    pub fn checked(
        &self,
        key: &str,
        must_be: &str,
        holds: impl Fn(&Amount) -> bool,
    ) -> Option<Value> {
        let amount = self.amount(key)?;
        if holds(&amount) {
            return self.value(key);
        }
        self.out_of_range(key, must_be, &amount);
        None
    }

    fn out_of_range(&self, key: &str, must_be: &str, amount: &Amount) {
        let kind = self.kind(key);
        let got = engineering(amount.nominal, kind, 6);
        let label = if amount.low < amount.high {
            format!(
                "from {} to {}",
                engineering(amount.low, kind, 6),
                engineering(amount.high, kind, 6)
            )
        } else {
            format!("{got} is not {must_be}")
        };
        let headline = format!("{key} must be {must_be}, got {got}");
        let headline = if amount.low < amount.high {
            format!("{headline} with its spread")
        } else {
            headline
        };
        self.error(key, "out-of-range", headline, label, None);
    }

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

    fn checked_name(&self, key: &str, named: Named) -> Option<Named> {
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
    fn scalar(&self, key: &str, what: &str) -> Option<(Option<&'a Node>, String)> {
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

    /// The items behind a key; with a remedy where a single value stands there.
    fn items(&self, key: &str, example: &str) -> Option<(&'a [Node], String)> {
        match self.written(key) {
            Written::Node(node, path) => match &node.data {
                Data::List(items) => Some((items, path)),
                _ => {
                    let headline = format!("{key} takes a list, got {}", node.what());
                    let help = match node.text() {
                        Some(text) if !text.is_empty() => format!("{key}: [{}]", shortened(text)),
                        _ => format!("{key}: {example}"),
                    };
                    self.fault(
                        Some(node),
                        "wrong-type",
                        headline,
                        "a list has brackets".into(),
                        Some(help),
                    );
                    None
                }
            },
            // No table gives a list a default.
            Written::Default(..) | Written::Absent => None,
        }
    }

    /// A list of names, as long as the table says (0: any length from one).
    pub fn names(&self, key: &str) -> Option<Vec<Named>> {
        let Takes::Names(length) = self.key(key).takes else {
            panic!(
                "the table of {} lists `{key}`, but not as names",
                self.own.path
            );
        };
        let (items, _) = self.items(key, "[a, b]")?;
        if (length > 0 && items.len() != length) || items.is_empty() {
            let wanted = if length > 0 {
                format!("{length} names")
            } else {
                "names".into()
            };
            let headline = format!("{key} takes {wanted}, got {}", items.len());
            self.fault(
                self.node(key),
                "wrong-length",
                headline,
                self.key(key).about.into(),
                None,
            );
            return None;
        }
        let names: Vec<Option<Named>> = items.iter().map(|item| self.name_of(key, item)).collect();
        names.into_iter().collect()
    }

    fn name_of(&self, key: &str, item: &Node) -> Option<Named> {
        match &item.data {
            Data::Scalar(text) => self.checked_name(
                key,
                Named {
                    text: text.clone(),
                    span: item.span,
                },
            ),
            _ => {
                let headline = format!("{key} takes names, got {}", item.what());
                self.fault(
                    Some(item),
                    "wrong-type",
                    headline,
                    "not a name".into(),
                    None,
                );
                None
            }
        }
    }

    /// A list of quantities, with the paths `key.0`, `key.1` and so on.
    pub fn list(&self, key: &str) -> Option<Vec<Value>> {
        let kind = self.kind(key);
        let (items, path) = self.items(key, "[ ]")?;
        let each = |(k, item)| self.reader.value(item, &format!("{path}.{k}"), kind);
        let values: Vec<Option<Value>> = items.iter().enumerate().map(each).collect();
        values.into_iter().collect()
    }

    /// A list of pairs, with the paths `key.0.0`, `key.0.1` and so on.
    pub fn pairs(&self, key: &str) -> Option<Vec<(Value, Value)>> {
        let Takes::Pairs(first, second) = self.key(key).takes else {
            panic!(
                "the table of {} lists `{key}`, but not as pairs",
                self.own.path
            );
        };
        let (items, path) = self.items(key, "[[ , ], [ , ]]")?;
        let each = |(k, item): (usize, &Node)| {
            let [x, y] = item.items() else {
                let headline = format!(
                    "{key} takes pairs, got {} of {}",
                    item.what(),
                    item.items().len()
                );
                self.fault(
                    Some(item),
                    "wrong-length",
                    headline,
                    "a pair is [x, y]".into(),
                    None,
                );
                return None;
            };
            let x = self.reader.value(x, &format!("{path}.{k}.0"), first);
            let y = self.reader.value(y, &format!("{path}.{k}.1"), second);
            x.zip(y)
        };
        let pairs: Vec<Option<(Value, Value)>> = items.iter().enumerate().map(each).collect();
        pairs.into_iter().collect()
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
        let named = |entry: &'a super::node::Entry| {
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

    /// Ends the reading: unknown keys are reported with the nearest known word, and required ones that were never
    /// asked for where they are missing.
    pub fn finish(&self) {
        for layer in [Some(&self.own), self.behind.as_ref()]
            .into_iter()
            .flatten()
        {
            for entry in layer.node.entries() {
                if !words(&self.tables).any(|word| word == entry.key) {
                    self.unknown(layer, entry);
                }
            }
        }
        let all = self.tables.iter().flat_map(|table| table.iter());
        for key in all.filter(|key| matches!(key.need, Need::Required)) {
            if !self.has(key.name) {
                self.missing(key.name);
            }
        }
    }

    fn unknown(&self, layer: &Layer<'a>, entry: &super::node::Entry) {
        let whose = if layer.path.is_empty() {
            "the netlist".to_owned()
        } else {
            format!("`{}`", layer.path)
        };
        let headline = format!("`{}` is no key of {whose}", shortened(&entry.key));
        let diagnostic = Diagnostic::error("unknown-key", headline);
        let free = words(&self.tables).filter(|word| layer.node.get(word).is_none());
        let diagnostic = match nearest(&entry.key, free) {
            Some(near) => diagnostic.at(entry.key_span, format!("did you mean `{near}`?")),
            None => {
                let known: Vec<&str> = words(&self.tables).collect();
                diagnostic
                    .at(entry.key_span, "unknown")
                    .help(format!("keys here: {}", known.join(", ")))
            }
        };
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
    if path.is_empty() { "a netlist" } else { path }
}
