//! Changing a document by path: overrides from the command line, variants that the program builds.

use super::document::{Document, read_fragment};
use super::events::DEEPEST;
use super::names::nearest;
use super::node::{Data, Entry, Node};
use crate::diag::{Diagnostic, Sink, Sources, Span};

/// The name under which overrides stand among the sources.
pub const OVERRIDE: &str = "--set";

impl Document {
    /// Takes an override `PATH=VALUE`: changes or adds one value, read as YAML (`4.7 kΩ`, `[1 ms, 5 ms]`). The
    /// text becomes a source of its own, so that later errors point into it. False where it was refused.
    pub fn set(&mut self, assignment: &str, sources: &mut Sources, sink: &Sink) -> bool {
        let (path, value) = match assignment.split_once('=') {
            Some((path, value)) if !path.trim().is_empty() && !value.trim().is_empty() => {
                (path, value)
            }
            _ => {
                let file = sources.add(OVERRIDE, assignment);
                let whole = Span {
                    file,
                    start: 0,
                    end: assignment.len(),
                };
                let diagnostic = Diagnostic::error("bad-override", "an override is PATH=VALUE")
                    .at(whole, "not of this form")
                    .help("--set \"elements.catch.series_resistance=4.7 Ω\"");
                sink.report(diagnostic);
                return false;
            }
        };
        // The value is read where it stands: blanks in place of the path keep every position.
        let blanked: String = " ".repeat(path.len() + 1) + value;
        let mut scratch = Sources::new();
        let inner = Sink::new();
        let file = sources.add(OVERRIDE, assignment);
        let Some(mut node) = read_fragment(OVERRIDE, &blanked, &mut scratch, &inner) else {
            for mut diagnostic in inner.sorted() {
                diagnostic
                    .labels
                    .iter_mut()
                    .for_each(|(span, _)| span.file = file);
                sink.report(diagnostic);
            }
            return false;
        };
        let lead = path.len() - path.trim_start().len();
        let key_span = Span {
            file,
            start: lead,
            end: path.trim_end().len(),
        };
        rename_file(&mut node, file);
        node.head = key_span;
        self.put(path.trim(), node, key_span, sink)
    }

    /// Puts a node at a path, adding it where its last word is new. False, with a message at `key_span`, where the
    /// path leads nowhere.
    pub fn put(&mut self, path: &str, node: Node, key_span: Span, sink: &Sink) -> bool {
        let mut here = &mut self.root;
        let words: Vec<&str> = path.split('.').collect();
        let Some((last, parents)) = words.split_last() else {
            return false;
        };
        if words.len() > DEEPEST {
            let label = format!("more than {DEEPEST} words deep");
            sink.report(
                Nowhere {
                    path: super::shortened(path),
                    label,
                }
                .at_span(key_span),
            );
            return false;
        }
        for (depth, word) in parents.iter().enumerate() {
            if let Some(problem) = obstacle(here, word, depth, path) {
                sink.report(problem.at_span(key_span));
                return false;
            }
            here = step(here, word, key_span);
        }
        match &mut here.data {
            Data::Map(entries) => match entries.iter_mut().find(|entry| entry.key == *last) {
                Some(entry) => entry.value = node,
                None => entries.push(Entry {
                    key: (*last).to_owned(),
                    key_span,
                    value: node,
                }),
            },
            Data::List(items) => match last.parse::<usize>().ok().and_then(|k| items.get_mut(k)) {
                Some(item) => *item = node,
                None => {
                    sink.report(
                        Nowhere {
                            path: path.into(),
                            label: format!("the list has {} items, counted from 0", items.len()),
                        }
                        .at_span(key_span),
                    );
                    return false;
                }
            },
            Data::Scalar(_) => {
                sink.report(
                    Nowhere {
                        path: path.into(),
                        label: format!("there is no mapping above `{last}`"),
                    }
                    .at_span(key_span),
                );
                return false;
            }
        }
        true
    }

