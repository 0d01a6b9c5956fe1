//! One netlist, one variation, to an outcome: the whole way on one screen.
//!
//! ```text
//! text -> load -> Netlist (circuit, analysis, readings, limits) -> pilot -> run -> Outcome
//! ```

mod beyond_ladder;
mod cautions;
mod coils;
mod core_loss;
mod feed;
mod netlist;
mod obvious;
mod outcome;
mod repeated;
mod results;
mod sensitivity;
mod verify;
mod watched;

pub use cautions::coils as coil_cautions;
pub use coils::{CoilReport, Copper, CopperPoint, CurvePoint, coil_reports};
pub use core_loss::CoreLoss;
pub use netlist::{Netlist, ReadError, Sizing, read, read_coils, read_document};
pub use outcome::{LimitResult, Outcome, RatingResult, ReadingResult, Work};
pub use repeated::{Figures, RatingFigure, again, pilot};
pub use sensitivity::{Sensitivity, parameter};

use crate::analysis::simulate::Shown;
use crate::analysis::{
    Analysis, Failure, MOST_STEPS, Settings, Simulation, Start, Warm, Wish, period,
};
use crate::circuit::{Circuit, Tap};
use crate::dae::{Ending, Method};
use crate::elements::Unknown;
use crate::netlist::Value;
use crate::signals::EventLog;
use feed::{Feed, Keeps};
use sensitivity::Neighbours;
use std::ops::ControlFlow;

/// What is asked of a run besides what its netlist asks.
#[derive(Clone, Debug, Default)]
pub struct Request {
    /// Repeat it at a tenth of the accuracy and state the numerical error of each reading.
    pub verify: bool,
    /// Values by which every reading is differentiated.
    pub sensitivity: Vec<Value>,
}

/// What a run is at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stage {
    /// The quick run that finds how far everything swings.
    Swings,
    /// The run itself.
    Run,
    /// The repetition at a tenth of the accuracy.
    Verification,
}

/// Told while a run goes on: simulated time and duration [s]; may stop it. The quick run before it is told too.
pub type Progress<'a> = dyn FnMut(f64, f64) -> ControlFlow<()> + 'a;

/// Told while a run goes on: what it is at, simulated time and duration of that [s]; may stop it.
pub type Watch<'a> = dyn FnMut(Stage, f64, f64) -> ControlFlow<()> + 'a;

/// Runs a netlist at the values in force.
///
/// # Errors
/// A simulation that could not be completed.
pub fn run(netlist: &Netlist, progress: &mut Progress<'_>) -> Result<Outcome, Failure> {
    perform(netlist, &Request::default(), &mut |_, time, duration| {
        progress(time, duration)
    })
}

/// Runs a netlist at the values in force, with further wishes. A run that was stopped is an outcome of what was
/// simulated until then.
///
/// # Errors
/// A simulation that could not be completed, or was stopped before it began.
pub fn perform(
    netlist: &Netlist,
    request: &Request,
    watch: &mut Watch<'_>,
) -> Result<Outcome, Failure> {
    match settings(netlist)? {
        None => at_rest(netlist, request),
        Some(settings) => over_time(netlist, settings, request, watch),
    }
}

/// The method of all transients: the first of the list, which needs the least work at every accuracy, as measured in
/// `tests/benches`.
pub fn method() -> &'static Method {
    crate::dae::METHODS
        .first()
        .expect("the list of methods is not empty")
}

/// The numbers of a run over time; None for a state at rest.
fn settings(netlist: &Netlist) -> Result<Option<Settings>, Failure> {
    let circuit = &netlist.circuit;
    let values = circuit.values();
    Ok(match &netlist.analysis {
        Analysis::OperatingPoint => None,
        Analysis::Transient(transient) => Some(Settings {
            duration: values[transient.duration],
            accuracy: values[transient.accuracy],
            start: transient.start,
            longest_step: transient
                .longest_step
                .map_or(f64::INFINITY, |value| values[value]),
            most_steps: transient.most_steps as u64,
            period: if transient.start == Start::SteadyState {
                let common = period::common_period(circuit, transient.start_span);
                Some((
                    common.map_err(|why| Failure::Refused(Box::new(why)))?,
                    false,
                ))
            } else {
                None
            },
        }),
        Analysis::SteadyState(task) => Some(Settings {
            duration: values[task.period],
            accuracy: values[task.accuracy],
            start: Start::SteadyState,
            longest_step: f64::INFINITY,
            most_steps: MOST_STEPS,
            period: Some((values[task.period], task.unknown)),
        }),
    })
}

