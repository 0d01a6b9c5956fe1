//! A loop of ideal voltage sources fixes one voltage twice; with resistance-free inductors in the loop there is no
//! operating point.

use super::{Check, Sets};
use crate::circuit::Circuit;
use crate::diag::{Diagnostic, Sink};
use crate::elements::element::PathKind;

/// The check.
pub const CHECK: Check = Check {
    word: "voltage-source-loop",
    about: "Ideal voltage sources in a loop leave their common current without bound.",
    run,
};

fn run(circuit: &Circuit, sink: &Sink) {
    if let Some((closing, members)) = find_loop(circuit, &[PathKind::VoltageSource]) {
        sink.report(
            Diagnostic::error(
                "voltage-source-loop",
                format!("ideal voltage sources form a loop: {members}"),
            )
            .at(circuit.entries[closing].span, "this one closes the loop")
            .help("give one of them a `series_resistance`, or take one out"),
        );
    }
}

/// A loop of voltage sources and resistance-free inductors: no operating point has a bounded current in it.
pub fn inductive_loop(circuit: &Circuit) -> Option<Diagnostic> {
    let (closing, members) = find_loop(circuit, &[PathKind::VoltageSource, PathKind::Inductive])?;
    Some(
        Diagnostic::error(
            "inductive-loop",
            format!("voltage sources and resistance-free inductors form a loop: {members}"),
        )
        .at(
            circuit.entries[closing].span,
            "its current has no bound at rest",
        )
        .help("give the inductor its `series_resistance`, or write `start: zero` in the transient"),
    )
}

/// The element that closes a loop of these kinds of path, and the loop's members in words.
fn find_loop(circuit: &Circuit, kinds: &[PathKind]) -> Option<(usize, String)> {
    let mut sets = Sets::new(circuit);
    let mut edges: Vec<(usize, usize, usize)> = Vec::new();
    for (k, entry) in circuit.entries.iter().enumerate() {
        for path in entry.element.paths() {
            if !kinds.contains(&path.kind) {
                continue;
            }
            let (a, b) = (
                sets.place(entry.nodes[path.from]),
                sets.place(entry.nodes[path.to]),
            );
            if sets.join(a, b) {
                edges.push((a, b, k));
                continue;
            }
            let mut members: Vec<usize> = way(&edges, a, b);
            members.push(k);
            members.sort_unstable();
            members.dedup();
            let names: Vec<String> = members
                .iter()
                .map(|&member| format!("`{}`", circuit.entries[member].name))
                .collect();
            return Some((k, names.join(", ")));
        }
    }
    None
}

/// The elements along the way from `a` to `b` in a forest of edges.
fn way(edges: &[(usize, usize, usize)], a: usize, b: usize) -> Vec<usize> {
    let mut reached: Vec<(usize, Vec<usize>)> = vec![(a, Vec::new())];
    let mut next = 0;
    while next < reached.len() {
        let (node, path) = reached[next].clone();
        if node == b {
            return path;
        }
        for &(from, to, k) in edges {
            for (here, there) in [(from, to), (to, from)] {
                if here == node && !reached.iter().any(|(known, _)| *known == there) {
                    let mut longer = path.clone();
                    longer.push(k);
                    reached.push((there, longer));
                }
            }
        }
        next += 1;
    }
    Vec::new()
}
