//! The readings that a netlist with a coil and a switch gets when it names none: the kick, the coil's current, how
//! close the core came to saturation.

use crate::diag::{Sink, Sources};
use crate::netlist::{Data, Document, Node, read_fragment};

/// Adds the obvious readings where the netlist has elements but no readings.
pub fn add(document: &mut Document, sources: &mut Sources) {
    if document.root.get("readings").is_some() || !is_transient(document) {
        return;
    }
    let Some(elements) = document.root.get("elements") else {
        return;
    };
    let of_kind = |word: &str| -> Vec<String> {
        elements
            .entries()
            .iter()
            .filter(|entry| kind_of(document, &entry.value) == Some(word))
            .map(|entry| entry.key.clone())
            .collect()
    };
    let switches = [of_kind("switch"), of_kind("contact")].concat();
    let coils = of_kind("coil");
    if switches.is_empty() || coils.is_empty() {
        return;
    }
    let mut text = String::new();
    for switch in &switches {
        let opens = elements
            .get(switch)
            .is_some_and(|node| node.get("opens_at").is_some() || node.get("square").is_some());
        let from = if opens {
            format!(", from: {switch} opens")
        } else {
            String::new()
        };
        text += &format!("kick_{switch}: {{signal: voltage across {switch}, take: peak{from}}}\n");
    }
    for coil in &coils {
        text += &format!("current_{coil}: {{signal: winding current of {coil}, take: peak}}\n");
        text += &format!("saturation_{coil}: {{signal: saturation of {coil}, take: highest}}\n");
    }
    if let Some(node) = read_fragment("the obvious readings", &text, sources, &Sink::new()) {
        document.insert("readings", node);
    }
}

fn is_transient(document: &Document) -> bool {
    document
        .root
        .get("analysis")
        .is_some_and(|node| match &node.data {
            Data::Map(entries) => entries.iter().any(|entry| entry.key == "transient"),
            _ => false,
        })
}

/// The kind that an element names, itself or through its part.
fn kind_of<'a>(document: &'a Document, element: &'a Node) -> Option<&'a str> {
    let own = element.get("kind").and_then(Node::text);
    let part = || {
        let name = element.get("part").and_then(Node::text)?;
        document
            .root
            .get("parts")?
            .get(name)?
            .get("kind")
            .and_then(Node::text)
    };
    own.or_else(part)
}
