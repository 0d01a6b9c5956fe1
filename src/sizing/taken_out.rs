//! Suppressors that a netlist already has across its coil or its switch: they make room for the candidates.
//!
//! A chain of two-terminal elements through private nodes counts as a suppressor where it joins the two nodes of the
//! coil or of the switch and holds a diode, zener or suppressor diode, or a resistor in series with a capacitor. A lone
//! capacitor stays, as it stands for a stray one; a lone resistor stays, as it may be an indicator or a bleed; a lone
//! diode across the switch stays, as it is the inverse diode of a transistor.

use crate::circuit::{Circuit, Entry};
use crate::elements::Unknown;
use crate::netlist::{Data, Node};

/// Elements in one chain at most.
const LONGEST: usize = 4;

/// One chain of elements across a pair of nodes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Chain {
    /// Its elements, by index.
    pub entries: Vec<usize>,
    /// Its private nodes.
    pub nodes: Vec<String>,
}

/// The two ends of an element with two terminals.
pub fn ends(entry: &Entry) -> Option<(Unknown, Unknown)> {
    match entry.nodes[..] {
        [a, b] => Some((a, b)),
        _ => None,
    }
}

/// The suppressors across an element with two terminals.
pub fn suppressors(circuit: &Circuit, across: &Entry) -> Vec<Chain> {
    let Some((from, to)) = ends(across) else {
        return Vec::new();
    };
    let mut found: Vec<Chain> = Vec::new();
    let start = Chain {
        entries: Vec::new(),
        nodes: Vec::new(),
    };
    follow(circuit, from, to, &start, &mut found);
    let is_switch = across.kind.is_switch();
    found.retain(|chain| is_suppressor(circuit, chain, is_switch));
    found
}

/// Goes on from a node through every element that may belong to a chain.
fn follow(circuit: &Circuit, at: Unknown, to: Unknown, so_far: &Chain, found: &mut Vec<Chain>) {
    if so_far.entries.len() == LONGEST {
        return;
    }
    for (k, entry) in circuit.entries.iter().enumerate() {
        let Some((a, b)) = ends(entry) else { continue };
        let next = match (a == at, b == at) {
            (true, false) => b,
            (false, true) => a,
            _ => continue,
        };
        if so_far.entries.contains(&k) || !may_belong(entry) {
            continue;
        }
        let mut chain = so_far.clone();
        chain.entries.push(k);
        if next == to {
            found.push(chain);
        } else if is_private(circuit, next) {
            chain
                .nodes
                .push(circuit.node_names[next.0 as usize].clone());
            follow(circuit, next, to, &chain, found);
        }
    }
}

fn may_belong(entry: &Entry) -> bool {
    breaks_over(entry) || matches!(entry.kind.word, "resistor" | "capacitor")
}

fn breaks_over(entry: &Entry) -> bool {
    matches!(
        entry.kind.word,
        "diode" | "zener" | "suppressor_diode" | "varistor"
    )
}

/// A node, not ground, that joins two terminals and nothing else.
fn is_private(circuit: &Circuit, node: Unknown) -> bool {
    let terminals = circuit.entries.iter().flat_map(|entry| &entry.nodes);
    node != Unknown::GROUND && terminals.filter(|&&other| other == node).count() == 2
}

fn is_suppressor(circuit: &Circuit, chain: &Chain, across_switch: bool) -> bool {
    let words: Vec<&str> = chain
        .entries
        .iter()
        .map(|&k| circuit.entries[k].kind.word)
        .collect();
    if across_switch && words == ["diode"] {
        return false;
    }
    let breaks = chain
        .entries
        .iter()
        .any(|&k| breaks_over(&circuit.entries[k]));
    breaks || (words.contains(&"resistor") && words.contains(&"capacitor"))
}

/// True where a text of the tree names one of these as a whole word: `current through catch`.
pub fn mentions(node: &Node, names: &[String]) -> bool {
    match &node.data {
        Data::Scalar(text) => text
            .split(|c: char| !(c.is_alphanumeric() || c == '_' || c == '-'))
            .any(|word| names.iter().any(|name| name == word)),
        Data::List(items) => items.iter().any(|item| mentions(item, names)),
        Data::Map(entries) => entries.iter().any(|entry| mentions(&entry.value, names)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::netlist::Input;
    use crate::run::{Netlist, read};

    fn netlist(elements: &str) -> Netlist {
        let text = format!(
            "elements:\n  supply: {{kind: voltage_source, nodes: [rail, ground], voltage: 24 V}}\n  \
             l: {{kind: inductor, nodes: [rail, drive], inductance: 1 H, series_resistance: 100 Ω}}\n  \
             s: {{kind: switch, nodes: [drive, ground], closed_resistance: 1 mΩ, open_resistance: 1 MΩ, transition: 1 µs, initially: closed}}\n{elements}"
        );
        let input = Input::Text {
            name: "t".into(),
            bytes: text.into_bytes(),
            folder: None,
        };
        read(&input, &[]).unwrap_or_else(|error| panic!("{:?}", error.failure().diagnostics))
    }

    fn names(netlist: &Netlist, across: &str) -> Vec<Vec<String>> {
        let circuit = &netlist.circuit;
        let across = circuit.find(across).expect("it is there");
        suppressors(circuit, across)
            .into_iter()
            .map(|chain| {
                let name = |&k: &usize| circuit.entries[k].name.clone();
                chain.entries.iter().map(name).collect()
            })
            .collect()
    }

    const D: &str = "saturation_current: 1 nA, ideality_factor: 1.8";

    #[test]
    fn a_diode_and_a_series_chain_across_the_coil_are_found() {
        let netlist = netlist(&format!(
            "  d: {{kind: diode, anode: drive, cathode: rail, {D}}}\n  \
             z: {{kind: zener, anode: mid, cathode: drive, {D}, breakdown_voltage: 24 V, breakdown_resistance: 5 Ω}}\n  \
             d2: {{kind: diode, anode: mid, cathode: rail, {D}}}\n  \
             lamp: {{kind: resistor, nodes: [rail, drive], resistance: 10 kΩ}}\n"
        ));
        assert_eq!(names(&netlist, "l"), [vec!["d"], vec!["d2", "z"]]);
        assert_eq!(names(&netlist, "s"), Vec::<Vec<String>>::new());
    }

    #[test]
    fn a_snubber_goes_and_stray_capacitance_and_inverse_diode_stay() {
        let netlist = netlist(&format!(
            "  c: {{kind: capacitor, nodes: [drive, ground], capacitance: 100 pF}}\n  \
             body: {{kind: diode, anode: ground, cathode: drive, {D}}}\n  \
             rs: {{kind: resistor, nodes: [drive, mid], resistance: 470 Ω}}\n  \
             cs: {{kind: capacitor, nodes: [mid, ground], capacitance: 100 nF}}\n"
        ));
        assert_eq!(names(&netlist, "s"), [vec!["rs", "cs"]]);
    }

    #[test]
    fn a_node_with_a_third_element_is_not_private() {
        let netlist = netlist(
            "  rs: {kind: resistor, nodes: [drive, mid], resistance: 470 Ω}\n  \
             cs: {kind: capacitor, nodes: [mid, ground], capacitance: 100 nF}\n  \
             r: {kind: resistor, nodes: [mid, rail], resistance: 1 kΩ}\n",
        );
        assert_eq!(names(&netlist, "s"), Vec::<Vec<String>>::new());
    }
}
