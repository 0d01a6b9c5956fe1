//! The spreads of a netlist, and a corner of them in words: `supply high, cold, k1_coil_zener high`.

use super::corners::{Side, Worst};
use crate::circuit::Circuit;
use crate::netlist::Value;
use crate::units::Kind;

/// A change of a margin that is too small to be told.
const UNTOLD: f64 = 2e-3;

/// One value that has a spread [SI].
#[derive(Clone, Debug)]
pub struct Spread {
    /// Its handle.
    pub value: Value,
    /// Its path.
    pub path: String,
    /// What it measures.
    pub kind: Kind,
    /// As written.
    pub nominal: f64,
    /// Its ends.
    pub ends: (f64, f64),
}

impl Spread {
    /// The value at a side of the spread [SI].
    pub fn at(&self, side: Side) -> f64 {
        match side {
            Side::Low => self.ends.0,
            Side::Nominal => self.nominal,
            Side::High => self.ends.1,
        }
    }
}

/// All spreads of a circuit's parameters, in the order of the netlist.
pub fn spreads(circuit: &Circuit) -> Vec<Spread> {
    circuit
        .parameters
        .iter()
        .filter(|(_, parameter)| parameter.has_spread())
        .map(|(value, parameter)| Spread {
            value,
            path: parameter.path.clone(),
            kind: parameter.kind,
            nominal: parameter.nominal,
            ends: parameter.spread,
        })
        .collect()
}

/// The worst corner of a margin in words, without the spreads that hardly matter to it; `nominal` where none does.
pub fn in_words(circuit: &Circuit, spreads: &[Spread], worst: &Worst, which: usize) -> String {
    let corner = worst.corner(which);
    let words: Vec<String> = spreads
        .iter()
        .enumerate()
        .filter(|(k, _)| {
            let relief = worst.relief(which, *k);
            relief.is_none_or(|relief| relief.abs() > UNTOLD)
        })
        .filter_map(|(k, spread)| word(circuit, spread, corner[k]))
        .collect();
    if words.is_empty() {
        "nominal values".into()
    } else {
        words.join(", ")
    }
}

/// One spread's side: `supply high`, `cold`, `k1_coil resistance low`; None where it is as written.
fn word(circuit: &Circuit, spread: &Spread, side: Side) -> Option<String> {
    let (low, high) = if spread.path == "ambient" {
        ("cold", "hot")
    } else {
        ("low", "high")
    };
    let end = match side {
        Side::Low => low,
        Side::High => high,
        Side::Nominal => return None,
    };
    if spread.path == "ambient" {
        return Some(end.to_owned());
    }
    let mut steps = spread.path.split('.');
    let section = steps.next().unwrap_or("");
    let (name, keys): (&str, Vec<&str>) = match steps.next() {
        Some(name) => (name, steps.collect()),
        None => (section, Vec::new()),
    };
    let kind = circuit.find(name).map_or("", |entry| entry.kind.word);
    let key = keys.join(" ").replace('_', " ");
    // What an element is for needs no naming: a supply is its voltage.
    let own = matches!(
        (kind, key.as_str()),
        ("voltage_source", "voltage")
            | ("current_source", "current")
            | ("resistor", "resistance")
            | ("capacitor", "capacitance")
            | ("inductor", "inductance")
    ) || (section == "parts" && key == "breakdown voltage");
    if own || key.is_empty() {
        Some(format!("{name} {end}"))
    } else {
        Some(format!("{name} {key} {end}"))
    }
}
