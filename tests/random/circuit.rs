//! Random netlists as text: every kind of element, values over ten decades, all waveforms and switch commands.
//!
//! A tree of two-terminal elements ties every node to ground, so that most circuits are structurally sound; more
//! elements then go anywhere. Dependent sources mostly drive a part of their own, as amplifiers and copies do: a loop of
//! gain above one grows without bound and has no result to compare.

use super::dice::Dice;
use std::fmt::Write;

/// What is asked of a circuit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Task {
    /// The state at rest alone.
    AtRest,
    /// Waveforms from the state at rest.
    FromRest,
    /// Waveforms from uncharged elements.
    FromZero,
}

/// Steps that one circuit may take.
const MOST_STEPS: u32 = 200_000;

/// Every kind that is made, with its weight in the choice of an element that goes anywhere.
const KINDS: &[(&str, f64)] = &[
    ("resistor", 4.0),
    ("capacitor", 3.0),
    ("inductor", 2.0),
    ("coil", 2.0),
    ("coupled_inductors", 1.0),
    ("transformer", 1.0),
    ("magnetic_circuit", 1.0),
    ("cable", 0.7),
    ("voltage_source", 1.0),
    ("current_source", 1.0),
    ("dependent_voltage_source", 0.5),
    ("dependent_current_source", 0.5),
    ("switch", 3.0),
    ("contact", 0.7),
    ("diode", 2.5),
    ("zener", 1.0),
    ("suppressor_diode", 1.0),
];

/// Kinds of which the tree is made: what lets a current through.
const TREE: &[(&str, f64)] = &[
    ("resistor", 5.0),
    ("capacitor", 1.0),
    ("inductor", 1.0),
    ("coil", 1.0),
    ("voltage_source", 2.0),
    ("switch", 1.0),
    ("diode", 1.0),
    ("zener", 0.5),
    ("suppressor_diode", 0.5),
];

/// The netlist of this number under a seed.
pub fn netlist(seed: u64, number: u64) -> String {
    Maker::new(Dice::new(seed, number)).whole(number)
}

pub(super) struct Maker {
    pub(super) dice: Dice,
    nodes: Vec<String>,
    /// Simulated time [s]: the scale of every instant.
    duration: f64,
    pub(super) cores: String,
    elements: String,
    /// Two-terminal elements so far.
    pairs: Vec<String>,
    coils: Vec<String>,
    made: usize,
}

impl Maker {
    fn new(mut dice: Dice) -> Self {
        let duration = dice.over_decades(1e-7, 1.0);
        let count = 1 + dice.below(7);
        Maker {
            nodes: std::iter::once("ground".to_owned())
                .chain((1..=count).map(|k| format!("n{k}")))
                .collect(),
            duration,
            dice,
            cores: String::new(),
            elements: String::new(),
            pairs: Vec::new(),
            coils: Vec::new(),
            made: 0,
        }
    }

    fn whole(mut self, number: u64) -> String {
        for node in 1..self.nodes.len() {
            let kind = self.weighted(TREE);
            let other = self.dice.below(node);
            let ends = self.ends(node, other);
            self.element(kind, ends);
        }
        let more = 1 + self.dice.below(self.nodes.len() + 2);
        for _ in 0..more {
            let kind = self.weighted(KINDS);
            let (a, b) = self.two_nodes();
            self.element(kind, (a, b));
        }
        let task = self.dice.one_of(&[
            Task::AtRest,
            Task::FromRest,
            Task::FromRest,
            Task::FromRest,
            Task::FromZero,
            Task::FromZero,
        ]);
        self.text(number, task)
    }

