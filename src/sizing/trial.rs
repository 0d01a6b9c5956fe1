//! One suppressor with its parts in place, run at any corner.

use super::checks::{Check, checks, slack};
use super::cycle::{COARSE, Cycle, FINE, Handles, Names};
use super::facts::{apply, cold_resistance, set};
use super::rig::{Rig, put};
use super::stress::{Stress, Stresses};
use crate::analysis::Failure;
use crate::limits::Verdict;
use crate::netlist::{Document, Node};
use crate::run::{Netlist, ReadError, again, pilot, read_document};
use crate::studies::{Corner, Side, Spread, Tried, Worst, spreads, worst};
use std::collections::BTreeMap;
use std::ops::ControlFlow;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// The open phase is doubled so often at most until the coil has let go.
const MOST_DOUBLINGS: u32 = 6;
/// The same until nothing moves any more: what still rings then says little.
const MOST_FOR_REST: u32 = 2;
/// Swing of the winding current at the end of the open phase, as a share of what was interrupted, that counts as rest.
const AT_REST: f64 = 0.02;
/// Share of the operating current that counts as released where the netlist names none (common practice: relays let
/// go at 10 % of their rated voltage or above).
pub const DEFAULT_RELEASE: f64 = 0.1;
/// A margin this close to what is asked, or below it, is looked at again with [`FINE`].
const CLOSE_CALL: f64 = 5e-3;

/// What one run at one corner came to. SI units.
#[derive(Clone, Debug)]
pub struct Reached {
    /// Highest magnitude of the voltage across the switch.
    pub peak_voltage: f64,
    /// From the opening to the last instant above the release current; None where it never lets go.
    pub release: Option<f64>,
    /// What all added parts dissipate.
    pub energy: f64,
    /// Winding current as the switch opens.
    pub current: f64,
    /// The release current that counted.
    pub level: f64,
    /// One per check.
    pub verdicts: Vec<Verdict>,
    /// One per rating of the circuit.
    pub stresses: Vec<Stress>,
    /// The cycle that was run.
    pub cycle: Cycle,
    /// The accuracy that it was run at.
    pub accuracy: f64,
}

/// What a study of corners came to.
#[derive(Clone, Debug)]
pub struct Study {
    /// Margins beyond those asked for, one per check.
    pub worst: Worst,
    /// One per corner tried, in the same order.
    pub reached: Vec<Reached>,
}

impl Study {
    /// True where every check holds at every corner tried.
    pub fn holds(&self) -> bool {
        self.reached
            .iter()
            .all(|reached| reached.verdicts.iter().all(|verdict| verdict.holds))
    }

    /// The lowest margin beyond what is asked, of all checks.
    pub fn slack(&self) -> f64 {
        let checks = 0..self.worst.at.len();
        let lowest = checks.map(|check| self.worst.margin(check));
        lowest.fold(f64::INFINITY, f64::min)
    }

    /// The verdict on a check at its worst corner.
    pub fn verdict(&self, check: usize) -> &Verdict {
        &self.reached[self.worst.at[check]].verdicts[check]
    }

    /// The run with values as written.
    pub fn nominal(&self) -> &Reached {
        &self.reached[0]
    }

    /// The worst corners of all checks, each once, that of the least margin first.
    pub fn worst_corners(&self) -> Vec<Corner> {
        let mut checks: Vec<usize> = (0..self.worst.at.len()).collect();
        checks.sort_by(|&a, &b| self.worst.margin(a).total_cmp(&self.worst.margin(b)));
        let mut corners: Vec<Corner> = Vec::new();
        for check in checks {
            let corner = self.worst.corner(check);
            if !corners.contains(corner) {
                corners.push(corner.clone());
            }
        }
        corners
    }
}

/// Why a trial could not be made or run.
#[derive(Clone, Debug)]
pub enum Trouble {
    /// The circuit with the suppressor in it is refused: the first message's headline.
    Refused(String),
    /// A simulation could not be completed.
    Failed(Failure),
}

