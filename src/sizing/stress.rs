//! The stress on every rating in one operation, and on average at the operating rate.
//!
//! A run is one operation: closed, open, closed. What a rating means by an average is made of it as follows, with x1 and x0 the
//! values at rest, closed and open, D the integral of the waveform beyond them, and r the operating rate: the mean is at most
//! the larger of x1 and x0 plus r D, whatever the share of the time that the switch is closed. Without a rate the run is
//! taken to repeat without pause.

use super::cycle::Cycle;
use crate::circuit::{Circuit, Entry};
use crate::readings::{PEAK, Reading, ReadingKind};
use crate::run::Figures;
use crate::signals::{
    EventPhrase, Happening, Owner, Phrase, Rated, Stress as How, Watched, WrittenInstant,
    WrittenPhrase,
};
use crate::units::Kind;

/// The stress on one rating. SI units.
#[derive(Clone, Debug)]
pub struct Stress {
    /// Index of the element.
    pub entry: usize,
    /// The rating's key.
    pub key: &'static str,
    /// What it measures.
    pub kind: Kind,
    /// Highest in one operation; None where it has no bound or is not evaluated.
    pub peak: Option<f64>,
    /// On average at the operating rate, where the rating means one.
    pub average: Option<f64>,
    /// What is allowed.
    pub rated: f64,
    /// What is compared with it.
    pub counts: Option<f64>,
}

/// Readings that a rating of an average needs besides its own: the values at rest and the peak.
#[derive(Clone, Copy, Debug)]
struct AtRest {
    closed: usize,
    open: usize,
    peak: usize,
}

/// How the stresses of a circuit are taken.
#[derive(Clone, Debug)]
pub struct Stresses {
    /// One per rating, in the circuit's order.
    at_rest: Vec<Option<AtRest>>,
    /// Operations per second.
    rate: Option<f64>,
}

impl Stresses {
    /// Adds the readings that are needed to those of a netlist whose switch opens once and closes once.
    pub fn prepare(
        circuit: &Circuit,
        readings: &mut Vec<Reading>,
        switch: &str,
        rate: Option<f64>,
    ) -> Self {
        let mut at_rest = Vec::new();
        for entry in &circuit.entries {
            for rated in &entry.ratings {
                let phrase = watched(entry, rated).filter(|_| is_average(rated.rating.stress));
                at_rest.push(phrase.map(|phrase| {
                    let mut add = |kind: &'static ReadingKind, at: Option<Happening>| {
                        readings.push(reading(entry, &phrase, kind, switch, at));
                        readings.len() - 1
                    };
                    let value = ReadingKind::find("value_at").unwrap_or(&PEAK);
                    AtRest {
                        closed: add(value, Some(Happening::Opens)),
                        open: add(value, Some(Happening::Closes)),
                        peak: add(&PEAK, None),
                    }
                }));
            }
        }
        Stresses { at_rest, rate }
    }

    /// The stresses of one run.
    pub fn take(&self, figures: &Figures, cycle: Cycle) -> Vec<Stress> {
        figures
            .ratings
            .iter()
            .zip(&self.at_rest)
            .map(|(figure, at_rest)| {
                let used = &figure.used;
                let mut stress = Stress {
                    entry: figure.entry,
                    key: figure.rated.rating.key,
                    kind: figure.rated.rating.kind,
                    peak: used.peak,
                    average: None,
                    rated: used.rated,
                    counts: used.peak,
                };
                if let (Some(at_rest), Some(over_run)) = (at_rest, used.peak) {
                    let value = |k: usize| figures.readings[k].taken.map_or(0.0, |t| t.value);
                    let rest = (value(at_rest.closed), value(at_rest.open));
                    let average = self.average(figure.rated.rating.stress, over_run, rest, cycle);
                    stress.peak = Some(value(at_rest.peak).abs());
                    stress.average = Some(average);
                    stress.counts = Some(average);
                }
                stress
            })
            .collect()
    }

    /// The average that a rating means, from what the meter found over the run and the values at rest.
    fn average(&self, how: How, over_run: f64, rest: (f64, f64), cycle: Cycle) -> f64 {
        let (closed, open) = rest;
        let (while_closed, whole) = (cycle.opens + cycle.on, cycle.duration());
        let beyond = |over_run: f64, closed: f64, open: f64| {
            over_run * whole - closed * while_closed - open * cycle.off
        };
        let steady = closed.abs().max(open.abs());
        match (how, self.rate) {
            (How::AtRest, _) => steady,
            (How::Rms, Some(rate)) => {
                let square = beyond(over_run.powi(2), closed.powi(2), open.powi(2));
                (steady.powi(2) + rate * square.max(0.0)).sqrt()
            }
            (How::MeanAbsorbed, Some(rate)) => {
                closed.max(open).max(0.0) + rate * beyond(over_run, closed, open).max(0.0)
            }
            (How::Mean, Some(rate)) => {
                // The meter gives a magnitude; which sign it had decides whether it adds to what flows at rest.
                let parts = [over_run, -over_run].map(|mean| rate * beyond(mean, closed, open));
                let moving = if parts[0].abs() < parts[1].abs() {
                    parts[0]
                } else {
                    parts[1]
                };
                steady
                    .max((closed + moving).abs())
                    .max((open + moving).abs())
            }
            (_, _) => over_run.max(steady),
        }
    }
}

