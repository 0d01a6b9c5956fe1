//! Every node has a path to ground; junctions and capacitors count as paths.

use super::{Check, Sets};
use crate::circuit::{Circuit, GROUND};
use crate::diag::{Diagnostic, Sink};
use crate::elements::element::PathKind;
use std::collections::BTreeMap;

/// The check.
pub const CHECK: Check = Check {
    word: "no-path-to-ground",
    about: "A part of the circuit that nothing ties to ground has no defined potential.",
    run,
};

fn run(circuit: &Circuit, sink: &Sink) {
    let used = circuit
        .entries
        .iter()
        .flat_map(|entry| &entry.terminals)
        .any(|t| t.node.text == GROUND);
    if !used {
        if let Some(entry) = circuit.entries.first() {
            sink.report(
                Diagnostic::error("missing-ground", "no element is on `ground`")
                    .at(entry.span, "the circuit begins here")
                    .help("`ground` is the reference node, 0 V: name the supply's return so"),
            );
        }
        return;
    }
    let mut sets = Sets::new(circuit);
    for entry in &circuit.entries {
        for path in entry.element.paths() {
            if path.kind != PathKind::CurrentSource {
                let (a, b) = (
                    sets.place(entry.nodes[path.from]),
                    sets.place(entry.nodes[path.to]),
                );
                sets.join(a, b);
            }
        }
    }
    let ground = sets.root(circuit.node_names.len());
    let mut islands: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for node in 0..circuit.node_names.len() {
        let root = sets.root(node);
        if root != ground {
            islands.entry(root).or_default().push(node);
        }
    }
    let mut islands: Vec<Vec<usize>> = islands.into_values().collect();
    islands.sort_unstable();
    for nodes in islands {
        report(circuit, &nodes, sink);
    }
}

fn report(circuit: &Circuit, nodes: &[usize], sink: &Sink) {
    let on = |entry: &crate::circuit::Entry| {
        entry
            .nodes
            .iter()
            .any(|node| nodes.binary_search(&(node.0 as usize)).is_ok())
    };
    let driven = circuit.entries.iter().find(|entry| {
        on(entry)
            && entry
                .element
                .paths()
                .iter()
                .any(|path| path.kind == PathKind::CurrentSource)
    });
    let names: Vec<String> = nodes
        .iter()
        .take(6)
        .map(|&node| format!("`{}`", circuit.node_names[node]))
        .collect();
    let names = names.join(", ");
    if let Some(source) = driven {
        sink.report(
            Diagnostic::error(
                "current-source-cut",
                format!("only current sources reach {names}: `{}`", source.name),
            )
            .at(source.span, "its current has nowhere to go")
            .help("give that part of the circuit a path to ground, such as a large resistor"),
        );
        return;
    }
    let Some(entry) = circuit.entries.iter().find(|entry| on(entry)) else {
        return;
    };
    let members: Vec<String> = circuit
        .entries
        .iter()
        .filter(|entry| on(entry))
        .take(6)
        .map(|entry| format!("`{}`", entry.name))
        .collect();
    sink.report(
        Diagnostic::error(
            "no-path-to-ground",
            format!("nothing ties {names} to ground"),
        )
        .at(entry.span, "part of an island")
        .help(format!(
            "the island is {}; join it to `ground`, directly or by a large resistor",
            members.join(", ")
        )),
    );
}
