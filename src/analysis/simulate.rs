//! A transient: the pilot run that finds the swings, then the run itself, shown to an observer.

use super::failure::Failure;
use super::start::{Begun, begin, vary};
use super::swings::{Swings, Wish};
use super::task::Start;
use crate::circuit::Circuit;
use crate::dae::methods;
use crate::dae::{
    Advance, Ending, March, Method, Moved, Point, Shadows, Span, State, Statistics, Tolerances,
    Variations,
};
use crate::signals::{EventLog, Happening, Owner};
use std::ops::ControlFlow;

/// Numbers of a transient [SI].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settings {
    /// Simulated time [s].
    pub duration: f64,
    /// Error aimed at in every waveform, relative to its largest swing.
    pub accuracy: f64,
    /// Where it begins.
    pub start: Start,
    /// Longest step [s]; infinity for none.
    pub longest_step: f64,
}

/// One thing that the observer of a simulation is shown.
pub enum Shown<'a> {
    /// The start.
    Start(Point<'a>),
    /// A step.
    Step(&'a crate::dae::Step<'a>),
    /// An event, already in the log.
    Event {
        /// Instant [s].
        time: f64,
        /// Unknowns and modes before it.
        before: Point<'a>,
        /// Unknowns and modes after it.
        after: Point<'a>,
        /// Elements that opened or closed.
        happened: &'a [(usize, Happening)],
        /// Derivatives at it, where variations are carried along.
        varied: Option<Moved<'a>>,
    },
}

/// The observer's face: it sees the log of events up to now.
pub type Watcher<'a> = dyn FnMut(&Circuit, Shown<'_>, &EventLog) -> ControlFlow<()> + 'a;

/// A circuit with its start and its tolerances, ready to be run.
pub struct Simulation<'a> {
    /// The circuit.
    pub circuit: &'a Circuit,
    /// The numbers.
    pub settings: Settings,
    /// The method.
    pub method: &'static Method,
}

/// Tolerances of a march, of which `pile` may pile up.
struct Wanted<'a> {
    tolerances: &'a Tolerances,
    pile: f64,
}

/// Share of an unknown's magnitude that a step of the pilot run may be off by: a scale needs one digit.
const PILOT: f64 = 3e-2;
/// Share of the run in which a magnitude past fades by e from the pilot run's tolerances.
const MEMORY: f64 = 0.1;
/// Steps that the lightest method may take from one event to the next. It creeps where a charge of next to nothing hangs
/// on a junction that goes from conducting to blocking; whoever rings for long is as well off with the run's own method.
const CREEPING: u32 = 1000;

