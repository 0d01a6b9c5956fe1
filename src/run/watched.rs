//! The signals that a run reads off its circuit, each once, step by step.

use crate::analysis::ledger::rule;
use crate::circuit::{Circuit, Entry, Tap};
use crate::dae::{Impulse, Point, Step};
use crate::signals::{Owner, Phrase, Piece, Quantity, RatingKind, Watched};
use crate::units::Kind;

/// Most nodes whose potential, and most elements of a kind whose waveforms, are recorded unasked; beyond that a record
/// would grow without use.
const MOST_UNASKED: usize = 24;

/// The waveforms of elements that are recorded unasked, by kind of element.
const UNASKED: [(&str, &[&str]); 4] = [
    ("switch", &["voltage across"]),
    ("contact", &["voltage across"]),
    ("inductor", &["current through"]),
    ("relay", &["position of"]),
];

/// The waveforms of windings on cores that are recorded unasked.
const UNASKED_OF_WINDINGS: [&str; 3] = ["winding current of", "flux density in", "saturation of"];

/// One signal: how it is read, what it measures, and its energy so far where it is one.
struct Signal {
    name: String,
    kind: Kind,
    tap: Tap,
    energy: f64,
    /// The energy at the start of the step at hand.
    at_step: f64,
}

/// Signals by name, and their values at both ends and both thirds of the span read last.
#[derive(Default)]
pub struct Signals {
    list: Vec<Signal>,
    values: Vec<[f64; 4]>,
    points: [Vec<f64>; 4],
    span: (f64, f64),
    /// The points of a step that the rule for energies was made for, and the rule.
    ruled: Vec<f64>,
    rule: Vec<(f64, f64)>,
}

impl Signals {
    /// The number of a signal, new or known.
    pub fn number(&mut self, name: String, kind: Kind, tap: Tap) -> usize {
        let known = self.list.iter().position(|signal| signal.name == name);
        known.unwrap_or_else(|| {
            self.list.push(Signal {
                name,
                kind,
                tap,
                energy: 0.0,
                at_step: 0.0,
            });
            self.values.push([0.0; 4]);
            self.list.len() - 1
        })
    }

    /// Adds the waveforms that are kept unasked: what a person looks at first.
    pub fn add_unasked(&mut self, circuit: &Circuit) {
        for text in unasked(circuit) {
            let Ok(phrase) = Phrase::parse(&text) else {
                continue;
            };
            if let Ok(tap) = circuit.tap(&phrase) {
                self.number(text, phrase.kind(), tap);
            }
        }
    }

    /// How many there are.
    pub fn len(&self) -> usize {
        self.list.len()
    }

    /// Name and kind of each.
    pub fn named(&self) -> impl Iterator<Item = (String, Kind)> {
        self.list
            .iter()
            .map(|signal| (signal.name.clone(), signal.kind))
    }

    /// Reads every signal at both ends and both thirds of a span within a step.
    pub fn read(&mut self, circuit: &Circuit, step: &Step<'_>, (from, to): (f64, f64)) {
        let third = (to - from) / 3.0;
        let times = [from, from + third, from + 2.0 * third, to];
        for (time, point) in times.iter().zip(&mut self.points) {
            point.resize(step.x1.len(), 0.0);
            step.at(*time, point);
        }
        for (signal, values) in self.list.iter_mut().zip(&mut self.values) {
            for (value, (time, x)) in values.iter_mut().zip(times.iter().zip(&self.points)) {
                let at = Point {
                    time: *time,
                    x,
                    mode: step.mode,
                };
                *value = circuit.read(&signal.tap, at);
            }
        }
        self.span = (from, to);
        self.accumulate(circuit, step);
    }

