//! From the number of an unknown to the words that a person knows it by.

use super::{Circuit, GROUND};
use crate::diag::Span;

/// Most elements named in one message.
const MOST_NAMED: usize = 6;

/// An unknown in words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Explained {
    /// `the potential of node drive`, `the flux linkage of k1_coil`.
    pub words: String,
    /// Where the element's name stands; None for a node.
    pub span: Option<Span>,
}

impl Circuit {
    /// Which element a guard is of.
    pub fn explain_guard(&self, guard: usize) -> Option<Explained> {
        let entry = self
            .entries
            .iter()
            .find(|entry| entry.guards.contains(&guard))?;
        Some(Explained {
            words: format!("the switching of `{}`", entry.name),
            span: Some(entry.span),
        })
    }

    /// The elements that meet at a node, quoted, where the unknown is a node's potential, or at the nodes of the element
    /// whose unknown it is (but for ground, where all meet); the first few of many.
    pub fn meeting_at(&self, unknown: usize) -> Vec<String> {
        let owner = self.unknowns.get(unknown).and_then(|owned| owned.element);
        let nodes: Vec<&str> = match (self.node_names.get(unknown), owner) {
            (Some(name), _) => vec![name],
            (None, Some(owner)) => {
                let terminals = self.entries[owner].terminals.iter();
                let names = terminals.map(|terminal| terminal.node.text.as_str());
                names.filter(|name| *name != GROUND).collect()
            }
            (None, None) => return Vec::new(),
        };
        let touching = |entry: &&super::Entry| {
            let mut terminals = entry.terminals.iter();
            terminals.any(|terminal| nodes.contains(&terminal.node.text.as_str()))
        };
        let entries = self.entries.iter().filter(touching).take(MOST_NAMED);
        entries.map(|entry| format!("`{}`", entry.name)).collect()
    }

    /// What an unknown is.
    pub fn explain(&self, unknown: usize) -> Explained {
        match self.unknowns.get(unknown) {
            None => Explained {
                words: "an unknown".into(),
                span: None,
            },
            Some(claimed) => match claimed.element {
                None => {
                    let name = &self.node_names[unknown];
                    let touching = self
                        .entries
                        .iter()
                        .find(|entry| entry.terminals.iter().any(|t| t.node.text == *name));
                    Explained {
                        words: format!("the potential of node `{name}`"),
                        span: touching.map(|entry| entry.span),
                    }
                }
                Some(k) => Explained {
                    words: format!("the {} of `{}`", claimed.what, self.entries[k].name),
                    span: Some(self.entries[k].span),
                },
            },
        }
    }
}
