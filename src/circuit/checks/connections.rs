//! A node with a single connection is most often a misspelt name: a caution, not an error.

use super::Check;
use crate::circuit::Circuit;
use crate::diag::{Diagnostic, Sink};
use crate::elements::Terminal;

/// The check.
pub const CHECK: Check = Check {
    word: "single-connection",
    about: "A node on which only one terminal sits carries no current.",
    run,
};

fn run(circuit: &Circuit, sink: &Sink) {
    // Of each node, the first terminal on it and how many there are.
    let mut met: Vec<(Option<&Terminal>, usize)> = vec![(None, 0); circuit.node_names.len()];
    for entry in &circuit.entries {
        for (terminal, unknown) in entry.terminals.iter().zip(&entry.nodes) {
            if let Some((first, count)) = met.get_mut(unknown.0 as usize) {
                first.get_or_insert(terminal);
                *count += 1;
            }
        }
    }
    for (k, name) in circuit.node_names.iter().enumerate() {
        let (Some(only), 1) = met[k] else {
            continue;
        };
        let others = circuit
            .node_names
            .iter()
            .enumerate()
            .filter(|(other, _)| *other != k);
        let near = crate::netlist::nearest(name, others.map(|(_, other)| other.as_str()));
        let diagnostic = Diagnostic::caution(
            "single-connection",
            format!("node `{name}` has a single connection"),
        )
        .at(only.node.span, "nothing else is on this node");
        sink.report(match near {
            Some(near) => diagnostic.help(format!("if it was meant to be `{near}`, write that")),
            None => diagnostic,
        });
    }
}