    fn text(mut self, number: u64, task: Task) -> String {
        let mut out = format!("title: random circuit {number}\n");
        if self.dice.chance(0.3) {
            let ambient = self.dice.between(-40.0, 100.0).round();
            writeln!(out, "ambient: {ambient} °C").expect("a text grows");
        }
        if self.elements.contains("material: ") || !self.cores.is_empty() {
            out.push_str(
                "materials:\n  iron: {initial_permeability: 2500, saturation: 1.4 T}\n  \
                 solid_iron: {initial_permeability: 1500, saturation: 1.6 T, resistivity: 0.12 µΩ m}\n  \
                 ferrite: {curve: [[0 A/m, 0 T], [40 A/m, 0.2 T], [150 A/m, 0.36 T], [1 kA/m, 0.44 T]]}\n  \
                 powder: {initial_permeability: 60, roll_off: {half_field: 8 kA/m, exponent: 1.6}}\n  \
                 hot_ferrite: {initial_permeability: 2300, saturation: [[-50 °C, 0.5 T], [120 °C, 0.36 T]]}\n",
            );
        }
        if !self.cores.is_empty() {
            write!(out, "cores:\n{}", self.cores).expect("a text grows");
        }
        write!(out, "elements:\n{}", self.elements).expect("a text grows");
        match task {
            Task::AtRest => out.push_str("analysis: operating_point\n"),
            Task::FromRest | Task::FromZero => {
                let start = if task == Task::FromZero {
                    ", start: zero"
                } else {
                    ""
                };
                writeln!(
                    out,
                    "analysis: {{transient: {{duration: {:e} s, most_steps: {MOST_STEPS}{start}}}}}",
                    self.duration
                )
                .expect("a text grows");
            }
        }
        out.push_str("readings:\n");
        let take: &[&str] = if task == Task::AtRest {
            &["final"]
        } else {
            &["highest", "lowest", "mean", "final"]
        };
        for node in &self.nodes[1..] {
            for take in take {
                writeln!(
                    out,
                    "  {node}_{take}: {{signal: voltage at {node}, take: {take}}}"
                )
                .expect("a text grows");
            }
        }
        for (k, pair) in self.pairs.iter().enumerate() {
            let signal = ["current through", "power in", "voltage across", "energy in"][k % 4];
            for take in take {
                writeln!(
                    out,
                    "  {pair}_{take}: {{signal: {signal} {pair}, take: {take}}}"
                )
                .expect("a text grows");
            }
        }
        out
    }