impl Trouble {
    /// In a sentence.
    pub fn text(&self) -> String {
        match self {
            Trouble::Refused(headline) => headline.clone(),
            Trouble::Failed(Failure::Refused(diagnostic)) => diagnostic.headline.clone(),
            Trouble::Failed(Failure::Stopped { headline, .. }) => headline.clone(),
            Trouble::Failed(Failure::Interrupted) => "it was interrupted".into(),
        }
    }
}

impl From<Failure> for Trouble {
    fn from(failure: Failure) -> Self {
        Trouble::Failed(failure)
    }
}

/// What is put into the netlist: elements by name as they read there, and entries of `parts:`.
#[derive(Clone, Debug, Default)]
pub struct Addition {
    /// Name and mapping of each element.
    pub elements: Vec<(String, String)>,
    /// Name and entry of each part that they use.
    pub parts: Vec<(String, Node)>,
}

/// One suppressor with its parts in place.
pub struct Trial {
    /// The netlist with the suppressor in it.
    pub netlist: Netlist,
    /// Its spreads.
    pub spreads: Vec<Spread>,
    /// What has to hold.
    pub checks: Vec<Check>,
    added: Vec<usize>,
    handles: Handles,
    stresses: Stresses,
    scales: Vec<f64>,
    cycle: Cycle,
    doublings: u32,
    level: Level,
    known: BTreeMap<Corner, Reached>,
    stop: Arc<AtomicBool>,
    /// Simulations so far.
    pub runs: usize,
}

/// Where the release current comes from.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Level {
    /// From the netlist: a current, or the voltage that makes it in the cold coil.
    Sizing,
    /// This current [A].
    Fixed(f64),
}

/// What all trials have in common.
pub struct Ground<'a> {
    /// The prepared netlist.
    pub rig: &'a Rig,
    /// Names of the readings that are added.
    pub names: &'a Names,
    /// The cycle that is run.
    pub cycle: Cycle,
    /// Release current at nominal values [A].
    pub level: f64,
    /// Set once somebody asks for an end: runs end at their next step.
    pub stop: Arc<AtomicBool>,
}

impl Ground<'_> {
    /// The document of a trial.
    pub fn document(&self, addition: &Addition) -> (Document, crate::diag::Sources) {
        let mut document = self.rig.document.clone();
        let mut sources = self.rig.sources.clone();
        self.names.write(
            self.rig,
            self.cycle,
            self.level,
            &mut document,
            &mut sources,
        );
        for (name, part) in &addition.parts {
            document.insert(&format!("parts.{name}"), part.clone());
        }
        for (name, keys) in &addition.elements {
            put(
                &mut document,
                &mut sources,
                &format!("elements.{name}"),
                keys,
            );
        }
        (document, sources)
    }
}

/// The first message of a netlist that was refused.
fn refused(error: &ReadError) -> Trouble {
    let first = error.failure().diagnostics.first();
    let headline = first.map_or("the netlist is refused", |first| &first.headline);
    Trouble::Refused(headline.to_owned())
}

impl Trial {
    /// Puts a suppressor in place.
    ///
    /// # Errors
    /// A circuit that is refused with it.
    pub fn new(ground: &Ground<'_>, addition: &Addition) -> Result<Self, Trouble> {
        let (document, sources) = ground.document(addition);
        let mut netlist = read_document(document, sources).map_err(|error| refused(&error))?;
        let missing = || Trouble::Refused("`sizing` is missing".into());
        let sizing = netlist.sizing.clone().ok_or_else(missing)?;
        let switch = &ground.rig.switch;
        let handles = Handles::find(&netlist, switch, ground.names).ok_or_else(missing)?;
        let rate = sizing
            .operating_rate
            .map(|rate| netlist.circuit.values()[rate]);
        let stresses = Stresses::prepare(&netlist.circuit, &mut netlist.readings, switch, rate);
        let names = addition.elements.iter();
        let added = names.filter_map(|(name, _)| netlist.circuit.index_of(name));
        let level = if sizing.release_current.is_some() || sizing.release_voltage.is_some() {
            Level::Sizing
        } else {
            Level::Fixed(ground.level)
        };
        Ok(Trial {
            added: added.collect(),
            spreads: spreads(&netlist.circuit),
            checks: checks(&netlist, &sizing, switch),
            netlist,
            handles,
            stresses,
            scales: Vec::new(),
            cycle: ground.cycle,
            doublings: 0,
            level,
            known: BTreeMap::new(),
            stop: Arc::clone(&ground.stop),
            runs: 0,
        })
    }

