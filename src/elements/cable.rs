//! Cable: a go and a return conductor as a chain of T sections, each half series impedance, shunt capacitance, half
//! series impedance. Per-metre values are those of the loop, go and return together. Where both ends of the return are
//! one node the whole loop impedance lies in the go conductor; otherwise half lies in each.

use super::claims::{Claims, Measure, Wanted};
use super::element::{Element, Energy, Path, PathKind, Point, Unknown, Unsound};
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
    /// Series resistance [Ω] and inductance [H] of one whole section and conductor.
    resistance: f64,
    inductance: f64,
    /// Shunt capacitance of one section [F].
    capacitance: f64,
    go: Conductor,
    back: Option<Conductor>,
    terminals: [Unknown; 4],
}

/// One conductor: `points` from near to far, `currents[k]` from `points[k]` to `points[k + 1]`.
#[derive(Default)]
struct Conductor {
    points: Vec<Unknown>,
    currents: Vec<Unknown>,
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
        go: Conductor::default(),
        back: None,
        terminals: [Unknown::GROUND; 4],
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
        let branches = self.go.currents.len();
        if branches == 1 {
            self.asked_sections as f64
        } else if k == 0 || k + 1 == branches {
            0.5
        } else {
            1.0
        }
    }

    fn conductors(&self) -> impl Iterator<Item = &Conductor> {
        std::iter::once(&self.go).chain(&self.back)
    }

    /// The return's point opposite point k of the go conductor.
    fn opposite(&self, k: usize) -> Unknown {
        self.back
            .as_ref()
            .map_or(self.terminals[2], |back| back.points[k])
    }
}

impl Conductor {
    fn claim(claims: &mut Claims<'_>, ends: (Unknown, Unknown), inner: usize) -> Self {
        let mut points = vec![ends.0];
        let mut currents = Vec::with_capacity(inner + 1);
        for _ in 0..inner {
            currents.push(claims.unknown("cable current", Measure::Current));
            points.push(claims.unknown("cable voltage", Measure::Voltage));
        }
        currents.push(claims.unknown("cable current", Measure::Current));
        points.push(ends.1);
        Conductor { points, currents }
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
        let part = if self.shared_return { 1.0 } else { 0.5 };
        self.resistance = part * resistance * section;
        self.inductance = part * inductance * section;
        self.capacitance = capacitance * section;
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.terminals = [0, 1, 2, 3].map(|k| claims.terminal(k));
        let [near, far, return_near, return_far] = self.terminals;
        // Without capacitance all sections carry one current: a single branch of the whole length.
        let inner = if self.capacitance > 0.0 {
            self.asked_sections
        } else {
            0
        };
        self.go = Conductor::claim(claims, (near, far), inner);
        self.back = (!self.shared_return)
            .then(|| Conductor::claim(claims, (return_near, return_far), inner));
        let last = self.go.currents.len() - 1;
        claims.offer(Wanted::Current(0), self.go.currents[0], 1.0);
        claims.offer(Wanted::Current(1), self.go.currents[last], -1.0);
        if let Some(back) = &self.back {
            claims.offer(Wanted::Current(2), back.currents[0], 1.0);
            claims.offer(Wanted::Current(3), back.currents[last], -1.0);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        for conductor in self.conductors() {
            for (k, &i) in conductor.currents.iter().enumerate() {
                let (a, b) = (conductor.points[k], conductor.points[k + 1]);
                let (resistance, inductance) = (
                    self.share(k) * self.resistance,
                    self.share(k) * self.inductance,
                );
                let current = i.of(at.x);
                into.carry(a, b, i, current);
                into.q(i, inductance * current);
                into.dq(i, i, inductance);
                into.f(i, resistance * current - (a.of(at.x) - b.of(at.x)));
                into.df(i, i, resistance);
                into.df(i, a, -1.0);
                into.df(i, b, 1.0);
            }
        }
        for k in 1..self.go.currents.len() {
            let (a, b) = (self.go.points[k], self.opposite(k));
            into.store(
                a,
                b,
                self.capacitance * (a.of(at.x) - b.of(at.x)),
                self.capacitance,
            );
        }
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
        let ends = |conductor: &Conductor| {
            let last = conductor.currents.len() - 1;
            (
                conductor.currents[0].of(at.x),
                -conductor.currents[last].of(at.x),
            )
        };
        (out[0], out[1]) = ends(&self.go);
        match &self.back {
            Some(back) => (out[2], out[3]) = ends(back),
            // One node: what the capacitances bring there is the difference of the ends.
            None => (out[2], out[3]) = (-out[0] - out[1], 0.0),
        }
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.conductors()
            .flat_map(|conductor| conductor.currents.iter().enumerate())
            .map(|(k, i)| self.share(k) * self.resistance * i.of(at.x).powi(2))
            .sum()
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let magnetic: f64 = self
            .conductors()
            .flat_map(|conductor| conductor.currents.iter().enumerate())
            .map(|(k, i)| self.share(k) * self.inductance * i.of(at.x).powi(2))
            .sum();
        let electric: f64 = (1..self.go.currents.len())
            .map(|k| {
                self.capacitance * (self.go.points[k].of(at.x) - self.opposite(k).of(at.x)).powi(2)
            })
            .sum();
        0.5 * (magnetic + electric)
    }
}
