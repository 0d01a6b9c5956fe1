//! A transient: the pilot run that finds the swings, then the run itself, shown to an observer.

use super::failure::Failure;
use super::start::{Begun, begin, begin_at, set_out, vary};
use super::steady::{self, Found, Warm};
use super::swings::{Swings, Wish};
use super::task::Start;
use crate::circuit::{Actor, Circuit};
use crate::dae::methods;
use crate::dae::{
    Advance, Ending, Impulse, March, Method, Moved, Point, Shadows, Span, Statistics, Tolerances,
    Variations,
};
use crate::diag::Diagnostic;
use crate::signals::{EventLog, Happening};
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
    /// Period [s] of the periodic state where it begins in one, and whether that is but a guess: the duration is then
    /// the period that is found.
    pub period: Option<(f64, bool)>,
    /// Steps that may be tried.
    pub most_steps: u64,
}

impl Settings {
    /// A run without further wishes: of this duration [s], with steps of any length and as many as it takes.
    pub fn new(duration: f64, accuracy: f64, start: Start) -> Self {
        Settings {
            duration,
            accuracy,
            start,
            longest_step: f64::INFINITY,
            period: None,
            most_steps: u64::MAX,
        }
    }
}

/// One thing that the observer of a simulation is shown.
pub enum Shown<'a> {
    /// A periodic state is being looked for.
    Settling,
    /// It has been found.
    Settled(&'a Found),
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
        happened: &'a [(Actor, Happening)],
        /// Derivatives at it, where variations are carried along.
        varied: Option<Moved<'a>>,
        /// Charges and flux linkages that moved at once.
        impulses: &'a [Impulse],
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
    /// The last periodic state that was found, from which the next one is looked for.
    pub warm: Option<&'a Warm>,
}

