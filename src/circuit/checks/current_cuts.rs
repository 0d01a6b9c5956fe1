//! A node that only current sources meet has no law to obey: its current law is between given numbers.

use super::Check;
use crate::circuit::{Circuit, Entry};
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
    // Of each node, the first element that meets it, and whether only current sources do.
    let mut met: Vec<Option<(&Entry, bool)>> = vec![None; circuit.node_names.len()];
    for entry in &circuit.entries {
        let paths = entry.element.paths();
        let is_source = paths
            .iter()
            .all(|path| path.kind == PathKind::CurrentSource);
        for unknown in &entry.nodes {
            if let Some(node) = met.get_mut(unknown.0 as usize) {
                let (first, only_sources) = node.unwrap_or((entry, true));
                *node = Some((first, only_sources && is_source));
            }
        }
    }
    for (name, met) in circuit.node_names.iter().zip(met) {
        let Some((first, only_sources)) = met else {
            continue;
        };
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
