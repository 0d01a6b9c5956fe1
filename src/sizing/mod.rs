//! Sizing: from what a coil does to the standard part that tames it.
//!
//! ```text
//! netlist -> rig (own commands, room for candidates) -> facts at rest -> for each suppressor: seed, search by
//! simulation at the worst corner of all spreads -> candidates -> ranking -> Comparison
//! ```

mod candidate;
mod catalogue;
mod cautions;
mod checks;
mod cycle;
mod facts;
mod fillings;
mod harshest;
mod ranking;
mod rig;
pub mod standard_values;
mod stress;
pub mod suppressors;
mod taken_out;
mod trial;

pub use candidate::{Candidate, Fitted, SetBy};
pub use cautions::ALWAYS as CAUTIONS;
pub use checks::{Check, RELEASE};
pub use cycle::{COARSE, Cycle, FINE};
pub use facts::{AtRest, Facts};
pub use fillings::{Choice, Filling, Standard, StandardKind};
pub use ranking::Standing;
pub use rig::LeftOut;
pub use stress::Stress;
pub use suppressors::{SUPPRESSORS, Suppressor};
pub use trial::{Reached, Study, Trouble};

use crate::analysis::Failure;
use crate::diag::{Diagnostic, Sources};
use crate::netlist::{Document, nearest};
use crate::run::{Netlist, Outcome, Sizing};
use crate::studies::workers;
use candidate::Hunt;
use catalogue::Catalogue;
use cycle::Names;
use rig::Rig;
use std::ops::ControlFlow;
use std::sync::Arc;
use std::sync::atomic::Ordering;
use trial::{Addition, DEFAULT_RELEASE, Ground, Trial};

/// Told while a sizing goes on: the share done and what is being tried; may stop it.
pub type Progress<'a> = dyn FnMut(f64, &str) -> ControlFlow<()> + 'a;

/// Simulations that a candidate takes, roughly: for the estimate of what is left.
const EXPECTED_RUNS: f64 = 120.0;

/// What a sizing came to.
pub struct Comparison {
    /// The netlist's title.
    pub title: String,
    /// What is known of the circuit without a suppressor.
    pub facts: Facts,
    /// True where a limit or rating bounds the voltage across the switch.
    pub bounded: bool,
    /// True where a longest release time is given.
    pub quickness_counts: bool,
    /// The cycle that was run (a candidate's open phase may have been longer).
    pub cycle: Cycle,
    /// The release current at nominal values [A].
    pub level: f64,
    /// Candidates in the order in which they were tried.
    pub candidates: Vec<Candidate>,
    /// How each stands.
    pub standings: Vec<Standing>,
    /// The recommended one.
    pub recommended: Option<usize>,
    /// Those that none beats in release time and switch voltage together.
    pub front: Vec<usize>,
    /// Remarks and cautions.
    pub cautions: Vec<Diagnostic>,
    /// Simulations made.
    pub runs: usize,
    rig: Rig,
    names: Names,
}

/// Compares suppressors for the coil and the switch that the netlist's `sizing` names.
///
/// # Errors
/// A netlist that names none or cannot be sized, a circuit that cannot be simulated even without a suppressor, or an
/// interruption.
pub fn size(netlist: &Netlist, progress: &mut Progress<'_>) -> Result<Comparison, Failure> {
    let sizing = netlist.sizing.as_ref().ok_or_else(no_sizing)?;
    let tried = tried(sizing)?;
    let mut rig = Rig::of(netlist, sizing);
    let names = Names::free(&rig);
    let catalogue = Catalogue::read(&rig.document, &mut rig.sources);
    let mut facts = facts(&rig, &names)?;
    let transition = transition(netlist, &rig.switch);
    let mut ground = Ground {
        rig: &rig,
        names: &names,
        cycle: Cycle::of(facts.time_constant(), transition),
        level: DEFAULT_RELEASE * facts.nominal.current.abs(),
        stop: Arc::default(),
    };
    let bare = Trial::new(&ground, &Addition::default()).map_err(failure)?;
    ground.level = bare.level();
    facts.allowed_voltage = allowed_voltage(&bare);
    let bounded = facts.allowed_voltage.is_some();
    let mut done = vec![0.0; tried.len()];
    let candidates = workers::in_order(
        tried.len(),
        workers::at_hand(),
        |k, report| {
            let choices = (tried[k].choices)(&facts, &catalogue);
            let mut tick = |runs: usize| report.tell(runs);
            let candidate = Hunt::new(&ground, &facts, tried[k], choices, &mut tick).candidate();
            report.tell(usize::MAX);
            candidate
        },
        &mut |k, runs| {
            done[k] = match runs {
                usize::MAX => 1.0,
                runs => runs as f64 / (runs as f64 + EXPECTED_RUNS),
            };
            let share = done.iter().sum::<f64>() / tried.len() as f64;
            if progress(share, tried[k].word).is_break() {
                ground.stop.store(true, Ordering::Relaxed);
            }
        },
    );
    if ground.stop.load(Ordering::Relaxed) {
        return Err(Failure::Interrupted);
    }
    let standings: Vec<Standing> = candidates
        .iter()
        .map(|candidate| ranking::standing(candidate, bounded))
        .collect();
    let quickness_counts = sizing.release_within.is_some();
    let figures: Vec<Option<(f64, f64)>> = candidates.iter().map(figures).collect();
    let (cycle, level) = (ground.cycle, ground.level);
    let mut comparison = Comparison {
        title: netlist.title.clone(),
        bounded,
        quickness_counts,
        cycle,
        level,
        recommended: ranking::recommended(&standings, quickness_counts),
        front: ranking::front(&figures),
        standings,
        cautions: netlist.cautions.clone(),
        runs: candidates.iter().map(|candidate| candidate.runs).sum(),
        candidates,
        facts,
        rig,
        names,
    };
    let remarks = comparison.rig.remarks();
    let found = cautions::cautions(netlist, &comparison);
    comparison.cautions.extend(remarks);
    comparison.cautions.extend(found);
    Ok(comparison)
}

