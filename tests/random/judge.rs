//! What came of a random circuit: a sound result whose ledger closes, a named error, or a defect.

use coilbreak::analysis::Failure;
use coilbreak::netlist::Input;
use coilbreak::report;
use coilbreak::run::{Netlist, Outcome, read, run};
use std::ops::ControlFlow;

/// The ledger's imbalance that a result may show.
pub const CLOSES: f64 = 1e-2;

/// What came of a circuit.
#[derive(Clone, Debug, PartialEq)]
pub enum End {
    /// A result; the ledger's imbalance (0 at an operating point).
    Result(f64),
    /// The structure allows no solution: the diagnostic's word.
    Refused(String),
    /// The solver gave up and said why.
    Stopped(String),
    /// What must not be: a ledger that does not close, a value that is no number.
    Defect(String),
}

/// Reads a netlist's text; the diagnostics' words where it is refused.
pub fn netlist(text: &str) -> Result<Netlist, String> {
    let input = Input::Text {
        name: "random".into(),
        bytes: text.as_bytes().to_vec(),
        folder: None,
    };
    read(&input, &[]).map_err(|error| {
        let failure = error.failure();
        let errors = failure
            .diagnostics
            .iter()
            .filter(|told| told.severity == coilbreak::diag::Severity::Error);
        let words: Vec<String> = errors
            .map(|told| format!("{} ({})", told.word, told.headline))
            .collect();
        words.join("; ")
    })
}

/// Runs a netlist and judges what comes of it.
pub fn judge(netlist: &Netlist) -> (End, Option<Outcome>) {
    match run(netlist, &mut |_, _| ControlFlow::Continue(())) {
        Err(Failure::Refused(told)) => (End::Refused(told.word.to_owned()), None),
        Err(Failure::Stopped { headline, .. }) => (End::Stopped(headline), None),
        Err(Failure::Interrupted) => (End::Stopped("interrupted".into()), None),
        Ok(outcome) => (weigh(&outcome), Some(outcome)),
    }
}

fn weigh(outcome: &Outcome) -> End {
    for reading in &outcome.readings {
        for number in [reading.value, reading.time].into_iter().flatten() {
            if !number.is_finite() {
                return End::Defect(format!("reading {} is {number}", reading.name));
            }
        }
    }
    for (name, account) in &outcome.accounts {
        if !(account.absorbed + account.dissipated + account.stored).is_finite() {
            return End::Defect(format!("the account of {name} is {account:?}"));
        }
    }
    let csv = report::run::waveforms::csv(outcome);
    if csv.contains(",,") || csv.contains(",\r\n") || csv.contains("NaN") {
        return End::Defect("an empty cell in the waveforms".into());
    }
    let json = report::run::json::run(outcome).to_string();
    if json.contains("NaN") || json.contains("\"value\":null") {
        return End::Defect("a reading without a value in JSON".into());
    }
    let imbalance = outcome.ledger.imbalance;
    if imbalance.is_nan() || imbalance > CLOSES {
        let mut gaps: Vec<_> = outcome
            .accounts
            .iter()
            .filter(|(_, account)| !account.is_source)
            .collect();
        gaps.sort_by(|a, b| b.1.gap().total_cmp(&a.1.gap()));
        let worst = gaps.first().map(|(name, _)| name.as_str());
        return End::Defect(format!(
            "the ledger is off by {imbalance:.1e}, {} most",
            worst.unwrap_or("nothing")
        ));
    }
    End::Result(imbalance)
}
