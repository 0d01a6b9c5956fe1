//! Linear coupled inductors: d(M i)/dt + R i = v with M_jk = k_jk sqrt(L_j L_k), one current unknown per winding.

use super::claims::{Claims, Measure, Wanted};
use super::element::{Element, Energy, Path, PathKind, Point, Quantity, Unknown, Unsound};
use super::kind::{ElementKind, Made, NODES, Surroundings, Terminal};
use super::pairs::{self, Pair};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;
use nalgebra::DMatrix;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "coupled_inductors",
    about: "Linear inductances that share flux; the first node of each winding is the like-polarity end.",
    keys: &[
        Key::required(
            "windings",
            Takes::Other("a mapping of winding names to nodes, inductance, series_resistance"),
            "the windings",
        ),
        Key::required(
            "coefficient",
            Takes::Other("one number, or {A-B: number} for each pair"),
            "coupling coefficient between windings, -1 to 1",
        ),
    ],
    read,
};

/// The keys of one winding.
pub const WINDING_KEYS: &[Key] = &[
    NODES,
    Key::required(
        "inductance",
        Takes::Quantity(units::INDUCTANCE),
        "inductance with the other windings open",
    ),
    Key::default(
        "series_resistance",
        Takes::Quantity(units::RESISTANCE),
        "0 Ω",
        "resistance in series",
    ),
];

struct Winding {
    inductance: Value,
    resistance: Value,
}

struct CoupledInductors {
    names: Vec<String>,
    windings: Vec<Winding>,
    couplings: Vec<Pair>,
    /// Inductance matrix [H].
    matrix: DMatrix<f64>,
    resistance: Vec<f64>,
    nodes: Vec<Unknown>,
    currents: Vec<Unknown>,
}

fn read(fields: &Fields<'_>, _around: &Surroundings<'_>) -> Option<Made> {
    let mut terminals = Vec::new();
    let mut windings = Vec::new();
    let mut names = Vec::new();
    let entries = fields.entries("windings");
    let count = entries.len();
    for entry in entries {
        let inner = fields.inside(&entry, WINDING_KEYS);
        let nodes = inner.names("nodes");
        let inductance = inner.positive("inductance");
        let resistance = inner.non_negative("series_resistance");
        inner.finish();
        if let (Some(nodes), Some(inductance), Some(resistance)) = (nodes, inductance, resistance) {
            for (end, node) in ["first", "second"].iter().zip(nodes) {
                terminals.push(Terminal {
                    name: format!("{}.{end}", entry.name.text),
                    node,
                });
            }
            windings.push(Winding {
                inductance,
                resistance,
            });
            names.push(entry.name.text.clone());
        }
    }
    if count < 2 {
        fields.error(
            "windings",
            "too-few-windings",
            "coupled inductors take two windings or more",
            "fewer than two here",
            Some("use an `inductor` for a single winding"),
        );
        return None;
    }
    if windings.len() < count {
        return None;
    }
    let couplings = pairs::read(fields, "coefficient", units::RATIO, &names)?;
    let element = CoupledInductors {
        names: names.clone(),
        matrix: DMatrix::zeros(count, count),
        resistance: vec![0.0; count],
        nodes: Vec::new(),
        currents: Vec::new(),
        windings,
        couplings,
    };
    Some(Made {
        terminals,
        windings: names,
        element: Box::new(element),
    })
}

impl Element for CoupledInductors {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let count = self.windings.len();
        let mut coupling = DMatrix::<f64>::identity(count, count);
        for &(j, k, value) in &self.couplings {
            coupling[(j, k)] = values[value];
            coupling[(k, j)] = values[value];
        }
        let lowest = coupling.clone().symmetric_eigenvalues().min();
        // A coefficient of exactly 1 leaves an eigenvalue of zero, which rounding may put below it.
        if lowest < -1e-12 {
            let pairs: Vec<String> = self
                .couplings
                .iter()
                .map(|&(j, k, value)| {
                    format!("{}-{} {}", self.names[j], self.names[k], values[value])
                })
                .collect();
            return Err(Unsound {
                word: "impossible-coupling",
                key: "coefficient",
                headline: format!("no windings can be coupled like this: {}", pairs.join(", ")),
                help: "the matrix of coefficients must have no negative eigenvalue: coefficients lie between -1 and 1, \
                       and two windings that are both close to a third are close to each other"
                    .into(),
            });
        }
        for j in 0..count {
            self.resistance[j] = values[self.windings[j].resistance];
            for k in 0..count {
                let product =
                    values[self.windings[j].inductance] * values[self.windings[k].inductance];
                self.matrix[(j, k)] = coupling[(j, k)] * product.sqrt();
            }
        }
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.nodes = claims.terminals.to_vec();
        self.currents.clear();
        for k in 0..self.windings.len() {
            let current = claims.unknown("winding current", Measure::Current);
            claims.offer(Wanted::Current(2 * k), current, 1.0);
            claims.offer(Wanted::Current(2 * k + 1), current, -1.0);
            claims.offer(Wanted::Of(Quantity::WindingCurrent, k), current, 1.0);
            self.currents.push(current);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        for (j, &row) in self.currents.iter().enumerate() {
            let (a, b) = (self.nodes[2 * j], self.nodes[2 * j + 1]);
            let current = row.of(at.x);
            into.carry(a, b, row, current);
            into.f(
                row,
                self.resistance[j] * current - (a.of(at.x) - b.of(at.x)),
            );
            into.df(row, row, self.resistance[j]);
            into.df(row, a, -1.0);
            into.df(row, b, 1.0);
            for (k, &other) in self.currents.iter().enumerate() {
                into.q(row, self.matrix[(j, k)] * other.of(at.x));
                into.dq(row, other, self.matrix[(j, k)]);
            }
        }
    }

    fn is_linear(&self) -> bool {
        true
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn quantity(&self, quantity: Quantity, winding: usize, at: Point<'_>) -> Option<f64> {
        let current = self.currents.get(winding)?.of(at.x);
        match quantity {
            Quantity::WindingCurrent => Some(current),
            Quantity::FluxLinkage => Some(
                self.currents
                    .iter()
                    .enumerate()
                    .map(|(k, i)| self.matrix[(winding, k)] * i.of(at.x))
                    .sum(),
            ),
            Quantity::Inductance => Some(self.matrix[(winding, winding)]),
            Quantity::Saturation => Some(0.0),
            _ => None,
        }
    }

    fn paths(&self) -> Vec<Path> {
        (0..self.windings.len())
            .map(|k| Path {
                from: 2 * k,
                to: 2 * k + 1,
                kind: if self.resistance[k] > 0.0 {
                    PathKind::InductiveWithResistance
                } else {
                    PathKind::Inductive
                },
            })
            .collect()
    }
}

impl Energy for CoupledInductors {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        for (k, i) in self.currents.iter().enumerate() {
            out[2 * k] = i.of(at.x);
            out[2 * k + 1] = -i.of(at.x);
        }
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.currents
            .iter()
            .zip(&self.resistance)
            .map(|(i, r)| r * i.of(at.x).powi(2))
            .sum()
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let mut energy = 0.0;
        for (j, first) in self.currents.iter().enumerate() {
            for (k, second) in self.currents.iter().enumerate() {
                energy += 0.5 * self.matrix[(j, k)] * first.of(at.x) * second.of(at.x);
            }
        }
        energy
    }
}