    /// Looks for the worst corner of every check; every corner is run once, and those that fail or nearly do once more
    /// at [`FINE`].
    ///
    /// # Errors
    /// A simulation that could not be completed.
    pub fn study(&mut self) -> Result<Study, Trouble> {
        let count = self.spreads.len();
        let found = worst(count, &mut |corner| self.slacks(corner))?;
        let mut study = self.gathered(found);
        self.confirm(&mut study)?;
        Ok(study)
    }

    /// Runs the nominal corner and these alone, and what fails or nearly does once more.
    ///
    /// # Errors
    /// A simulation that could not be completed.
    pub fn glance(&mut self, corners: &[Corner]) -> Result<Study, Trouble> {
        let mut study = self.estimate(corners)?;
        self.confirm(&mut study)?;
        Ok(study)
    }

    /// Runs the nominal corner and these alone, at [`COARSE`].
    ///
    /// # Errors
    /// A simulation that could not be completed.
    pub fn estimate(&mut self, corners: &[Corner]) -> Result<Study, Trouble> {
        let nominal = vec![Side::Nominal; self.spreads.len()];
        let mut tried: Vec<Tried> = Vec::new();
        for corner in std::iter::once(&nominal).chain(corners) {
            let fits = corner.len() == nominal.len();
            if fits && tried.iter().all(|known| known.corner != *corner) {
                let margins = self.slacks(corner)?;
                tried.push(Tried {
                    corner: corner.clone(),
                    margins,
                });
            }
        }
        Ok(self.gathered(Worst::among(tried)))
    }

    /// Looks again at what decides: as long as the worst corner of a check is a close call or fails and was run at
    /// [`COARSE`] alone, it is run at [`FINE`], and the worst corner is looked for anew.
    fn confirm(&mut self, study: &mut Study) -> Result<(), Trouble> {
        while let Some(number) = (0..self.checks.len())
            .filter(|&check| study.worst.margin(check) < CLOSE_CALL)
            .map(|check| study.worst.at[check])
            .find(|&number| study.reached[number].accuracy > FINE)
        {
            self.sharpen(study, number)?;
        }
        Ok(())
    }

    /// Runs the nominal corner and the worst ones again at [`FINE`], where that was not done yet.
    ///
    /// # Errors
    /// A simulation that could not be completed.
    pub fn refine(&mut self, study: &mut Study) -> Result<(), Trouble> {
        loop {
            let mut numbers = study.worst.at.iter().copied().chain([0]);
            match numbers.find(|&number| study.reached[number].accuracy > FINE) {
                Some(number) => self.sharpen(study, number)?,
                None => return Ok(()),
            }
        }
    }

    /// Runs one corner of a study again at [`FINE`].
    fn sharpen(&mut self, study: &mut Study, number: usize) -> Result<(), Trouble> {
        let corner = study.worst.tried[number].corner.clone();
        let reached = self.run(&corner, FINE)?;
        self.known.insert(corner, reached.clone());
        let mut tried = std::mem::take(&mut study.worst.tried);
        tried[number].margins = reached.verdicts.iter().map(slack).collect();
        study.reached[number] = reached;
        study.worst = Worst::among(tried);
        Ok(())
    }

    fn gathered(&self, worst: Worst) -> Study {
        let known = |tried: &Tried| self.known[&tried.corner].clone();
        Study {
            reached: worst.tried.iter().map(known).collect(),
            worst,
        }
    }

    fn slacks(&mut self, corner: &[Side]) -> Result<Vec<f64>, Trouble> {
        if !self.known.contains_key(corner) {
            let reached = self.run(corner, COARSE)?;
            self.known.insert(corner.to_vec(), reached);
        }
        Ok(self.known[corner].verdicts.iter().map(slack).collect())
    }

