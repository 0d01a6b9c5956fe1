//! Windings on legs: transformers, magnetic circuits, iron that conducts.

use super::circuit::Maker;
use std::fmt::Write;

impl Maker {
    /// Nodes, turns, copper and capacitance of a winding; the first goes where it is sent.
    fn winding_keys(&mut self, ends: Option<(&str, &str)>) -> String {
        let (a, b) = match ends {
            Some((a, b)) => (a.to_owned(), b.to_owned()),
            None => self.two_nodes(),
        };
        let turns = self.dice.over_decades(1.0, 3e3).round().max(1.0);
        let resistance = self.quantity(1e-3, 1e3, "Ω");
        let copper = self.copper(turns, &resistance);
        let capacitance = self.perhaps(0.3, "self_capacitance", |maker| {
            maker.quantity(1e-13, 1e-9, "F")
        });
        let initial = self.perhaps(0.1, "initial_current", |maker| {
            let value = maker.dice.between(-1.0, 1.0);
            maker.written(value, "A")
        });
        format!("nodes: [{a}, {b}], turns: {turns}, {copper}{capacitance}{initial}")
    }

    pub(super) fn transformer(&mut self, name: &str, a: &str, b: &str) {
        let core = self.core_keys();
        writeln!(self.cores, "  {name}_core: {{{core}}}").expect("a text grows");
        let count = 2 + self.dice.below(2);
        let (way, build) = match self.dice.below(5) {
            0 => ("coefficient: 1".to_owned(), ""),
            1 => {
                let coefficient = self.dice.between(0.3, 1.0);
                (format!("coefficient: {coefficient:.4}"), "")
            }
            2 => (
                "concentric: {breadth: 20 mm, spacing: 0.3 mm}".to_owned(),
                ", build: 1.5 mm",
            ),
            3 if count == 2 => ("leakage: 0 H".to_owned(), ""),
            _ if count == 2 => (format!("leakage: {}", self.quantity(1e-9, 1e-1, "H")), ""),
            // What is told of three windings may contradict itself; this does not.
            _ => (
                "coefficient: {w0-w1: 0.99, w0-w2: 0.95, w1-w2: 0.96}".to_owned(),
                "",
            ),
        };
        let mut windings = Vec::new();
        for k in 0..count {
            let keys = self.winding_keys((k == 0).then_some((a, b)));
            windings.push(format!("w{k}: {{{keys}{build}}}"));
        }
        let between = self.perhaps(0.3, "interwinding_capacitance", |maker| {
            maker.quantity(1e-13, 1e-9, "F")
        });
        let keys = format!(
            "core: {name}_core, {way}{between}, windings: {{{}}}",
            windings.join(", ")
        );
        self.line(name, "transformer", &keys);
    }

    pub(super) fn magnetic_circuit(&mut self, name: &str, a: &str, b: &str) {
        let count = 2 + self.dice.below(3);
        let mut legs = Vec::new();
        for k in 0..count {
            let core = self.core_keys();
            let between = self.dice.one_of(&["[p, q]", "[q, p]"]);
            legs.push(format!("l{k}: {{{core}, between: {between}}}"));
        }
        let mut windings = Vec::new();
        for k in 0..1 + self.dice.below(3) {
            let keys = self.winding_keys((k == 0).then_some((a, b)));
            let leg = self.dice.below(count);
            let leakage = self.perhaps(0.3, "leakage", |maker| maker.quantity(1e-9, 1e-2, "H"));
            windings.push(format!("w{k}: {{{keys}, leg: l{leg}{leakage}}}"));
        }
        let leg = self.dice.below(count);
        let ring = self.perhaps(0.3, "shading_rings", |maker| {
            let resistance = maker.quantity(1e-5, 1e-1, "Ω");
            format!("{{ring: {{leg: l{leg}, resistance: {resistance}}}}}")
        });
        let keys = format!(
            "legs: {{{}}}, windings: {{{}}}{ring}",
            legs.join(", "),
            windings.join(", ")
        );
        self.line(name, "magnetic_circuit", &keys);
    }
}