impl Comparison {
    /// The netlist of a candidate's run, as it was simulated: it can be written out and run by itself.
    pub fn document(&self, candidate: &Candidate) -> (Document, Sources) {
        let ground = Ground {
            rig: &self.rig,
            names: &self.names,
            cycle: self.cycle_of(candidate),
            level: self.level,
            stop: Arc::default(),
        };
        let (mut document, mut sources) = ground.document(&candidate.addition);
        let accuracy = format!("{FINE:e}");
        rig::put(
            &mut document,
            &mut sources,
            "analysis.transient.accuracy",
            &accuracy,
        );
        (document, sources)
    }

    /// Runs a candidate once more with all waveforms.
    ///
    /// # Errors
    /// A simulation that could not be completed.
    pub fn run(&self, candidate: &Candidate) -> Result<Outcome, Failure> {
        let (document, sources) = self.document(candidate);
        let netlist = crate::run::read_document(document, sources).map_err(|error| {
            let first = error.failure().diagnostics.first().cloned();
            Failure::Refused(Box::new(first.unwrap_or_else(|| {
                Diagnostic::error("refused", "the candidate's netlist is refused")
            })))
        })?;
        crate::run::run(&netlist, &mut |_, _| ControlFlow::Continue(()))
    }

    /// The cycle that a candidate was run with at nominal values.
    pub fn cycle_of(&self, candidate: &Candidate) -> Cycle {
        let study = candidate.study.as_ref();
        study.map_or(self.cycle, |study| study.nominal().cycle)
    }
}

fn no_sizing() -> Failure {
    let headline = "the netlist does not say what to size";
    let help = "sizing: {coil: k1_coil, switch: k1_driver, operating_rate: 600 /h, release: {current: 8 mA, within: 25 ms}}";
    Failure::Refused(Box::new(
        Diagnostic::error("missing-key", headline).help(help),
    ))
}

/// The suppressors that are tried: all, or those that `try` names, in the program's order.
fn tried(sizing: &Sizing) -> Result<Vec<&'static Suppressor>, Failure> {
    let Some(wanted) = &sizing.try_only else {
        return Ok(SUPPRESSORS.iter().collect());
    };
    for named in wanted {
        if suppressors::meant(&named.text).is_empty() {
            let words = SUPPRESSORS.iter().map(|suppressor| suppressor.word);
            let near = nearest(&named.text, words.clone());
            let label = near.map_or("unknown".into(), |near| format!("did you mean `{near}`?"));
            let words: Vec<&str> = words.collect();
            let diagnostic = Diagnostic::error(
                "unknown-word",
                format!("`{}` is no suppressor that is tried", named.text),
            );
            return Err(Failure::Refused(Box::new(
                diagnostic
                    .at(named.span, label)
                    .help(format!("there are {}", words.join(", "))),
            )));
        }
    }
    let meant = |suppressor: &&Suppressor| {
        wanted
            .iter()
            .any(|named| named.text == suppressor.word || named.text == suppressor.family)
    };
    Ok(SUPPRESSORS.iter().filter(meant).collect())
}

/// What the circuit is like without a suppressor. The cycle plays no part at rest.
fn facts(rig: &Rig, names: &Names) -> Result<Facts, Failure> {
    let ground = Ground {
        rig,
        names,
        cycle: Cycle::of(1.0, 0.0),
        level: 1.0,
        stop: Arc::default(),
    };
    let mut bare = Trial::new(&ground, &Addition::default()).map_err(failure)?;
    Facts::find(&mut bare.netlist, &rig.coil, &rig.switch)
}

fn failure(trouble: Trouble) -> Failure {
    match trouble {
        Trouble::Failed(failure) => failure,
        Trouble::Refused(headline) => {
            Failure::Refused(Box::new(Diagnostic::error("cannot-be-sized", headline)))
        }
    }
}

/// How long the switch takes to change [s].
fn transition(netlist: &Netlist, switch: &str) -> f64 {
    let circuit = &netlist.circuit;
    let part = circuit
        .find(switch)
        .and_then(|entry| entry.node.get("part"));
    let part = part.and_then(|part| part.text());
    let paths = [
        Some(format!("elements.{switch}.transition")),
        part.map(|part| format!("parts.{part}.transition")),
    ];
    let found = paths
        .iter()
        .flatten()
        .find_map(|path| circuit.parameters.find(path));
    found.map_or(0.0, |value| circuit.values()[value])
}

/// The lowest voltage that a check allows the switch, with its margin, and the check's name.
fn allowed_voltage(bare: &Trial) -> Option<(f64, String)> {
    let on_switch = bare.checks.iter().filter(|check| check.on_switch);
    on_switch
        .filter_map(|check| Some((check.allowed(&bare.netlist)?, check.name.clone())))
        .min_by(|a, b| a.0.total_cmp(&b.0))
}

/// Release time and switch voltage at nominal values.
fn figures(candidate: &Candidate) -> Option<(f64, f64)> {
    let nominal = candidate.study.as_ref()?.nominal();
    Some((nominal.release?, nominal.peak_voltage))
}
