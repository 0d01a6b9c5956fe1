//! Cable: a go and a return conductor as a chain of T sections, each half series impedance, shunt capacitance, half
//! series impedance. Per-metre values are those of the loop, go and return together.
//!
//! ```text
//! near  --- R/2 L/2 ---+--- R L ---+--- R/2 L/2 ---  far        I_k in the series branches,
//!                      C           C                            u_k across the capacitances
//! return near ---------+-----------+--------------- return far
//! ```
//! The loop carries the currents I_k. Where both ends of the return are one node, all of the drop lies in the go
//! conductor. Otherwise half of it lies in each, and a current J that comes back by another way flows in both
//! conductors side by side: go carries I + J/2, return I - J/2. A loop inductance tells nothing of the field of J, so J
//! meets the conductors' resistance alone: (v_near + v_return_near) - (v_far + v_return_far) = J R length / 2.

use super::claims::{Claims, Measure, Wanted};
use super::element::{Element, Energy, Path, PathKind, Point, Unknown, Unsound, sum};
use super::kind::{ElementKind, Made, Surroundings, Terminal};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "cable",
    about: "A two-wire line as a chain of sections; per-metre values are those of the loop.",
    keys: &[
        Key::required(
            "nodes",
            Takes::Names(2),
            "near and far node of the go conductor",
        ),
        Key::required(
            "return",
            Takes::Names(2),
            "near and far node of the return conductor",
        ),
        Key::required(
            "length",
            Takes::Quantity(units::LENGTH),
            "length of the cable",
        ),
        Key::required(
            "resistance",
            Takes::Quantity(units::RESISTANCE_PER_METRE),
            "loop resistance per metre",
        ),
        Key::required(
            "inductance",
            Takes::Quantity(units::INDUCTANCE_PER_METRE),
            "loop inductance per metre",
        ),
        Key::required(
            "capacitance",
            Takes::Quantity(units::CAPACITANCE_PER_METRE),
            "capacitance between the conductors per metre",
        ),
        Key::default(
            "sections",
            Takes::Count,
            "8",
            "number of sections; each should be short against the wavelength that matters",
        ),
    ],
    read,
};

/// Most sections that one cable may have: a bound on memory, far above what any transient needs.
const MOST_SECTIONS: usize = 100_000;

struct Cable {
    keys: [Value; 4],
    asked_sections: usize,
    shared_return: bool,
    /// Series resistance [Ω] and inductance [H] of one whole section, go and return together.
    resistance: f64,
    inductance: f64,
    /// Shunt capacitance of one section [F].
    capacitance: f64,
    terminals: [Unknown; 4],
    /// Loop currents from near to far.
    currents: Vec<Unknown>,
    /// Voltages across the capacitances from near to far, one fewer than currents.
    voltages: Vec<Unknown>,
    /// The current that both conductors carry side by side; none with a shared return.
    common: Option<Unknown>,
    /// Terminals whose currents others follow, each with the unknown that carries it.
    followed: Vec<(usize, Unknown)>,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let go = fields.names("nodes");
    let back = fields.names("return");
    let keys = [
        fields.positive("length"),
        fields.non_negative("resistance"),
        fields.non_negative("inductance"),
        fields.non_negative("capacitance"),
    ];
    let sections = fields.count("sections");
    let (go, back, sections) = (go?, back?, sections?);
    let [length, resistance, inductance, capacitance] = keys;
    if sections > MOST_SECTIONS {
        fields.error(
            "sections",
            "out-of-range",
            format!("a cable of {sections} sections is too fine"),
            "too many",
            Some(&format!(
                "at most {MOST_SECTIONS}; a few per wavelength are enough"
            )),
        );
        return None;
    }
    let element = Cable {
        keys: [length?, resistance?, inductance?, capacitance?],
        asked_sections: sections,
        shared_return: back[0].text == back[1].text,
        resistance: 0.0,
        inductance: 0.0,
        capacitance: 0.0,
        terminals: [Unknown::GROUND; 4],
        currents: Vec::new(),
        voltages: Vec::new(),
        common: None,
        followed: Vec::new(),
    };
    let names = ["near", "far", "return_near", "return_far"];
    let terminals = names
        .iter()
        .zip(go.into_iter().chain(back))
        .map(|(name, node)| Terminal {
            name: (*name).to_string(),
            node,
        })
        .collect();
    Some(Made::new(terminals, element))
}

impl Cable {
    /// Fraction of a section's series impedance in branch k: half at both ends of the chain.
    fn share(&self, k: usize) -> f64 {
        let branches = self.currents.len();
        if branches == 1 {
            self.asked_sections as f64
        } else if k == 0 || k + 1 == branches {
            0.5
        } else {
            1.0
        }
    }

    /// The voltage at the near end of branch k, as a difference of unknowns.
    fn voltage(&self, k: usize) -> (Unknown, Unknown) {
        let [near, far, return_near, return_far] = self.terminals;
        if k == 0 {
            (near, return_near)
        } else {
            match self.voltages.get(k - 1) {
                Some(&inner) => (inner, Unknown::GROUND),
                None => (far, return_far),
            }
        }
    }

    /// Resistance of both conductors in series [Ω].
    fn whole_resistance(&self) -> f64 {
        self.resistance * self.asked_sections as f64
    }

    fn common(&self, x: &[f64]) -> f64 {
        self.common.map_or(0.0, |common| common.of(x))
    }