/// Instant [s] from which waveforms are kept.
fn record_from(netlist: &Netlist) -> f64 {
    match &netlist.analysis {
        Analysis::Transient(transient) => netlist.circuit.values()[transient.record_from],
        Analysis::OperatingPoint | Analysis::SteadyState(_) => 0.0,
    }
}

fn over_time(
    netlist: &Netlist,
    settings: Settings,
    request: &Request,
    watch: &mut Watch<'_>,
) -> Result<Outcome, Failure> {
    let warm = Warm::default();
    let simulation = Simulation {
        circuit: &netlist.circuit,
        settings,
        method: method(),
        warm: Some(&warm),
    };
    let duration = settings.duration;
    let (scales, found) = simulation.pilot_watched(wishes(netlist), &mut |time| {
        watch(Stage::Swings, time, duration)
    })?;
    if found == Ending::Stopped {
        return Err(Failure::Interrupted);
    }
    let keeps = Keeps {
        waveforms: Some((record_from(netlist), duration)),
        accounts: None,
        pieces: if request.sensitivity.is_empty() {
            1
        } else {
            sensitivity::PIECES
        },
    };
    let neighbours = request.sensitivity.iter();
    let neighbours: Vec<Neighbours> = neighbours
        .map(|&value| Neighbours::of(netlist, value))
        .collect::<Result<_, Failure>>()?;
    let mut feed = Feed::new(netlist, keeps);
    let mut moved = sensitivity::Watcher::new(&neighbours);
    let mut show = |circuit: &Circuit, shown: Shown<'_>, log: &EventLog| {
        if !neighbours.is_empty() {
            moved.take(&shown, log);
        }
        watch(Stage::Run, feed.take(circuit, shown, log), duration)
    };
    let (counted, ending) = if neighbours.is_empty() {
        simulation.run_scaled(&scales, &mut show)?
    } else {
        let shadows: Vec<_> = neighbours.iter().map(Neighbours::shadows).collect();
        simulation.run_varied(&scales, &shadows, &mut show)?
    };
    let work = Work { counted, ending };
    let sensitivities = moved.finish(netlist, &feed.found(), work);
    let mut outcome = feed.finish(netlist, duration, work);
    outcome.sensitivities = sensitivities;
    if request.verify && ending == Ending::Reached {
        let repeated = verify::Repeated {
            netlist,
            simulation: &simulation,
            scales: &scales,
        };
        repeated.verify(&mut outcome, &mut |time| {
            watch(Stage::Verification, time, duration)
        });
    }
    Ok(outcome)
}

fn at_rest(netlist: &Netlist, request: &Request) -> Result<Outcome, Failure> {
    let rest = |netlist: &Netlist| {
        let from = crate::analysis::Start::OperatingPoint;
        crate::analysis::start(&netlist.circuit, from).map(|(state, _)| state)
    };
    let state = rest(netlist)?;
    let found = results::found_at_rest(netlist, state.point());
    let mut sensitivities = Vec::new();
    for &value in &request.sensitivity {
        let neighbours = Neighbours::of(netlist, value)?;
        let readings = neighbours.each(|netlist| {
            let state = rest(netlist)?;
            Ok(results::found_at_rest(netlist, state.point()))
        })?;
        sensitivities.extend(neighbours.sensitivities(netlist, &found, &readings));
    }
    let mut outcome = results::at_rest(netlist, state.point());
    outcome.sensitivities = sensitivities;
    Ok(outcome)
}

/// Which unknowns each reading is made of, and in which window.
fn wishes(netlist: &Netlist) -> Vec<Wish> {
    let circuit = &netlist.circuit;
    netlist
        .readings
        .iter()
        .filter(|reading| reading.kind.word != "value_at")
        .filter_map(|reading| {
            let tap = circuit.tap(&reading.signal.phrase).ok()?;
            Some(Wish {
                window: reading.window(circuit.values()),
                unknowns: unknowns_of(circuit, &tap),
            })
        })
        .collect()
}

/// The unknowns that a signal is made of.
fn unknowns_of(circuit: &Circuit, tap: &Tap) -> Vec<usize> {
    let number = |unknown: &Unknown| (*unknown != Unknown::GROUND).then_some(unknown.0 as usize);
    match tap {
        Tap::Potential(a, b) => [a, b].into_iter().filter_map(number).collect(),
        Tap::Current(k, _) | Tap::Power(k) | Tap::Energy(k) | Tap::Of(k, _, _) => {
            let own: Vec<usize> = circuit
                .unknowns
                .iter()
                .enumerate()
                .filter(|(_, claimed)| claimed.element == Some(*k))
                .map(|(unknown, _)| unknown)
                .collect();
            if own.is_empty() {
                circuit.entries[*k]
                    .nodes
                    .iter()
                    .filter_map(number)
                    .collect()
            } else {
                own
            }
        }
    }
}