    /// Puts a node that the program builds at a path, and mappings above it where they are missing.
    pub fn insert(&mut self, path: &str, node: Node) {
        let span = node.span;
        let mut here = &mut self.root;
        let mut words: Vec<&str> = path.split('.').collect();
        let last = words.pop().unwrap_or("");
        for word in words {
            here = step(here, word, span);
        }
        if !matches!(here.data, Data::Map(_)) {
            here.data = Data::Map(Vec::new());
        }
        if let Data::Map(entries) = &mut here.data {
            entries.retain(|entry| entry.key != last);
            entries.push(Entry {
                key: last.to_owned(),
                key_span: span,
                value: node,
            });
        }
    }

    /// Takes the node at a path out.
    pub fn remove(&mut self, path: &str) -> Option<Node> {
        let (above, last) = path.rsplit_once('.').unwrap_or(("", path));
        let mut here = &mut self.root;
        for word in above.split('.').filter(|word| !word.is_empty()) {
            here = child(here, word)?;
        }
        let Data::Map(entries) = &mut here.data else {
            return None;
        };
        let at = entries.iter().position(|entry| entry.key == last)?;
        Some(entries.remove(at).value)
    }

    /// The node at a path; list items by number.
    pub fn at(&self, path: &str) -> Option<&Node> {
        path.split('.')
            .try_fold(&self.root, |here, word| match &here.data {
                Data::List(items) => items.get(word.parse::<usize>().ok()?),
                _ => here.get(word),
            })
    }
}

/// A path that leads nowhere, and why.
struct Nowhere {
    path: String,
    label: String,
}

impl Nowhere {
    fn at_span(self, span: Span) -> Diagnostic {
        Diagnostic::error(
            "unknown-path",
            format!("there is no `{}` in the netlist", self.path),
        )
        .at(span, self.label)
    }
}

/// What keeps a path from going on with `word` below `here`. Below the second word new mappings may arise: an
/// element may get a first rating, but a misspelt element is none.
fn obstacle(here: &Node, word: &str, depth: usize, path: &str) -> Option<Nowhere> {
    let nowhere = |label| {
        Some(Nowhere {
            path: path.into(),
            label,
        })
    };
    match &here.data {
        Data::Map(entries) => {
            if depth >= 2 || entries.iter().any(|entry| entry.key == word) {
                return None;
            }
            match nearest(word, entries.iter().map(|entry| entry.key.as_str())) {
                Some(near) => nowhere(format!("did you mean `{near}` for `{word}`?")),
                None => nowhere(format!("`{word}` is not there")),
            }
        }
        Data::List(items) if word.parse::<usize>().is_ok_and(|k| k < items.len()) => None,
        Data::List(items) => nowhere(format!(
            "the list has {} items, counted from 0",
            items.len()
        )),
        Data::Scalar(_) => nowhere(format!("there is no mapping above `{word}`")),
    }
}

fn child<'n>(here: &'n mut Node, word: &str) -> Option<&'n mut Node> {
    match &mut here.data {
        Data::Map(entries) => entries
            .iter_mut()
            .find(|entry| entry.key == word)
            .map(|entry| &mut entry.value),
        Data::List(items) => word.parse::<usize>().ok().and_then(|k| items.get_mut(k)),
        Data::Scalar(_) => None,
    }
}

/// The node below `here`, made as an empty mapping where it is missing.
fn step<'n>(here: &'n mut Node, word: &str, span: Span) -> &'n mut Node {
    if child(here, word).is_none() {
        if !matches!(here.data, Data::Map(_)) {
            here.data = Data::Map(Vec::new());
        }
        if let Data::Map(entries) = &mut here.data {
            let value = Node {
                span,
                head: span,
                data: Data::Map(Vec::new()),
            };
            entries.push(Entry {
                key: word.to_owned(),
                key_span: span,
                value,
            });
        }
    }
    child(here, word).expect("the child was there or has just been added")
}

/// Moves the spans of a tree to another file.
fn rename_file(node: &mut Node, file: crate::diag::FileId) {
    node.span.file = file;
    node.head.file = file;
    match &mut node.data {
        Data::Scalar(_) => {}
        Data::List(items) => items.iter_mut().for_each(|item| rename_file(item, file)),
        Data::Map(entries) => entries.iter_mut().for_each(|entry| {
            entry.key_span.file = file;
            rename_file(&mut entry.value, file);
        }),
    }
}

#[cfg(test)]
mod tests;
