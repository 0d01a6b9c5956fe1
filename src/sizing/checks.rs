//! What a suppressor has to hold: the netlist's limits, the release time, every rating that is evaluated.

use super::stress::Stress;
use crate::circuit::Circuit;
use crate::limits::{On, Sense, Verdict};
use crate::netlist::Value;
use crate::run::{Figures, Netlist, Sizing};
use crate::signals::Phrase;
use crate::units::{self, Kind};

/// The name of the limit that `sizing: {release: {within}}` sets.
pub const RELEASE: &str = "sizing.release";

/// What a check looks at.
#[derive(Clone, Debug, PartialEq)]
enum Subject {
    /// A limit of the netlist on a reading, by number.
    Limit(usize),
    /// The release time, at most this.
    Release(Value),
    /// A rating, by its number among all of the circuit.
    Rating(usize),
}

/// One thing that has to hold.
#[derive(Clone, Debug)]
pub struct Check {
    /// Its name: of the limit, or `ELEMENT.RATING`.
    pub name: String,
    /// What its value measures.
    pub kind: Kind,
    /// True where the value must not exceed the bound, false where it must not fall below.
    pub at_most: bool,
    /// True where a quicker release and a higher voltage make it easier to hold.
    pub eased_by_harshness: bool,
    /// True where it bounds the voltage across the switch from above.
    pub on_switch: bool,
    /// The element and the rating, where it is one.
    pub rating: Option<(String, &'static str)>,
    asked: Value,
    subject: Subject,
}

/// All checks of a netlist, in order: its limits, the release, the ratings. `coarse` says which ratings are evaluated.
pub fn checks(netlist: &Netlist, sizing: &Sizing, switch: &str) -> Vec<Check> {
    let circuit = &netlist.circuit;
    let ratings = ratings(circuit);
    let mut checks = Vec::new();
    let mut judged = Vec::new();
    for (k, limit) in netlist.limits.iter().enumerate() {
        let name = limit.name.text.clone();
        match &limit.on {
            On::Reading {
                index, sense, kind, ..
            } => {
                let reading = &netlist.readings[*index];
                let at_most = *sense == Sense::AtMost;
                let time = kind.dimension == units::TIME.dimension;
                checks.push(Check {
                    name,
                    kind: *kind,
                    at_most,
                    eased_by_harshness: time && at_most,
                    on_switch: at_most && is_across(circuit, &reading.signal.phrase, switch),
                    rating: None,
                    asked: limit.margin,
                    subject: Subject::Limit(k),
                });
            }
            On::Rating { element, rating } => {
                let number = ratings
                    .iter()
                    .position(|known| known.0 == *element && known.1.rating.key == rating.key);
                if let Some(number) = number.filter(|_| rating.is_evaluated()) {
                    judged.push(number);
                    let check = rating_check(&ratings[number], number, limit.margin, switch);
                    checks.push(Check { name, ..check });
                }
            }
        }
    }
    if let (Some(within), Some(margin)) = (sizing.release_within, sizing.release_margin) {
        checks.push(Check {
            name: RELEASE.into(),
            kind: units::TIME,
            at_most: true,
            eased_by_harshness: true,
            on_switch: false,
            rating: None,
            asked: margin,
            subject: Subject::Release(within),
        });
    }
    for (number, rating) in ratings.iter().enumerate() {
        if !judged.contains(&number) && rating.1.rating.is_evaluated() {
            checks.push(rating_check(rating, number, sizing.margin, switch));
        }
    }
    checks
}

type Rating<'a> = (&'a str, &'a crate::signals::Rated);

/// Every rating of every element, in the order in which a run reports them.
fn ratings(circuit: &Circuit) -> Vec<Rating<'_>> {
    let of_entry = |entry: &'_ crate::circuit::Entry| entry.ratings.len();
    let mut all = Vec::with_capacity(circuit.entries.iter().map(of_entry).sum());
    for entry in &circuit.entries {
        all.extend(
            entry
                .ratings
                .iter()
                .map(|rated| (entry.name.as_str(), rated)),
        );
    }
    all
}

fn rating_check(rating: &Rating<'_>, number: usize, asked: Value, switch: &str) -> Check {
    let (element, rated) = rating;
    let key = rated.rating.key;
    Check {
        name: format!("{element}.{key}"),
        kind: rated.rating.kind,
        at_most: true,
        eased_by_harshness: false,
        on_switch: *element == switch && matches!(key, "voltage" | "reverse_voltage"),
        rating: Some(((*element).to_owned(), key)),
        asked,
        subject: Subject::Rating(number),
    }
}

/// True where a phrase is the voltage across the switch: named so, or as the voltage of its nodes.
fn is_across(circuit: &Circuit, phrase: &Phrase, switch: &str) -> bool {
    let Some(entry) = circuit.find(switch) else {
        return false;
    };
    let node = |k: usize| {
        let terminal = entry.terminals.get(k);
        terminal.map_or("", |terminal| terminal.node.text.as_str())
    };
    let joins = |a: &str, b: &str| (a == node(0) && b == node(1)) || (a == node(1) && b == node(0));
    match phrase {
        Phrase::VoltageAcross(owner) => owner.element == switch && owner.winding.is_none(),
        Phrase::VoltageAt(at) => joins(at, crate::circuit::GROUND),
        Phrase::VoltageFrom(a, b) => joins(a, b),
        _ => false,
    }
}

impl Check {
    /// Judges a run. `stresses` are those of all ratings, in the circuit's order.
    pub fn judge(
        &self,
        netlist: &Netlist,
        figures: &Figures,
        release: Option<f64>,
        stresses: &[Stress],
    ) -> Verdict {
        let values = netlist.circuit.values();
        let asked = values[self.asked];
        match self.subject {
            Subject::Limit(k) => {
                let limit = &netlist.limits[k];
                let outcome = match &limit.on {
                    On::Reading { index, .. } => figures.readings.get(*index),
                    On::Rating { .. } => None,
                };
                let verdict = outcome.and_then(|outcome| limit.judge_reading(outcome, values));
                verdict.unwrap_or_else(|| Verdict::of(None, f64::NAN, Sense::AtMost, asked))
            }
            Subject::Release(within) => Verdict::of(release, values[within], Sense::AtMost, asked),
            Subject::Rating(number) => {
                let stress = &stresses[number];
                Verdict::of(stress.counts, stress.rated, Sense::AtMost, asked)
            }
        }
    }

    /// The bound with the margin asked for, at the values in force [SI]; None where it is the netlist's.
    pub fn allowed(&self, netlist: &Netlist) -> Option<f64> {
        let values = netlist.circuit.values();
        let asked = values[self.asked];
        let bound = match self.subject {
            Subject::Limit(k) => match &netlist.limits[k].on {
                On::Reading { bound, .. } => values[*bound],
                On::Rating { .. } => return None,
            },
            Subject::Release(within) => values[within],
            Subject::Rating(number) => {
                let all = ratings(&netlist.circuit);
                values[all.get(number)?.1.value]
            }
        };
        Some(bound - asked * bound.abs())
    }
}

/// What a margin leaves beyond the one asked for; without a margin infinitely much or little.
pub fn slack(verdict: &Verdict) -> f64 {
    match (verdict.margin, verdict.holds) {
        (Some(margin), _) => margin - verdict.asked,
        (None, true) => f64::INFINITY,
        (None, false) => f64::NEG_INFINITY,
    }
}
