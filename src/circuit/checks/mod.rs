//! Structure checks: what no values could make solvable is refused by name. One file per check, one line here.

mod capacitive_cuts;
mod connections;
mod current_cuts;
mod grounded;
mod source_loops;

use super::Circuit;
use crate::diag::Sink;

/// One check.
pub struct Check {
    /// The diagnostic word that it raises.
    pub word: &'static str,
    /// What it looks for, in a sentence.
    pub about: &'static str,
    /// Looks, and reports what it finds.
    pub run: fn(&Circuit, &Sink),
}

/// Every check, in the order in which they run.
pub const CHECKS: &[Check] = &[
    grounded::CHECK,
    current_cuts::CHECK,
    source_loops::CHECK,
    connections::CHECK,
];

use capacitive_cuts::capacitive_cut;
use source_loops::inductive_loop;

/// Why a sound circuit has no state at rest, if it has none.
pub fn without_rest(circuit: &Circuit) -> Option<crate::diag::Diagnostic> {
    inductive_loop(circuit).or_else(|| capacitive_cut(circuit))
}

/// Disjoint sets of nodes; ground is the last number.
pub(super) struct Sets {
    parent: Vec<usize>,
}

impl Sets {
    pub(super) fn new(circuit: &Circuit) -> Self {
        Sets {
            parent: (0..=circuit.node_names.len()).collect(),
        }
    }

    /// The number of a node here.
    pub(super) fn place(&self, node: crate::elements::Unknown) -> usize {
        (node.0 as usize).min(self.parent.len() - 1)
    }

    pub(super) fn root(&mut self, node: usize) -> usize {
        let mut at = node;
        while self.parent[at] != at {
            self.parent[at] = self.parent[self.parent[at]];
            at = self.parent[at];
        }
        at
    }

    /// Joins two nodes; false where they were joined already.
    pub(super) fn join(&mut self, a: usize, b: usize) -> bool {
        let (a, b) = (self.root(a), self.root(b));
        self.parent[a] = b;
        a != b
    }
}