/// Where a run begins, and what finding that has told.
struct Beginning {
    begun: Begun,
    /// Simulated time [s].
    duration: f64,
    /// Tolerances of a single period, tightened where errors pile up by repetition.
    tight: Option<Tolerances>,
    spent: Statistics,
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
        // The search for a periodic state is worth the better method.
        if self.settings.period.is_none() {
            let light = self.pilot_by(methods::LIGHTEST, CREEPING, wishes.clone(), watch);
            if let Ok((scales, Some(ending))) = light {
                return Ok((scales, ending));
            }
        }
        let (scales, ending) = self.pilot_by(self.method, u32::MAX, wishes, watch)?;
        Ok((scales, ending.unwrap_or(Ending::Stopped)))
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
        let beginning = self.beginning(None, &mut |_, _, _| watch(0.0))?;
        let (_, ending) = pilot.march(wanted, beginning, None, &mut |_, shown, log| {
            match shown {
                Shown::Settling | Shown::Settled(_) | Shown::Start(_) => {}
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
    pub(super) fn pilot_tolerances(&self) -> Tolerances {
        use crate::elements::Measure;
        let floor = |measure: Measure| match measure {
            Measure::Voltage => 1e-3,
            Measure::Current => 1e-5,
            Measure::FluxLinkage => 1e-7,
            Measure::Flux => 1e-10,
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
        let beginning = self.beginning(Some(scales), watcher)?;
        self.march_scaled(scales, beginning, None, watcher)
    }

    /// Tolerances of a step at the accuracy asked.
    pub(super) fn tolerances(&self, scales: &[f64]) -> Tolerances {
        let local = self.method.local_tolerance(self.settings.accuracy);
        Tolerances::absolute(scales.iter().map(|scale| local * scale).collect())
    }

    /// Where the run begins: at once, or in a periodic state that has to be found first.
    fn beginning(
        &self,
        scales: Option<&[f64]>,
        watcher: &mut Watcher<'_>,
    ) -> Result<Beginning, Failure> {
        let circuit = self.circuit;
        let duration = self.settings.duration;
        let Some((period, unknown)) = self.settings.period else {
            return Ok(Beginning {
                begun: begin(circuit, self.settings.start)?,
                duration,
                tight: None,
                spent: Statistics::default(),
            });
        };
        let log = EventLog::default();
        let found = steady::find(self, (period, unknown), scales, &mut || {
            watcher(circuit, Shown::Settling, &log)
        })?;
        if watcher(circuit, Shown::Settled(&found), &log).is_break() {
            return Err(Failure::Interrupted);
        }
        Ok(Beginning {
            begun: begin_at(circuit, found.state)?,
            duration: if unknown { found.period } else { duration },
            tight: found.tolerances.filter(|_| period == duration),
            spent: found.counted,
        })
    }

    /// The same, and the derivatives by each column's parameter are carried along: steps and events are shown with them.
    pub fn run_varied(
        &self,
        scales: &[f64],
        columns: &[Shadows<'_, Circuit>],
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let (circuit, from) = (self.circuit, self.settings.start);
        if self.settings.period.is_some() {
            let text = "how a periodic state moves with a parameter is not computed";
            let refused = Diagnostic::error("no-sensitivity", text)
                .help("run a `transient` that has settled, and read in a late window");
            return Err(Failure::Refused(Box::new(refused)));
        }
        let begun = begin(circuit, from)?;
        let all = columns.iter().copied().map(Some).collect();
        let mut variations = Variations::new(circuit, all, scales.to_vec());
        vary(circuit, from, &begun, columns, &mut variations)?;
        let beginning = Beginning {
            begun,
            duration: self.settings.duration,
            tight: None,
            spent: Statistics::default(),
        };
        self.march_scaled(scales, beginning, Some(&mut variations), watcher)
    }

    fn march_scaled(
        &self,
        scales: &[f64],
        mut beginning: Beginning,
        variations: Option<&mut Variations<'_, Circuit>>,
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        // Over one period errors pile up by repetition alone, which the tight tolerances see to.
        let tight = beginning.tight.take();
        let pile = match tight {
            Some(_) => f64::INFINITY,
            None => Method::pile(self.settings.accuracy),
        };
        let fine = tight.unwrap_or_else(|| self.tolerances(scales));
        let wanted = Wanted {
            tolerances: &fine,
            pile,
        };
        self.march(wanted, beginning, variations, watcher)
    }

    fn march(
        &self,
        wanted: Wanted<'_>,
        beginning: Beginning,
        variations: Option<&mut Variations<'_, Circuit>>,
        watcher: &mut Watcher<'_>,
    ) -> Result<(Statistics, Ending), Failure> {
        let circuit = self.circuit;
        let Beginning {
            begun: Begun {
                state, happened, ..
            },
            duration,
            mut spent,
            ..
        } = beginning;
        let state = set_out(circuit, self.settings.start, state);
        let mut log = EventLog::default();
        for (k, what) in happened {
            log.note(&circuit.owner(k), what, 0.0);
        }
        if watcher(circuit, Shown::Start(state.point()), &log).is_break() {
            return Ok((Statistics::default(), Ending::Stopped));
        }
        let mut march = March::new(self.method, state);
        let span = Span {
            pile: wanted.pile,
            longest_step: self.settings.longest_step,
            most_steps: self.settings.most_steps,
            ..Span::new(duration, wanted.tolerances)
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
                    impulses,
                } => {
                    let (mut x, mut mode) = (x_before.to_vec(), mode_before.to_vec());
                    let mut happened = Vec::new();
                    for cause in *causes {
                        circuit.take(*cause, *time, &mut x, &mut mode, &mut |k, what| {
                            happened.push((k, what))
                        });
                    }
                    for &(k, what) in &happened {
                        log.note(&circuit.owner(k), what, *time);
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
                            impulses,
                        },
                        &log,
                    )
                }
            })
            .map_err(|error| Failure::march(circuit, error))?;
        spent.add(&march.counted);
        Ok((spent, ending))
    }
}