    /// Runs a corner, with the switch open for longer where the coil has not let go.
    fn run(&mut self, corner: &[Side], accuracy: f64) -> Result<Reached, Trouble> {
        set(&mut self.netlist.circuit, &self.spreads, corner)?;
        let level = self.level();
        loop {
            let cycle = self.cycle.stretched(f64::from(1_u32 << self.doublings));
            let (reached, settled) = self.run_once(cycle, level, accuracy)?;
            let done = match settled {
                Settled::Yes => true,
                Settled::Restless => self.doublings >= MOST_FOR_REST,
                Settled::NotReleased => self.doublings >= MOST_DOUBLINGS,
            };
            if done {
                return Ok(reached);
            }
            self.doublings += 1;
        }
    }

    fn run_once(
        &mut self,
        cycle: Cycle,
        level: f64,
        accuracy: f64,
    ) -> Result<(Reached, Settled), Trouble> {
        let changes = self.handles.changes(cycle, level, accuracy);
        apply(&mut self.netlist.circuit, &changes)?;
        if self.scales.len() != self.netlist.circuit.unknowns.len() {
            self.scales = pilot(&self.netlist)?;
        }
        self.runs += 1;
        let stop = &self.stop;
        let figures = again(&self.netlist, &self.scales, &self.added, &mut |_| {
            if stop.load(Ordering::Relaxed) {
                ControlFlow::Break(())
            } else {
                ControlFlow::Continue(())
            }
        })?;
        let value = |k: usize| figures.readings[k].taken.map(|taken| taken.value);
        let [at_opening, at_closing] = self.handles.current.map(|k| value(k).unwrap_or(f64::NAN));
        let last = self.handles.release.map(value);
        let last = last
            .into_iter()
            .flatten()
            .fold(None, |best: Option<f64>, time| {
                Some(best.map_or(time, |best| best.max(time)))
            });
        let released = at_closing.abs() <= level;
        let release = match last {
            _ if !released => None,
            None => (at_opening.abs() <= level).then_some(0.0),
            Some(time) => Some(time),
        };
        let moves = value(self.handles.rest).unwrap_or(0.0);
        let settled = if !released {
            Settled::NotReleased
        } else if moves > AT_REST * at_opening.abs() {
            Settled::Restless
        } else {
            Settled::Yes
        };
        let stresses = self.stresses.take(&figures, cycle);
        let judge = |check: &Check| check.judge(&self.netlist, &figures, release, &stresses);
        let reached = Reached {
            peak_voltage: value(self.handles.peak).unwrap_or(f64::NAN),
            release,
            energy: figures
                .accounts
                .iter()
                .map(|account| account.dissipated)
                .sum(),
            current: at_opening,
            level,
            verdicts: self.checks.iter().map(judge).collect(),
            cycle,
            accuracy,
            stresses,
        };
        Ok((reached, settled))
    }

    /// The release current at the values in force [A].
    pub fn level(&self) -> f64 {
        let circuit = &self.netlist.circuit;
        let values = circuit.values();
        let sizing = self.netlist.sizing.as_ref();
        let (Level::Sizing, Some(sizing)) = (self.level, sizing) else {
            return match self.level {
                Level::Fixed(level) => level,
                Level::Sizing => 0.0,
            };
        };
        let coil = circuit.find(&sizing.coil.text);
        match (sizing.release_current, sizing.release_voltage, coil) {
            (Some(current), _, _) => values[current],
            (None, Some(voltage), Some(coil)) => values[voltage] / cold_resistance(circuit, coil),
            _ => 0.0,
        }
    }

    /// Puts every value back as written.
    ///
    /// # Errors
    /// None that the netlist did not have when it was read.
    pub fn back_to_nominal(&mut self) -> Result<(), Trouble> {
        let corner = vec![Side::Nominal; self.spreads.len()];
        set(&mut self.netlist.circuit, &self.spreads, &corner)?;
        Ok(())
    }
}

/// How a run's open phase ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Settled {
    Yes,
    /// Let go, but something still moves.
    Restless,
    NotReleased,
}
