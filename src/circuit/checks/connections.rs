//! A node with a single connection is most often a misspelt name: a caution, not an error.

use super::Check;
use crate::circuit::Circuit;
use crate::diag::{Diagnostic, Sink};

/// The check.
pub const CHECK: Check = Check {
    word: "single-connection",
    about: "A node on which only one terminal sits carries no current.",
    run,
};

fn run(circuit: &Circuit, sink: &Sink) {
    for (k, name) in circuit.node_names.iter().enumerate() {
        let mut terminals = circuit
            .entries
            .iter()
            .flat_map(|entry| &entry.terminals)
            .filter(|terminal| terminal.node.text == *name);
        let (Some(only), None) = (terminals.next(), terminals.next()) else {
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
