//! The numerical error of each reading: the run once more at a tenth of the accuracy, and what moved.
//!
//! The repetition's own error is about a tenth, so what moved is between nine and eleven tenths of the error; where the
//! two runs err alike it says too little, which is why three times of it is stated: the factor that Roache's grid
//! convergence index takes where two runs are compared (J. Fluids Eng. 116, 1994; from memory). Errors of the model (a
//! magnetization, a stray capacitance that is not there) are no part of it.

use super::netlist::Netlist;
use super::outcome::{LimitResult, Outcome};
use super::repeated::figures;
use crate::analysis::{Failure, Settings, Simulation};
use crate::diag::Diagnostic;
use crate::units::engineering;
use std::ops::ControlFlow;

/// Accuracy of the repetition, as a share of the one asked for.
const FINER: f64 = 0.1;
/// Stated error over what moved.
const STATED: f64 = 3.0;
/// Two runs may agree by chance, short smooth ones to the last digits: no figure is stated to be surer than this share
/// of the accuracy, of its own size. The repetition's own error is commonly a tenth of a tenth.
const CHANCE: f64 = 1e-2;
/// Rounding of a reading as a share of its value, of an instant as a share of the run.
const ROUNDING: f64 = 1e-13;

/// A run that is to be repeated.
pub struct Repeated<'a> {
    /// The netlist.
    pub netlist: &'a Netlist,
    /// The run as it was.
    pub simulation: &'a Simulation<'a>,
    /// Its scales.
    pub scales: &'a [f64],
}

impl Repeated<'_> {
    /// Repeats the run and puts the errors into its outcome; `watch` is told the simulated time [s] and may stop the
    /// repetition. One that does not get to its end leaves the outcome as it was but for a caution.
    pub fn verify(&self, outcome: &mut Outcome, watch: &mut dyn FnMut(f64) -> ControlFlow<()>) {
        let settings = self.simulation.settings;
        let finer = Simulation {
            settings: Settings {
                accuracy: FINER * settings.accuracy,
                ..settings
            },
            ..*self.simulation
        };
        let figures = match figures(self.netlist, &finer, self.scales, &[], watch) {
            Ok(figures) => figures,
            Err(failure) => {
                outcome.cautions.push(unverified(&failure));
                return;
            }
        };
        let rounding = ROUNDING * settings.duration;
        let chance = ROUNDING.max(CHANCE * settings.accuracy);
        let moved = |value: Option<f64>, finer: Option<f64>, least: f64| {
            let (value, finer) = (value?, finer?);
            Some((STATED * (value - finer).abs()).max(least.max(chance * value.abs())))
        };
        let mut cautions = Vec::new();
        for (reading, fine) in outcome.readings.iter_mut().zip(&figures.readings) {
            let (value, time) = fine.value_and_time();
            reading.error = moved(reading.value, value, 0.0);
            reading.time_error = moved(reading.time, time, rounding);
            if reading.value.is_some() != value.is_some() {
                let (there, missing) = match value {
                    Some(_) => ("finer", "asked"),
                    None => ("asked", "finer"),
                };
                let text = format!(
                    "`{}` has a value at the accuracy that is {there} alone, none at the one that is {missing}",
                    reading.name
                );
                cautions.push(
                    Diagnostic::caution("not-verified", text)
                        .help("it hangs on the last digits: look at its level and its window"),
                );
            }
        }
        for (rating, fine) in outcome.ratings.iter_mut().zip(&figures.ratings) {
            rating.error = moved(rating.used.peak, fine.used.peak, 0.0);
        }
        let limits = outcome.limits.iter();
        cautions.extend(limits.filter_map(|limit| within(limit, outcome)));
        outcome.cautions.extend(cautions);
    }
}

/// Why nothing is known of the errors.
fn unverified(failure: &Failure) -> Diagnostic {
    let why = match failure {
        Failure::Interrupted => "it was interrupted",
        Failure::Refused(diagnostic) => &diagnostic.headline,
        Failure::Stopped { headline, .. } => headline,
    };
    let text =
        format!("nothing is known of the errors, the repetition did not get to its end: {why}");
    Diagnostic::caution("not-verified", text)
}

/// A caution where a limit's verdict hangs on the numerical error.
fn within(limit: &LimitResult, outcome: &Outcome) -> Option<Diagnostic> {
    let ratings = outcome.ratings.iter();
    let mut ratings = ratings.filter(|rating| rating.path() == limit.subject);
    let error = match outcome.reading(&limit.subject) {
        Some(reading) => reading.error?,
        None => ratings.next()?.error?,
    };
    let verdict = &limit.verdict;
    let distance = match verdict.margin {
        Some(margin) => (margin - verdict.asked).abs() * verdict.bound.abs(),
        None => (verdict.value? - verdict.bound).abs(),
    };
    if distance > error {
        return None;
    }
    let text = format!(
        "`{}` {} by less than the numerical error of {}",
        limit.name,
        if verdict.holds { "holds" } else { "fails" },
        engineering(error, limit.kind.symbol, 2)
    );
    let finer = "a finer `accuracy` decides it";
    Some(Diagnostic::caution("within-the-error", text).help(finer))
}
