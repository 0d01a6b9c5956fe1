//! The parts that a suppressor may be made of: those of the netlist and the ones that come with the program.
//!
//! A part is an entry of `parts:`; here only the figures are read that sort parts and seed a search. What a part does is
//! left to the element that takes its keys.

use crate::diag::{Sink, Sources};
use crate::netlist::{Document, Node, read_document};
use crate::units::{self, Kind, parse_amount};

/// The parts files that come with the program, by name.
const SHIPPED: [(&str, &str); 3] = [
    (
        "parts/diodes.yaml",
        include_str!("../../netlists/parts/diodes.yaml"),
    ),
    (
        "parts/zeners.yaml",
        include_str!("../../netlists/parts/zeners.yaml"),
    ),
    (
        "parts/suppressors.yaml",
        include_str!("../../netlists/parts/suppressors.yaml"),
    ),
];

/// One part.
#[derive(Clone, Debug)]
pub struct Part {
    /// Its name.
    pub name: String,
    /// Its entry of `parts:`.
    pub node: Node,
    /// True where it comes with the program.
    pub shipped: bool,
}

impl Part {
    /// The kind of element that it is.
    pub fn kind(&self) -> &str {
        self.node.get("kind").and_then(Node::text).unwrap_or("")
    }

    /// A word behind a key, such as `both` of `directions`.
    pub fn word(&self, key: &str) -> &str {
        self.node.get(key).and_then(Node::text).unwrap_or("")
    }

    /// The nominal figure behind a key [SI]; None where it is not there or is none.
    pub fn figure(&self, key: &str, kind: Kind) -> Option<f64> {
        amount(self.node.get(key)?, kind)
    }

    /// What it is rated for [SI]; of a pulse its power.
    pub fn rating(&self, key: &str) -> Option<f64> {
        let rating = self.node.get("ratings")?.get(key)?;
        let kind = crate::signals::RatingKind::find(key)?.kind;
        match rating.get("power") {
            Some(power) => amount(power, kind),
            None => amount(rating, kind),
        }
    }

    /// True where it says what power or current it stands: without that it cannot be sized.
    pub fn is_rated(&self) -> bool {
        let keys = ["power", "pulse", "current", "current_mean", "current_surge"];
        keys.iter().any(|key| self.rating(key).is_some())
    }

    /// What makes a part of its kind large or small: the mean current of a diode, the power of a zener, the pulse power
    /// of a suppressor; then the voltage that it blocks.
    fn size(&self) -> (f64, f64) {
        let first = |keys: &[&str]| keys.iter().find_map(|key| self.rating(key)).unwrap_or(0.0);
        let main = match self.kind() {
            "diode" => first(&["current_mean", "current", "current_surge"]),
            "zener" => first(&["power", "pulse"]),
            _ => first(&["pulse", "power"]),
        };
        (main, first(&["reverse_voltage", "voltage"]))
    }
}

fn amount(node: &Node, kind: Kind) -> Option<f64> {
    parse_amount(node.text()?, kind)
        .ok()
        .map(|amount| amount.nominal)
}

/// All parts, smaller ones first.
#[derive(Clone, Debug)]
pub struct Catalogue {
    parts: Vec<Part>,
}

impl Catalogue {
    /// The parts of a netlist and the shipped ones; of two with one name the netlist's.
    pub fn read(document: &Document, sources: &mut Sources) -> Self {
        let mut parts = Vec::new();
        if let Some(own) = document.root.get("parts") {
            add(&mut parts, own, false);
        }
        for (name, text) in SHIPPED {
            let shipped = read_document(name, text.as_bytes(), sources, &Sink::new());
            if let Some(shipped) = shipped.as_ref().and_then(|file| file.root.get("parts")) {
                add(&mut parts, shipped, true);
            }
        }
        // A stable sort: at equal size the netlist's own parts stay first.
        parts.sort_by(|a: &Part, b: &Part| {
            let (a, b) = (a.size(), b.size());
            a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        Catalogue { parts }
    }

    /// The parts of a kind that fit a condition, smaller ones first. Unrated ones are taken only where there are no
    /// rated ones: nothing would ever rule them out.
    pub fn select(&self, kind: &str, fits: impl Fn(&Part) -> bool) -> Vec<Part> {
        let all: Vec<&Part> = self
            .parts
            .iter()
            .filter(|part| part.kind() == kind && fits(part))
            .collect();
        let rated = all.iter().any(|part| part.is_rated());
        all.into_iter()
            .filter(|part| part.is_rated() || !rated)
            .cloned()
            .collect()
    }

    /// The parts of a kind by breakdown voltage, rising; those of one voltage together, smaller ones first.
    pub fn by_breakdown(&self, kind: &str, fits: impl Fn(&Part) -> bool) -> Vec<Vec<Part>> {
        let mut steps: Vec<(f64, Vec<Part>)> = Vec::new();
        for part in self.select(kind, fits) {
            let Some(voltage) = part.figure("breakdown_voltage", units::VOLTAGE) else {
                continue;
            };
            match steps.iter_mut().find(|(known, _)| *known == voltage) {
                Some((_, parts)) => parts.push(part),
                None => steps.push((voltage, vec![part])),
            }
        }
        steps.sort_by(|a, b| a.0.total_cmp(&b.0));
        steps.into_iter().map(|(_, parts)| parts).collect()
    }
}

fn add(parts: &mut Vec<Part>, section: &Node, shipped: bool) {
    for entry in section.entries() {
        if parts.iter().all(|part| part.name != entry.key) {
            parts.push(Part {
                name: entry.key.clone(),
                node: entry.value.clone(),
                shipped,
            });
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn catalogue(text: &str) -> Catalogue {
        let mut sources = Sources::new();
        let document = read_document("t", text.as_bytes(), &mut sources, &Sink::new());
        Catalogue::read(&document.expect("a document"), &mut sources)
    }

    #[test]
    fn every_shipped_part_is_rated_and_has_its_figures() {
        let catalogue = catalogue("title: none");
        assert!(catalogue.parts.len() > 100);
        for part in &catalogue.parts {
            assert!(part.is_rated(), "{}", part.name);
            let breaks = part.figure("breakdown_voltage", units::VOLTAGE).is_some();
            assert_eq!(breaks, part.kind() != "diode", "{}", part.name);
        }
    }

    #[test]
    fn zeners_come_in_the_steps_of_the_standard_series() {
        let steps = catalogue("title: none").by_breakdown("zener", |_| true);
        let voltages: Vec<f64> = steps
            .iter()
            .filter_map(|step| step[0].figure("breakdown_voltage", units::VOLTAGE))
            .collect();
        use crate::sizing::standard_values::{Series, all_between};
        assert_eq!(voltages, all_between(5.1, 100.0, Series::E24));
        assert!(steps.iter().all(|step| step.len() == 2));
        assert!(steps[0][0].rating("power") < steps[0][1].rating("power"));
    }

    #[test]
    fn the_netlists_own_parts_join_in_by_size_and_unrated_ones_do_not() {
        let catalogue = catalogue(
            "parts: {mine: {kind: diode, ratings: {reverse_voltage: 90 V, current_mean: 150 mA}}, bare: {kind: diode}}",
        );
        let diodes = catalogue.select("diode", |_| true);
        let names: Vec<&str> = diodes.iter().map(|part| part.name.as_str()).collect();
        assert_eq!(names[..2], ["signal_diode_0A15_75V", "mine"]);
        assert!(!names.contains(&"bare"));
        let sizes: Vec<(f64, f64)> = diodes.iter().map(Part::size).collect();
        assert!(sizes.is_sorted_by(|a, b| a <= b));
    }
}