    fn weighted(&mut self, kinds: &[(&'static str, f64)]) -> &'static str {
        let whole: f64 = kinds.iter().map(|kind| kind.1).sum();
        let mut at = self.dice.between(0.0, whole);
        for (word, weight) in kinds {
            at -= weight;
            if at < 0.0 {
                return word;
            }
        }
        kinds[0].0
    }

    fn ends(&mut self, a: usize, b: usize) -> (String, String) {
        let (a, b) = if self.dice.chance(0.5) {
            (a, b)
        } else {
            (b, a)
        };
        (self.nodes[a].clone(), self.nodes[b].clone())
    }

    /// Two nodes, seldom the same one.
    pub(super) fn two_nodes(&mut self) -> (String, String) {
        let count = self.nodes.len();
        let a = self.dice.below(count);
        let mut b = self.dice.below(count);
        if a == b && !self.dice.chance(0.1) {
            b = (a + 1) % count;
        }
        self.ends(a, b)
    }

    /// A value with its unit, written in one of the ways that a person writes it.
    pub(super) fn written(&mut self, value: f64, unit: &str) -> String {
        let prefixes = [
            (1e-9, "n"),
            (1e-6, "µ"),
            (1e-3, "m"),
            (1e3, "k"),
            (1e6, "M"),
        ];
        if self.dice.chance(0.5)
            && let Some((size, prefix)) = prefixes
                .iter()
                .find(|(size, _)| (1.0..1000.0).contains(&(value.abs() / size)))
        {
            return format!("{:.4} {prefix}{unit}", value / size);
        }
        format!("{value:.4e} {unit}")
    }

    pub(super) fn quantity(&mut self, low: f64, high: f64, unit: &str) -> String {
        let value = self.dice.over_decades(low, high);
        self.written(value, unit)
    }

    fn resistance(&mut self) -> String {
        self.quantity(1e-3, 1e7, "Ω")
    }

    fn inductance(&mut self) -> String {
        self.quantity(1e-9, 10.0, "H")
    }

    fn capacitance(&mut self) -> String {
        self.quantity(1e-12, 1e-2, "F")
    }

    /// With a chance, a key behind a comma.
    pub(super) fn perhaps(
        &mut self,
        chance: f64,
        key: &str,
        value: impl FnOnce(&mut Self) -> String,
    ) -> String {
        if self.dice.chance(chance) {
            format!(", {key}: {}", value(self))
        } else {
            String::new()
        }
    }

    fn instant(&mut self) -> f64 {
        self.duration * self.dice.share()
    }

    fn name(&mut self, kind: &str) -> String {
        self.made += 1;
        format!("{kind}{}", self.made)
    }

    pub(super) fn line(&mut self, name: &str, kind: &str, keys: &str) {
        writeln!(self.elements, "  {name}: {{kind: {kind}, {keys}}}").expect("a text grows");
    }

    fn element(&mut self, kind: &'static str, (a, b): (String, String)) {
        let name = self.name(kind);
        let nodes = format!("nodes: [{a}, {b}]");
        let keys = match kind {
            "resistor" => format!("{nodes}, resistance: {}", self.resistance()),
            "capacitor" => self.capacitor(&nodes),
            "inductor" => self.inductor(&nodes),
            "coil" => self.coil(&name, &nodes),
            "coupled_inductors" => return self.coupled(&name, &a, &b),
            "transformer" => return self.transformer(&name, &a, &b),
            "magnetic_circuit" => return self.magnetic_circuit(&name, &a, &b),
            "cable" => return self.cable(&name, &a, &b),
            "voltage_source" => self.source(&nodes, "voltage", (1e-4, 1e3), "V"),
            "current_source" => self.source(&nodes, "current", (1e-7, 10.0), "A"),
            "dependent_voltage_source" => self.dependent(&name, &a, "voltage"),
            "dependent_current_source" => self.dependent(&name, &a, "current"),
            "switch" => self.switch(&nodes, (1e-3, 10.0)),
            "contact" => self.contact(&nodes),
            "diode" | "zener" => self.diode(&a, &b, kind == "zener"),
            "suppressor_diode" => self.suppressor(&nodes),
            other => panic!("no maker for `{other}`"),
        };
        self.line(&name, kind, &keys);
        if kind == "coil" {
            self.coils.push(name.clone());
        }
        self.pairs.push(name);
    }

    fn capacitor(&mut self, nodes: &str) -> String {
        let capacitance = self.capacitance();
        let series = self.perhaps(0.3, "series_resistance", Self::resistance);
        let inductance = self.perhaps(0.1, "series_inductance", |maker| {
            maker.quantity(1e-10, 1e-6, "H")
        });
        let leakage = self.perhaps(0.3, "leakage_resistance", |maker| {
            maker.quantity(1e3, 1e12, "Ω")
        });
        let initial = self.perhaps(0.2, "initial_voltage", |maker| {
            let value = maker.dice.between(-100.0, 100.0);
            maker.written(value, "V")
        });
        format!("{nodes}, capacitance: {capacitance}{series}{inductance}{leakage}{initial}")
    }

    fn inductor(&mut self, nodes: &str) -> String {
        let inductance = self.inductance();
        let series = self.perhaps(0.7, "series_resistance", Self::resistance);
        let initial = self.perhaps(0.2, "initial_current", |maker| {
            let value = maker.dice.between(-1.0, 1.0);
            maker.written(value, "A")
        });
        format!("{nodes}, inductance: {inductance}{series}{initial}")
    }

    fn coil(&mut self, name: &str, nodes: &str) -> String {
        let core = self.core_keys();
        writeln!(self.cores, "  {name}_core: {{{core}}}").expect("a text grows");
        let turns = self.dice.over_decades(1.0, 1e4).round().max(1.0);
        let resistance = self.quantity(1e-3, 1e3, "Ω");
        let copper = self.copper(turns, &resistance);
        let capacitance = if self.dice.chance(0.3) {
            "0 F".to_owned()
        } else {
            self.quantity(1e-13, 1e-9, "F")
        };
        let initial = self.perhaps(0.1, "initial_current", |maker| {
            let value = maker.dice.between(-1.0, 1.0);
            maker.written(value, "A")
        });
        format!(
            "{nodes}, core: {name}_core, turns: {turns}, {copper}, self_capacitance: {capacitance}{initial}"
        )
    }

    /// A resistance, or now and then a wire with its skin and proximity effect.
    pub(super) fn copper(&mut self, turns: f64, resistance: &str) -> String {
        if !self.dice.chance(0.2) {
            return format!("resistance: {resistance}");
        }
        let diameter = self.dice.over_decades(0.03, 2.0);
        let wire = match self.dice.below(3) {
            0 => format!(
                "{{litz: {{strands: 20, strand_diameter: {:.4} mm}}}}",
                diameter / 5.0
            ),
            _ => format!("{{diameter: {diameter:.4} mm}}"),
        };
        let layers = (1.0 + self.dice.below(6) as f64).min(turns);
        let law = self.dice.one_of(&["dowell", "ferreira", "none"]);
        let layers = match law {
            "none" => String::new(),
            _ => format!(", layers: {layers}"),
        };
        format!("wire: {wire}, skin_and_proximity: {law}{layers}")
    }

    fn coupled(&mut self, name: &str, a: &str, b: &str) {
        let count = 2 + self.dice.below(2);
        let mut windings = Vec::new();
        for k in 0..count {
            let (a, b) = if k == 0 {
                (a.to_owned(), b.to_owned())
            } else {
                self.two_nodes()
            };
            let inductance = self.quantity(1e-7, 1.0, "H");
            let series = self.perhaps(0.8, "series_resistance", |maker| {
                maker.quantity(1e-3, 1e3, "Ω")
            });
            windings.push(format!(
                "w{k}: {{nodes: [{a}, {b}], inductance: {inductance}{series}}}"
            ));
        }
        let coefficient = match self.dice.below(4) {
            0 => 1.0,
            1 => self.dice.between(0.9, 1.0),
            _ => self.dice.between(-0.4, 0.9),
        };
        let keys = format!(
            "coefficient: {coefficient:.4}, windings: {{{}}}",
            windings.join(", ")
        );
        self.line(name, "coupled_inductors", &keys);
    }

    fn cable(&mut self, name: &str, a: &str, b: &str) {
        let (c, d) = if self.dice.chance(0.6) {
            ("ground".to_owned(), "ground".to_owned())
        } else {
            self.two_nodes()
        };
        let sections = 1 + self.dice.below(6);
        // 6.9 ns/m: long enough that the wave passes to and fro hundreds of times at most.
        let length = self.duration / 6.9e-9 * self.dice.over_decades(3e-3, 10.0);
        let length = self.written(length, "m");
        let resistance = self.quantity(1e-3, 1.0, "Ω/m");
        let keys = format!(
            "nodes: [{a}, {b}], return: [{c}, {d}], length: {length}, resistance: {resistance}, \
             inductance: 0.6 µH/m, capacitance: 80 pF/m, sections: {sections}"
        );
        self.line(name, "cable", &keys);
    }

    fn level(&mut self, (low, high): (f64, f64), unit: &str) -> String {
        let sign = self.dice.one_of(&[1.0, 1.0, -1.0]);
        let value = sign * self.dice.over_decades(low, high);
        self.written(value, unit)
    }

    fn time(&mut self, value: f64) -> String {
        self.written(value, "s")
    }

    fn source(&mut self, nodes: &str, key: &str, range: (f64, f64), unit: &str) -> String {
        let wave = match self.dice.below(6) {
            0 => self.steps(range, unit),
            1 => self.points(range, unit),
            2 => self.square(range, unit),
            3 => self.sine(range, unit),
            _ => self.level(range, unit),
        };
        let series = self.perhaps(0.5, "series_resistance", |maker| {
            maker.quantity(1e-3, 1e4, "Ω")
        });
        format!("{nodes}, {key}: {wave}{series}")
    }

    /// Instants in order of time.
    fn instants(&mut self, most: usize) -> Vec<f64> {
        let count = 1 + self.dice.below(most);
        let mut all: Vec<f64> = (0..count).map(|_| self.instant()).collect();
        all.sort_by(f64::total_cmp);
        all
    }

    fn steps(&mut self, range: (f64, f64), unit: &str) -> String {
        let mut pairs = Vec::new();
        for instant in self.instants(4) {
            let (at, level) = (self.exact(instant), self.level(range, unit));
            pairs.push(format!("[{at}, {level}]"));
        }
        let edge = if self.dice.chance(0.4) {
            String::new()
        } else {
            // Shorter than most distances between the instants, so that edges rarely meet.
            let edge = self.duration * self.dice.over_decades(1e-9, 1e-3);
            format!(", edge: {}", self.time(edge))
        };
        format!("{{steps: {{at: [{}]{edge}}}}}", pairs.join(", "))
    }

    fn points(&mut self, range: (f64, f64), unit: &str) -> String {
        let mut pairs = Vec::new();
        for instant in self.instants(6) {
            let (at, level) = (self.exact(instant), self.level(range, unit));
            pairs.push(format!("[{at}, {level}]"));
        }
        format!("{{points: [{}]}}", pairs.join(", "))
    }

    /// An instant in full, so that the order of a list stands.
    fn exact(&mut self, instant: f64) -> String {
        format!("{instant:e} s")
    }

    fn square(&mut self, range: (f64, f64), unit: &str) -> String {
        let (low, high) = (self.level(range, unit), self.level(range, unit));
        let frequency = self.dice.over_decades(0.5, 30.0) / self.duration;
        let duty = self.dice.between(0.1, 0.9);
        let edge = self.perhaps(0.5, "edge", |maker| {
            let edge = maker.dice.over_decades(1e-6, 0.09) / frequency;
            maker.time(edge)
        });
        let delay = self.perhaps(0.3, "delay", |maker| {
            let delay = maker.instant();
            maker.time(delay)
        });
        let frequency = self.written(frequency, "Hz");
        format!(
            "{{square: {{low: {low}, high: {high}, frequency: {frequency}, duty: {duty:.3}{edge}{delay}}}}}"
        )
    }

    fn sine(&mut self, range: (f64, f64), unit: &str) -> String {
        let frequency = self.dice.over_decades(0.3, 30.0) / self.duration;
        let frequency = self.written(frequency, "Hz");
        let amplitude = self.quantity(range.0, range.1, unit);
        let offset = self.perhaps(0.3, "offset", |maker| maker.level(range, unit));
        let phase = self.perhaps(0.3, "phase", |maker| {
            format!("{:.0} deg", maker.dice.between(-180.0, 180.0))
        });
        let delay = self.perhaps(0.3, "delay", |maker| {
            let delay = maker.instant();
            maker.time(delay)
        });
        format!(
            "{{sine: {{amplitude: {amplitude}, frequency: {frequency}{offset}{phase}{delay}}}}}"
        )
    }

    /// A dependent source that drives a part of its own, or seldom one that is part of what it follows.
    fn dependent(&mut self, name: &str, a: &str, what: &str) -> String {
        let own = if self.dice.chance(0.9) {
            let own = format!("{name}_out");
            self.nodes.push(own.clone());
            let resistance = self.resistance();
            let load = self.name("resistor");
            self.line(
                &load,
                "resistor",
                &format!("nodes: [{own}, ground], resistance: {resistance}"),
            );
            if self.dice.chance(0.5) {
                let capacitance = self.capacitance();
                let store = self.name("capacitor");
                let stray = self.resistance();
                self.line(
                    &store,
                    "capacitor",
                    &format!(
                        "nodes: [{own}, ground], capacitance: {capacitance}, series_resistance: {stray}"
                    ),
                );
            }
            // Nobody else meets this node: what is driven does not act back.
            self.nodes.pop();
            own
        } else {
            a.to_owned()
        };
        let (signal, per) = match self.dice.below(3) {
            0 if !self.pairs.is_empty() => {
                let which = self.dice.below(self.pairs.len());
                (format!("current through {}", self.pairs[which]), "A")
            }
            1 if !self.coils.is_empty() => {
                let which = self.dice.below(self.coils.len());
                (format!("flux linkage of {}", self.coils[which]), "Wb")
            }
            _ => {
                let which = self.dice.below(self.nodes.len() - 1) + 1;
                (format!("voltage at {}", self.nodes[which]), "V")
            }
        };
        let own_unit = if what == "voltage" { "V" } else { "A" };
        let gain = self.dice.one_of(&[1.0, -1.0]) * self.dice.over_decades(1e-2, 10.0);
        let gain = if own_unit == per {
            format!("{gain:.4}")
        } else {
            format!("{gain:.4} {own_unit}/{per}")
        };
        format!("nodes: [{own}, ground], follows: {signal}, gain: {gain}")
    }

    /// Keys of a switch without a breakdown; its closed resistance lies in a range.
    fn switched(&mut self, nodes: &str, closed: (f64, f64)) -> String {
        let closed = self.quantity(closed.0, closed.1, "Ω");
        let open = self.quantity(1e3, 1e12, "Ω");
        let transition = if self.dice.chance(0.4) {
            "0 s".to_owned()
        } else {
            let transition = self.duration * self.dice.over_decades(1e-9, 1e-2);
            self.time(transition)
        };
        let command = match self.dice.below(6) {
            0 => {
                let frequency = self.dice.over_decades(0.5, 30.0) / self.duration;
                let frequency = self.written(frequency, "Hz");
                let duty = self.dice.between(0.1, 0.9);
                format!("square: {{frequency: {frequency}, duty: {duty:.3}}}")
            }
            1 => self.watch(),
            2 | 3 => {
                let word = self.dice.one_of(&["open", "closed"]);
                let first = if word == "open" {
                    "closes_at"
                } else {
                    "opens_at"
                };
                let instant = self.instant();
                let at = self.time(instant);
                format!("initially: {word}, {first}: [{at}]")
            }
            4 => {
                let instants = self.instants(6);
                let list = |from: usize| {
                    let own: Vec<String> = instants
                        .iter()
                        .skip(from)
                        .step_by(2)
                        .map(|instant| format!("{instant:e} s"))
                        .collect();
                    own.join(", ")
                };
                let (opens, closes) = (list(0), list(1));
                let closes = if closes.is_empty() {
                    String::new()
                } else {
                    format!(", closes_at: [{closes}]")
                };
                format!("initially: closed, opens_at: [{opens}]{closes}")
            }
            _ => {
                let word = self.dice.one_of(&["open", "closed"]);
                format!("initially: {word}")
            }
        };
        format!(
            "{nodes}, closed_resistance: {closed}, open_resistance: {open}, transition: {transition}, {command}"
        )
    }

    fn switch(&mut self, nodes: &str, closed: (f64, f64)) -> String {
        let keys = self.switched(nodes, closed);
        let breakdown = self.perhaps(0.2, "breakdown_voltage", |maker| {
            let voltage = maker.quantity(5.0, 1e3, "V");
            let resistance = maker.quantity(1e-3, 100.0, "Ω");
            format!("{voltage}, breakdown_resistance: {resistance}")
        });
        format!("{keys}{breakdown}")
    }

    /// A contact; its gap opens within the simulated time or never.
    fn contact(&mut self, nodes: &str) -> String {
        let keys = self.switched(nodes, (1e-3, 1.0));
        let bounce = self.perhaps(0.5, "bounce", |maker| {
            let count = 1 + maker.dice.below(4);
            let first = maker.duration * maker.dice.over_decades(1e-4, 0.1);
            let first = maker.time(first);
            let restitution = maker.dice.between(0.2, 0.8);
            let touch = maker.perhaps(0.3, "touch", |maker| {
                let touch = maker.duration * maker.dice.over_decades(1e-4, 0.1);
                maker.time(touch)
            });
            format!(
                "{{count: {count}, first_duration: {first}, restitution: {restitution:.3}{touch}}}"
            )
        });
        let arc = self.perhaps(0.6, "arc", |maker| {
            let metal = maker.dice.one_of(&[
                "material: silver",
                "material: tungsten",
                "minimum_voltage: 9 V, minimum_current: 0.15 A",
            ]);
            let capacitance = maker.quantity(1e-12, 1e-9, "F");
            let gap = maker.quantity(5e-5, 5e-3, "m");
            let opening = maker.quantity(1e-2, 1.0, "m/s");
            let closing = maker.quantity(1e-2, 1.0, "m/s");
            let column = maker.perhaps(0.3, "column_field", |maker| {
                maker.quantity(1e2, 1e4, "V/m")
            });
            format!(
                "{{{metal}, capacitance: {capacitance}, gap: {gap}, opening_speed: {opening}, closing_speed: {closing}{column}}}"
            )
        });
        format!("{keys}{bounce}{arc}")
    }

    /// A switch that watches a signal; the thresholds lie apart, as they must.
    fn watch(&mut self) -> String {
        let (signal, unit) = if self.pairs.is_empty() || self.dice.chance(0.6) {
            let which = self.dice.below(self.nodes.len() - 1) + 1;
            (format!("voltage at {}", self.nodes[which]), "V")
        } else {
            let which = self.dice.below(self.pairs.len());
            (format!("current through {}", self.pairs[which]), "A")
        };
        let low = self.dice.one_of(&[1.0, -1.0]) * self.dice.over_decades(1e-2, 50.0);
        let high = low + low.abs() * self.dice.between(0.1, 3.0);
        let (low, high) = (self.written(low, unit), self.written(high, unit));
        if self.dice.chance(0.5) {
            format!("watches: {{signal: {signal}, closes_above: {high}, opens_below: {low}}}")
        } else {
            format!("watches: {{signal: {signal}, opens_above: {high}, closes_below: {low}}}")
        }
    }

    fn charge_keys(&mut self) -> String {
        let capacitance = self.perhaps(0.7, "junction_capacitance", |maker| {
            maker.quantity(1e-13, 1e-8, "F")
        });
        let exponent = self.perhaps(0.3, "depletion_exponent", |maker| {
            format!("{:.2}", maker.dice.between(0.0, 0.9))
        });
        let transit = self.perhaps(0.3, "transit_time", |maker| {
            maker.quantity(1e-10, 1e-6, "s")
        });
        format!("{capacitance}{exponent}{transit}")
    }

    fn diode(&mut self, a: &str, b: &str, zener: bool) -> String {
        let saturation = self.quantity(1e-15, 1e-5, "A");
        let factor = self.dice.between(1.0, 2.0);
        let series = self.perhaps(0.6, "series_resistance", |maker| {
            maker.quantity(1e-3, 100.0, "Ω")
        });
        let charge = self.charge_keys();
        let chance = if zener { 1.0 } else { 0.2 };
        let breakdown = self.perhaps(chance, "breakdown_voltage", |maker| {
            let voltage = maker.dice.over_decades(2.5, 600.0);
            let resistance = maker.quantity(1e-3, 100.0, "Ω");
            format!("{voltage:.3} V, breakdown_resistance: {resistance}")
        });
        format!(
            "anode: {a}, cathode: {b}, saturation_current: {saturation}, ideality_factor: {factor:.3}{series}{charge}{breakdown}"
        )
    }

    fn suppressor(&mut self, nodes: &str) -> String {
        let directions = self.dice.one_of(&["one", "both"]);
        let voltage = self.dice.over_decades(5.0, 400.0);
        let resistance = self.quantity(1e-3, 10.0, "Ω");
        let key = if directions == "one" {
            "junction_capacitance"
        } else {
            "capacitance"
        };
        let capacitance = self.perhaps(0.6, key, |maker| maker.quantity(1e-12, 1e-8, "F"));
        format!(
            "{nodes}, directions: {directions}, breakdown_voltage: {voltage:.3} V, breakdown_resistance: {resistance}{capacitance}"
        )
    }
}