    /// The current into a terminal as a sum of unknowns with factors.
    fn terminal_current(&self, terminal: usize) -> [(Unknown, f64); 2] {
        let (first, last) = (self.currents[0], self.currents[self.currents.len() - 1]);
        let common = self.common.unwrap_or(Unknown::GROUND);
        match terminal {
            0 => [(first, 1.0), (common, 0.5)],
            1 => [(last, -1.0), (common, -0.5)],
            2 => [(first, -1.0), (common, 0.5)],
            _ => [(last, 1.0), (common, -0.5)],
        }
    }

    /// Adds the currents that enter the terminals to the rows of their nodes, and the law of what is common to both.
    fn stamp_terminals(&self, x: &[f64], into: &mut Stamper<'_>) {
        for (terminal, &node) in self.terminals.iter().enumerate() {
            for (unknown, factor) in self.terminal_current(terminal) {
                into.f(node, factor * unknown.of(x));
                into.df(node, unknown, factor);
            }
        }
        for &(terminal, carrier) in &self.followed {
            into.f(carrier, carrier.of(x));
            into.df(carrier, carrier, 1.0);
            for (unknown, factor) in self.terminal_current(terminal) {
                into.f(carrier, -factor * unknown.of(x));
                into.df(carrier, unknown, -factor);
            }
        }
        if let Some(common) = self.common {
            for (&node, sign) in self.terminals.iter().zip([-1.0, 1.0, -1.0, 1.0]) {
                into.f(common, sign * node.of(x));
                into.df(common, node, sign);
            }
            let resistance = 0.5 * self.whole_resistance();
            into.f(common, resistance * common.of(x));
            into.df(common, common, resistance);
        }
    }
}

impl Element for Cable {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let [length, resistance, inductance, capacitance] = self.keys.map(|key| values[key]);
        if resistance == 0.0 && inductance == 0.0 {
            return Err(Unsound {
                word: "out-of-range",
                key: "inductance",
                headline: "a cable without resistance and inductance is no cable".into(),
                help: "write the loop inductance, about 0.6 µH/m for a pair (common practice)"
                    .into(),
            });
        }
        let section = length / self.asked_sections as f64;
        self.resistance = resistance * section;
        self.inductance = inductance * section;
        self.capacitance = capacitance * section;
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.terminals = [0, 1, 2, 3].map(|k| claims.terminal(k));
        // Without capacitance all sections carry one current: a single branch of the whole length.
        let inner = if self.capacitance > 0.0 {
            self.asked_sections
        } else {
            0
        };
        self.currents = vec![claims.unknown("cable current", Measure::Current)];
        self.voltages.clear();
        for _ in 0..inner {
            self.voltages
                .push(claims.unknown("cable voltage", Measure::Voltage));
            self.currents
                .push(claims.unknown("cable current", Measure::Current));
        }
        self.common = (!self.shared_return)
            .then(|| claims.unknown("current common to both conductors", Measure::Current));
        self.followed.clear();
        for terminal in 0..4 {
            let wanted = Wanted::Current(terminal);
            if claims.wants(wanted) {
                let current = claims.unknown("terminal current", Measure::Current);
                claims.offer(wanted, current, 1.0);
                self.followed.push((terminal, current));
            }
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        self.stamp_terminals(at.x, into);
        for (k, &i) in self.currents.iter().enumerate() {
            let (resistance, inductance) = (
                self.share(k) * self.resistance,
                self.share(k) * self.inductance,
            );
            into.q(i, inductance * i.of(at.x));
            into.dq(i, i, inductance);
            into.f(i, resistance * i.of(at.x));
            into.df(i, i, resistance);
            for ((plus, minus), sign) in [(self.voltage(k), -1.0), (self.voltage(k + 1), 1.0)] {
                into.f(i, sign * (plus.of(at.x) - minus.of(at.x)));
                into.df(i, plus, sign);
                into.df(i, minus, -sign);
            }
        }
        for (k, &u) in self.voltages.iter().enumerate() {
            let (before, after) = (self.currents[k], self.currents[k + 1]);
            into.f(u, after.of(at.x) - before.of(at.x));
            into.df(u, after, 1.0);
            into.df(u, before, -1.0);
            into.q(u, self.capacitance * u.of(at.x));
            into.dq(u, u, self.capacitance);
        }
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn paths(&self) -> Vec<Path> {
        let kind = if self.resistance > 0.0 {
            PathKind::InductiveWithResistance
        } else {
            PathKind::Inductive
        };
        let mut paths = vec![Path {
            from: 0,
            to: 1,
            kind,
        }];
        if !self.shared_return {
            paths.push(Path {
                from: 2,
                to: 3,
                kind,
            });
        }
        if self.capacitance > 0.0 {
            paths.push(Path {
                from: 0,
                to: 2,
                kind: PathKind::Capacitive,
            });
        }
        paths
    }
}

impl Energy for Cable {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        for (terminal, current) in out.iter_mut().enumerate() {
            *current = sum(&self.terminal_current(terminal), at.x);
        }
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let loop_loss: f64 = self
            .currents
            .iter()
            .enumerate()
            .map(|(k, i)| self.share(k) * self.resistance * i.of(at.x).powi(2))
            .sum();
        loop_loss + 0.25 * self.whole_resistance() * self.common(at.x).powi(2)
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let magnetic: f64 = self
            .currents
            .iter()
            .enumerate()
            .map(|(k, i)| self.share(k) * self.inductance * i.of(at.x).powi(2))
            .sum();
        let electric: f64 = self
            .voltages
            .iter()
            .map(|u| self.capacitance * u.of(at.x).powi(2))
            .sum();
        0.5 * (magnetic + electric)
    }
}