    /// Turns powers into the energies so far. What a step adds is the ledger's own sum over the points at which the
    /// method has solved the equations; within the step it grows as the power's cubics say.
    fn accumulate(&mut self, circuit: &Circuit, step: &Step<'_>) {
        let (from, to) = self.span;
        let energies = self.list.iter_mut().zip(&mut self.values);
        for (signal, values) in energies.filter(|(signal, _)| matches!(signal.tap, Tap::Energy(_)))
        {
            if from == step.from {
                signal.at_step = signal.energy;
            }
            *values = accumulated(signal.energy, from, to, *values);
            if to == step.to {
                if self.ruled != step.dense.points {
                    self.ruled = step.dense.points.to_vec();
                    self.rule = rule(&self.ruled);
                }
                let length = step.to - step.from;
                let x = &mut self.points[0];
                let mut sum = 0.0;
                for &(place, weight) in &self.rule {
                    step.dense.at(place, x);
                    let at = Point {
                        time: step.from + place * length,
                        x,
                        mode: step.mode,
                    };
                    sum += weight * length * circuit.read(&signal.tap, at);
                }
                let missing = signal.at_step + sum - values[3];
                for (k, value) in values.iter_mut().enumerate() {
                    *value += missing * k as f64 / 3.0;
                }
            }
            signal.energy = values[3];
        }
    }

    /// Takes an impulse: it moves energy within an instant.
    pub fn impulse(&mut self, circuit: &Circuit, impulse: &Impulse, time: f64) {
        for signal in &mut self.list {
            if let Tap::Energy(k) = signal.tap {
                let (flown, _) = circuit.meanwhile(k, impulse, time);
                signal.energy += circuit.impulse(k, impulse, time) + flown;
            }
        }
    }

    /// A signal during the span read last.
    pub fn piece(&self, number: usize) -> Piece {
        Piece {
            from: self.span.0,
            to: self.span.1,
            values: self.values[number],
        }
    }

    /// Values of the first so many during the span read last, as a recorder takes them.
    pub fn first(&self, count: usize) -> &[[f64; 4]] {
        &self.values[..count]
    }
}

fn unasked(circuit: &Circuit) -> Vec<String> {
    let mut phrases = Vec::new();
    let mut counts = [0; UNASKED.len()];
    let mut windings = 0;
    for entry in &circuit.entries {
        for owner in entry.winding_owners() {
            if windings < MOST_UNASKED {
                windings += 1;
                phrases.extend(UNASKED_OF_WINDINGS.map(|words| format!("{words} {owner}")));
            }
        }
        for ((kind, waveforms), count) in UNASKED.iter().zip(&mut counts) {
            if entry.kind.word == *kind && *count < MOST_UNASKED {
                *count += 1;
                phrases.extend(
                    waveforms
                        .iter()
                        .map(|words| format!("{words} {}", entry.name)),
                );
            }
        }
    }
    let nodes = circuit.node_names.iter().take(MOST_UNASKED);
    phrases.extend(nodes.map(|node| format!("voltage at {node}")));
    phrases
}

/// A cubic through the running integral of a power given at both ends and both thirds of a step.
fn accumulated(start: f64, from: f64, to: f64, power: [f64; 4]) -> [f64; 4] {
    let piece = Piece {
        from,
        to,
        values: power,
    };
    let third = (to - from) / 3.0;
    let up_to = |end: f64| piece.within(from, end).map_or(0.0, |part| part.integral());
    [
        start,
        start + up_to(from + third),
        start + up_to(from + 2.0 * third),
        start + piece.integral(),
    ]
}

/// The signal that stresses a rating of an element; what it has no waveform for is listed without a stress.
pub fn stressing(circuit: &Circuit, entry: usize, rating: &RatingKind) -> Tap {
    let element = &circuit.entries[entry];
    let tap = match rating.watches {
        Watched::Voltage => voltage(element),
        Watched::Current => Some(Tap::Current(entry, 0)),
        Watched::Power => Some(Tap::Power(entry)),
        Watched::FluxDensity => {
            let owner = Owner {
                element: element.name.clone(),
                winding: None,
            };
            circuit.tap(&Phrase::Of(Quantity::FluxDensity, owner)).ok()
        }
        Watched::Temperature => None,
    };
    tap.unwrap_or(Tap::Power(entry))
}

/// The voltage that ratings of an element mean: first less second terminal, anode less cathode; of a suppressor
/// diode, whose first node is the cathode, the other way round.
fn voltage(entry: &Entry) -> Option<Tap> {
    let (a, b) = (*entry.nodes.first()?, *entry.nodes.get(1)?);
    Some(if entry.kind.word == "suppressor_diode" {
        Tap::Potential(b, a)
    } else {
        Tap::Potential(a, b)
    })
}
