//! What a run came to.

use super::{CoilReport, CoreLoss, Sensitivity};
use crate::analysis::{Account, Found, Ledger};
use crate::dae::{Ending, Statistics};
use crate::diag::Diagnostic;
use crate::limits::{RatingUse, Verdict};
use crate::netlist::DefaultUsed;
use crate::signals::{EventLog, Trace};
use crate::units::Kind;

/// The work that a run took.
#[derive(Clone, Copy, Debug)]
pub struct Work {
    /// Counts.
    pub counted: Statistics,
    /// How it ended.
    pub ending: Ending,
}

/// One reading's result.
#[derive(Clone, Debug)]
pub struct ReadingResult {
    /// Its name.
    pub name: String,
    /// The value [SI]; None for what never happened.
    pub value: Option<f64>,
    /// What it measures.
    pub kind: Kind,
    /// When [s]; None where there is no such instant.
    pub time: Option<f64>,
    /// Why there is no value.
    pub remark: Option<&'static str>,
    /// Numerical error of the value [SI], where it was verified.
    pub error: Option<f64>,
    /// Numerical error of the instant [s], where it was verified.
    pub time_error: Option<f64>,
}

/// One limit's result.
#[derive(Clone, Debug)]
pub struct LimitResult {
    /// Its name.
    pub name: String,
    /// What it bounds, in words.
    pub subject: String,
    /// True for a highest value, false for a lowest.
    pub at_most: bool,
    /// What value and bound measure.
    pub kind: Kind,
    /// Value, bound, margin, margin asked, and whether it holds.
    pub verdict: Verdict,
}

/// One rating's use.
#[derive(Clone, Debug)]
pub struct RatingResult {
    /// The element.
    pub element: String,
    /// The rating's key.
    pub rating: String,
    /// What both measure.
    pub kind: Kind,
    /// Stress, rated value, used share and instant.
    pub used: RatingUse,
    /// Numerical error of the stress [SI], where it was verified.
    pub error: Option<f64>,
}

impl RatingResult {
    /// `ELEMENT.RATING`, as limits name it.
    pub fn path(&self) -> String {
        format!("{}.{}", self.element, self.rating)
    }
}

/// What a run came to.
#[derive(Clone, Debug)]
pub struct Outcome {
    /// The netlist's title.
    pub title: String,
    /// `transient`, `steady_state` or `operating_point`.
    pub analysis: &'static str,
    /// Simulated time asked for [s].
    pub duration: f64,
    /// Simulated time reached [s].
    pub reached: f64,
    /// Work done; None at an operating point.
    pub work: Option<Work>,
    /// Readings.
    pub readings: Vec<ReadingResult>,
    /// Limits.
    pub limits: Vec<LimitResult>,
    /// Ratings.
    pub ratings: Vec<RatingResult>,
    /// The ledger's accounts by element, sources included.
    pub accounts: Vec<(String, Account)>,
    /// The ledger as a whole.
    pub ledger: Ledger,
    /// Core losses estimated beside the ledger, outside its balance.
    pub core_losses: Vec<CoreLoss>,
    /// Coils.
    pub coils: Vec<CoilReport>,
    /// Cautions.
    pub cautions: Vec<Diagnostic>,
    /// Defaults used.
    pub defaults: Vec<DefaultUsed>,
    /// How the readings move with the values that were asked for.
    pub sensitivities: Vec<Sensitivity>,
    /// Recorded waveforms.
    pub traces: Vec<Trace>,
    /// What happened when.
    pub events: EventLog,
    /// The periodic state that it begins in, where it begins in one.
    pub steady: Option<Found>,
}

impl Outcome {
    /// True where every limit and every evaluated rating holds.
    pub fn holds(&self) -> bool {
        self.limits.iter().all(|limit| limit.verdict.holds)
            && self.ratings.iter().all(|rating| rating.used.holds())
    }

    /// True where somebody stopped the run before its end: everything is over what was simulated until then.
    pub fn interrupted(&self) -> bool {
        self.work.is_some_and(|work| work.ending == Ending::Stopped)
    }

    /// A recorded waveform by its phrase.
    pub fn trace(&self, name: &str) -> Option<&Trace> {
        self.traces.iter().find(|trace| trace.name == name)
    }

    /// A reading by name.
    pub fn reading(&self, name: &str) -> Option<&ReadingResult> {
        self.readings.iter().find(|reading| reading.name == name)
    }
}