/// Whether a rating means an average or a state at rest.
fn is_average(how: How) -> bool {
    matches!(how, How::Mean | How::MeanAbsorbed | How::Rms | How::AtRest)
}

/// The waveform that a rating watches, as a phrase.
fn watched(entry: &Entry, rated: &Rated) -> Option<Phrase> {
    let owner = Owner {
        element: entry.name.clone(),
        winding: None,
    };
    match rated.rating.watches {
        Watched::Voltage if entry.nodes.len() == 2 => Some(Phrase::VoltageAcross(owner)),
        Watched::Current => {
            let terminal = entry.terminals.first()?;
            Some(Phrase::CurrentInto(owner, terminal.name.clone()))
        }
        Watched::Power => Some(Phrase::Power(owner)),
        _ => None,
    }
}

fn reading(
    entry: &Entry,
    phrase: &Phrase,
    kind: &'static ReadingKind,
    switch: &str,
    at: Option<Happening>,
) -> Reading {
    let owner = Owner {
        element: switch.to_owned(),
        winding: None,
    };
    let instant = at.map(|happening| {
        let event = EventPhrase {
            element: owner,
            happening,
            count: 1,
        };
        WrittenInstant::Event(event, entry.span)
    });
    Reading {
        name: crate::netlist::Named {
            text: format!("stress on {}", entry.name),
            span: entry.span,
        },
        signal: WrittenPhrase {
            phrase: phrase.clone(),
            span: entry.span,
        },
        kind,
        from: instant.clone(),
        to: instant,
        level: None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const CYCLE: Cycle = Cycle {
        opens: 0.1,
        off: 1.0,
        on: 0.9,
    };

    fn at(rate: Option<f64>) -> Stresses {
        Stresses {
            at_rest: Vec::new(),
            rate,
        }
    }

    #[test]
    fn a_pulse_counts_once_per_operation() {
        // 30 mJ in a run of 2 s: 15 mW; 600 operations an hour make 5 mW of it.
        let stresses = at(Some(600.0 / 3600.0));
        let average = stresses.average(How::MeanAbsorbed, 15e-3, (0.0, 0.0), CYCLE);
        assert!((average - 5e-3).abs() < 1e-12);
        let mean = stresses.average(How::Mean, 15e-3, (0.0, 0.0), CYCLE);
        assert!((mean - 5e-3).abs() < 1e-12);
        let back_to_back = at(None).average(How::MeanAbsorbed, 15e-3, (0.0, 0.0), CYCLE);
        assert_eq!(back_to_back, 15e-3);
    }

    #[test]
    fn what_flows_at_rest_counts_as_if_it_lasted() {
        // 2 A while closed, nothing while open, and 0.5 A s more on the way.
        let over_run = (2.0 * 1.0 + 0.5) / 2.0;
        let stresses = at(Some(0.1));
        let mean = stresses.average(How::Mean, over_run, (2.0, 0.0), CYCLE);
        assert!((mean - 2.05).abs() < 1e-12, "{mean}");
        let less = stresses.average(How::Mean, 0.8, (2.0, 0.0), CYCLE);
        assert_eq!(less, 2.0);
        let rms = stresses.average(How::Rms, (4.0f64 / 2.0).sqrt(), (2.0, 0.0), CYCLE);
        assert!((rms - 2.0).abs() < 1e-12);
        assert_eq!(
            stresses.average(How::AtRest, 9.0, (-24.0, 3.0), CYCLE),
            24.0
        );
    }
}
