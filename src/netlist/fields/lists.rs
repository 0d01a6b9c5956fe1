//! Lists of a mapping: quantities, pairs, names.

use super::{Fields, Written};
use crate::netlist::keys::Takes;
use crate::netlist::names::Named;
use crate::netlist::node::{Data, Node};
use crate::netlist::parameters::Value;
use crate::netlist::shortened;

impl<'a> Fields<'a> {
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

    pub(super) fn name_of(&self, key: &str, item: &Node) -> Option<Named> {
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

    /// The items behind a key; with a remedy where a single value stands there.
    pub(super) fn items(&self, key: &str, example: &str) -> Option<(&'a [Node], String)> {
        match self.written(key) {
            Written::Node(node, path) => match &node.data {
                Data::List(items) => Some((items, path)),
                _ => {
                    let headline = format!("{key} takes a list, got {}", node.what());
                    let help = match node.text() {
                        Some(text)
                            if !text.is_empty()
                                && matches!(self.key(key).takes, Takes::Names(_)) =>
                        {
                            let names: Vec<&str> = text.split_whitespace().collect();
                            format!("{key}: [{}]", shortened(&names.join(", ")))
                        }
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
}
