//! A current that only capacitors could carry has no operating point: they would charge without bound.

use super::Sets;
use crate::circuit::Circuit;
use crate::diag::Diagnostic;
use crate::elements::element::PathKind;

/// A current source into a part of the circuit that capacitors alone join to the rest.
pub fn capacitive_cut(circuit: &Circuit) -> Option<Diagnostic> {
    let mut sets = Sets::new(circuit);
    for entry in &circuit.entries {
        for path in entry.element.paths() {
            if !matches!(path.kind, PathKind::Capacitive | PathKind::CurrentSource) {
                let (a, b) = (
                    sets.place(entry.nodes[path.from]),
                    sets.place(entry.nodes[path.to]),
                );
                sets.join(a, b);
            }
        }
    }
    // A dependent source may find its rest by itself, as a conductance does.
    let sources = circuit
        .entries
        .iter()
        .filter(|entry| entry.kind.word == "current_source");
    for entry in sources {
        for path in entry.element.paths() {
            let (a, b) = (
                sets.place(entry.nodes[path.from]),
                sets.place(entry.nodes[path.to]),
            );
            if path.kind == PathKind::CurrentSource && sets.root(a) != sets.root(b) {
                let headline = format!(
                    "at rest only capacitors could carry the current of `{}`",
                    entry.name
                );
                return Some(
                    Diagnostic::error("capacitive-cut", headline)
                        .at(entry.span, "its current has no way at rest")
                        .help("add a resistor beside the capacitor (its leakage), or write `start: zero` in the transient"),
                );
            }
        }
    }
    None
}