impl Simulation<'_> {
    /// Finds the swings of all unknowns by a quick pilot run: with the lightest method, and where that fails or creeps
    /// with the run's own.
    pub fn pilot(&self, wishes: Vec<Wish>) -> Result<Vec<f64>, Failure> {
        let (scales, _) = self.pilot_watched(wishes, &mut |_| ControlFlow::Continue(()))?;
        Ok(scales)
    }

    /// The same, told to somebody who may stop it: simulated time [s]. The swings are then those found so far.
    pub fn pilot_watched(
        &self,
        wishes: Vec<Wish>,
        watch: &mut dyn FnMut(f64) -> ControlFlow<()>,
    ) -> Result<(Vec<f64>, Ending), Failure> {
        let light = self.pilot_by(methods::LIGHTEST, CREEPING, wishes.clone(), watch);
        match light {
            Ok((scales, Some(ending))) => Ok((scales, ending)),
            Ok((_, None)) | Err(_) => {
                let (scales, ending) = self.pilot_by(self.method, u32::MAX, wishes, watch)?;
                Ok((scales, ending.unwrap_or(Ending::Stopped)))
            }
        }
    }

    /// One attempt: the scales, and how it ended, which is nothing where it took more than `most` steps between events.
    fn pilot_by(
        &self,
        method: &'static Method,
        most: u32,
        wishes: Vec<Wish>,
        watch: &mut dyn FnMut(f64) -> ControlFlow<()>,
    ) -> Result<(Vec<f64>, Option<Ending>), Failure> {
        let mut swings = Swings::new(self.circuit.unknowns.len(), wishes);
        let mut steps = 0;
        let pilot = Simulation { method, ..*self };
        let wanted = Wanted {
            tolerances: &self.pilot_tolerances(),
            pile: f64::INFINITY,
        };
        let begun = begin(self.circuit, self.settings.start)?;
        let (_, ending) = pilot.march(wanted, begun, None, &mut |_, shown, log| {
            match shown {
                Shown::Start(_) => {}
                Shown::Event { .. } => steps = 0,
                Shown::Step(step) => {
                    steps += 1;
                    swings.step(step, log);
                    if steps > most {
                        return ControlFlow::Break(());
                    }
                    return watch(step.to);
                }
            }
            ControlFlow::Continue(())
        })?;
        Ok((
            swings.scales(self.circuit),
            (steps <= most).then_some(ending),
        ))
    }

    /// Tolerances of the pilot run: relative, above a floor that is small for what it measures.
    fn pilot_tolerances(&self) -> Tolerances {
        use crate::elements::Measure;
        let floor = |measure: Measure| match measure {
            Measure::Voltage => 1e-3,
            Measure::Current => 1e-5,
            Measure::FluxLinkage => 1e-7,
            _ => 1e-6,
        };
        Tolerances {
            absolute: self
                .circuit
                .unknowns
                .iter()
                .map(|unknown| floor(unknown.measure))
                .collect(),
            relative: PILOT,
            memory: MEMORY * self.settings.duration,
        }
    }

    /// Runs at the accuracy asked, with scales from a pilot run.
    pub fn run_scaled(
        &self,
        scales: &[f64],
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let begun = begin(self.circuit, self.settings.start)?;
        self.march_scaled(scales, begun, None, watcher)
    }

    /// The same, and the derivatives by each column's parameter are carried along: steps and events are shown with them.
    pub fn run_varied(
        &self,
        scales: &[f64],
        columns: &[Shadows<'_, Circuit>],
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let (circuit, from) = (self.circuit, self.settings.start);
        let begun = begin(circuit, from)?;
        let all = columns.iter().copied().map(Some).collect();
        let mut variations = Variations::new(circuit, all, scales.to_vec());
        vary(circuit, from, &begun, columns, &mut variations)?;
        self.march_scaled(scales, begun, Some(&mut variations), watcher)
    }

    fn march_scaled(
        &self,
        scales: &[f64],
        begun: Begun,
        variations: Option<&mut Variations<'_, Circuit>>,
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let accuracy = self.settings.accuracy;
        let local = self.method.local_tolerance(accuracy);
        let fine = Tolerances::absolute(scales.iter().map(|scale| local * scale).collect());
        let wanted = Wanted {
            tolerances: &fine,
            pile: Method::pile(accuracy),
        };
        self.march(wanted, begun, variations, watcher)
    }

    fn march(
        &self,
        wanted: Wanted<'_>,
        begun: Begun,
        variations: Option<&mut Variations<'_, Circuit>>,
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let circuit = self.circuit;
        let Begun {
            state, happened, ..
        } = begun;
        let mut log = EventLog::default();
        for (k, what) in happened {
            log.note(&owner(circuit, k), what, 0.0);
        }
        if watcher(circuit, Shown::Start(point(&state)), &log).is_break() {
            return Ok((Statistics::default(), Ending::Stopped));
        }
        let mut march = March::new(self.method, state);
        let span = Span {
            pile: wanted.pile,
            longest_step: self.settings.longest_step,
            ..Span::new(self.settings.duration, wanted.tolerances)
        };
        let ending = march
            .run_varied(circuit, span, variations, &mut |advance| match advance {
                Advance::Start { .. } => ControlFlow::Continue(()),
                Advance::Step(step) => watcher(circuit, Shown::Step(step), &log),
                Advance::Event {
                    time,
                    causes,
                    x_before,
                    x_after,
                    mode_before,
                    mode_after,
                    varied,
                } => {
                    let (mut x, mut mode) = (x_before.to_vec(), mode_before.to_vec());
                    let mut happened = Vec::new();
                    for cause in *causes {
                        circuit.take(*cause, *time, &mut x, &mut mode, &mut |k, what| {
                            happened.push((k, what))
                        });
                    }
                    for &(k, what) in &happened {
                        log.note(&owner(circuit, k), what, *time);
                    }
                    let before = Point {
                        time: *time,
                        x: x_before,
                        mode: mode_before,
                    };
                    let after = Point {
                        time: *time,
                        x: x_after,
                        mode: mode_after,
                    };
                    watcher(
                        circuit,
                        Shown::Event {
                            time: *time,
                            before,
                            after,
                            happened: &happened,
                            varied: *varied,
                        },
                        &log,
                    )
                }
            })
            .map_err(|error| Failure::march(circuit, error))?;
        Ok((march.counted, ending))
    }
}

fn point(state: &State) -> Point<'_> {
    Point {
        time: state.time,
        x: &state.x,
        mode: &state.mode,
    }
}

fn owner(circuit: &Circuit, entry: usize) -> Owner {
    Owner {
        element: circuit.entries[entry].name.clone(),
        winding: None,
    }
}
