//! A node that only current sources meet has no law to obey: its current law is between given numbers.

use super::Check;
use crate::circuit::Circuit;
use crate::diag::{Diagnostic, Sink};
use crate::elements::element::PathKind;

/// The check.
pub const CHECK: Check = Check {
    word: "current-source-cut",
    about: "Current sources in series fix one current twice.",
    run,
};

fn run(circuit: &Circuit, sink: &Sink) {
    let mut reported = sink.has_errors();
    for (node, name) in circuit.node_names.iter().enumerate() {
        let mut touching = circuit
            .entries
            .iter()
            .filter(|entry| entry.nodes.iter().any(|unknown| unknown.0 as usize == node))
            .peekable();
        let Some(&first) = touching.peek() else {
            continue;
        };
        let only_sources = touching.all(|entry| {
            entry
                .element
                .paths()
                .iter()
                .all(|path| path.kind == PathKind::CurrentSource)
        });
        if only_sources && !reported {
            sink.report(
                Diagnostic::error("current-source-cut", format!("only current sources meet at `{name}`"))
                    .at(first.span, "one of them")
                    .help(format!("add what takes the difference of the currents, such as a resistor from `{name}`")),
            );
            reported = true;
        }
    }
}
