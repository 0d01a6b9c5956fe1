//! From what a run found to its outcome: names beside values, limits judged, cautions added.

use super::cautions;
use super::coils::coil_reports;
use super::core_loss::CoreLoss;
use super::feed::Metered;
use super::netlist::Netlist;
use super::outcome::{LimitResult, Outcome, RatingResult, ReadingResult, Work};
use crate::analysis::{Account, Found as Periodic, Ledger};
use crate::circuit::{Circuit, Tap};
use crate::dae::Point;
use crate::limits::{On, Sense};
use crate::readings::Outcome as Found;
use crate::signals::{EventLog, Piece, Trace};

/// What a run found, in the order of the netlist.
#[derive(Default)]
pub struct Findings {
    /// Simulated time asked for [s].
    pub duration: f64,
    /// Simulated time reached [s].
    pub reached: f64,
    /// Work done; None at an operating point.
    pub work: Option<Work>,
    /// Readings.
    pub readings: Vec<Found>,
    /// Ratings of all elements.
    pub ratings: Vec<RatingResult>,
    /// The accounts of all elements.
    pub ledger: Ledger,
    /// What cores lose by their material's own law.
    pub core_losses: Vec<CoreLoss>,
    /// Recorded waveforms.
    pub traces: Vec<Trace>,
    /// What happened when.
    pub events: EventLog,
    /// The periodic state that it begins in.
    pub steady: Option<Periodic>,
}

/// The outcome of a run by some analysis.
pub fn outcome(netlist: &Netlist, analysis: &'static str, findings: Findings) -> Outcome {
    let circuit = &netlist.circuit;
    let named = netlist.readings.iter().zip(&findings.readings);
    let mut outcome = Outcome {
        title: netlist.title.clone(),
        analysis,
        duration: findings.duration,
        reached: findings.reached,
        work: findings.work,
        readings: named
            .map(|(reading, found)| reading_result(&reading.name.text, found))
            .collect(),
        limits: limit_results(netlist, &findings.readings, &findings.ratings),
        ratings: findings.ratings,
        accounts: accounts(circuit, &findings.ledger.accounts),
        ledger: findings.ledger,
        core_losses: findings.core_losses,
        coils: coil_reports(circuit),
        cautions: netlist.cautions.clone(),
        defaults: netlist.defaults.clone(),
        sensitivities: Vec::new(),
        traces: findings.traces,
        events: findings.events,
        steady: findings.steady,
    };
    cautions::add(netlist, &mut outcome);
    outcome
}

/// The readings of a circuit at rest: every one takes the value there.
pub fn found_at_rest(netlist: &Netlist, at: Point<'_>) -> Vec<Found> {
    let circuit = &netlist.circuit;
    let found = |reading: &crate::readings::Reading| {
        let phrase = &reading.signal.phrase;
        let tap = circuit
            .tap(phrase)
            .expect("the signals of all readings were checked when they were read");
        let energy = matches!(tap, Tap::Energy(_));
        let value = if energy { 0.0 } else { circuit.read(&tap, at) };
        let mut taking = reading.start_at_rest();
        taking.feed(&Piece::instant(0.0, value), &EventLog::default());
        taking.finish()
    };
    netlist.readings.iter().map(found).collect()
}

/// The outcome of a circuit at rest.
pub fn at_rest(netlist: &Netlist, at: Point<'_>) -> Outcome {
    let findings = Findings {
        readings: found_at_rest(netlist, at),
        ..Findings::default()
    };
    outcome(netlist, "operating_point", findings)
}

fn accounts(circuit: &Circuit, accounts: &[Account]) -> Vec<(String, Account)> {
    circuit
        .entries
        .iter()
        .zip(accounts)
        .map(|(entry, account)| (entry.name.clone(), *account))
        .collect()
}

fn reading_result(name: &str, found: &Found) -> ReadingResult {
    let (value, time) = found.value_and_time();
    ReadingResult {
        name: name.to_owned(),
        value,
        kind: found.kind,
        time,
        remark: found.remark,
        error: None,
        time_error: None,
    }
}

/// What was used of a rating.
pub fn rating_result(circuit: &Circuit, metered: &Metered) -> RatingResult {
    RatingResult {
        element: circuit.entries[metered.entry].name.clone(),
        rating: metered.rated.rating.key.to_owned(),
        kind: metered.rated.rating.kind,
        used: metered.used(circuit),
        error: None,
    }
}

fn limit_results(netlist: &Netlist, found: &[Found], ratings: &[RatingResult]) -> Vec<LimitResult> {
    let values = netlist.circuit.values();
    netlist
        .limits
        .iter()
        .filter_map(|limit| {
            let (verdict, subject, at_most, kind) = match &limit.on {
                On::Reading {
                    index,
                    name,
                    sense,
                    kind,
                    ..
                } => (
                    limit.judge_reading(&found[*index], values)?,
                    name.clone(),
                    *sense == Sense::AtMost,
                    *kind,
                ),
                On::Rating { element, rating } => {
                    let used = ratings
                        .iter()
                        .find(|used| used.element == *element && used.rating == rating.key)?;
                    let subject = format!("{element}.{}", rating.key);
                    (
                        limit.judge_rating(&used.used, values)?,
                        subject,
                        true,
                        rating.kind,
                    )
                }
            };
            Some(LimitResult {
                name: limit.name.text.clone(),
                subject,
                at_most,
                kind,
                verdict,
            })
        })
        .collect()
}
