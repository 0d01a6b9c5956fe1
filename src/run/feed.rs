//! What watches a run: it feeds readings and ratings step by step, keeps the ledger and the waveforms.

use super::beyond_ladder::Ladders;
use super::core_loss::CoreLosses;
use super::netlist::Netlist;
use super::outcome::{Outcome, Work};
use super::repeated::{Figures, RatingFigure};
use super::results::{Findings, outcome, rating_result};
use super::watched::{Signals, stressing};
use crate::analysis::{Analysis, Found as Periodic, Ledger, LedgerKeeper, simulate::Shown};
use crate::circuit::{Actor, Circuit};
use crate::dae::{Point, Step};
use crate::limits::{RatingMeter, RatingUse};
use crate::readings::{Outcome as Found, Taking};
use crate::signals::{EventLog, Happening, Rated, Recorder};

/// What a run keeps besides readings and ratings.
#[derive(Clone, Copy, Debug)]
pub struct Keeps<'a> {
    /// Instants [s] from which waveforms are kept, and to which the run goes; None for no waveform at all.
    pub waveforms: Option<(f64, f64)>,
    /// Elements whose account is kept, by index; None for all.
    pub accounts: Option<&'a [usize]>,
    /// Pieces in place of each one that a reading is fed: 1, or more where it is differentiated.
    pub pieces: usize,
}

/// The watcher of one run.
pub struct Feed {
    signals: Signals,
    pieces: usize,
    /// Readings, each with the number of its signal.
    readings: Vec<(usize, Taking)>,
    ratings: Vec<Metered>,
    recorder: Option<Recorder>,
    /// Core losses, where waveforms are kept: what a person looks at.
    core_losses: Option<CoreLosses>,
    ladders: Option<Ladders>,
    /// Signals that are recorded, and the instant [s] from which on.
    recorded: (usize, f64),
    /// Switches whose first opening has been recorded.
    opened: Vec<Actor>,
    accounts: Option<Vec<usize>>,
    keeper: Option<LedgerKeeper>,
    last: Last,
    log: EventLog,
    /// The periodic state that the run begins in.
    steady: Option<Periodic>,
}

/// A rating of an element at work.
pub struct Metered {
    /// Index of the element.
    pub entry: usize,
    /// Which rating.
    pub rated: Rated,
    signal: usize,
    meter: RatingMeter,
}

impl Metered {
    /// How much of it was used so far, with the values in force.
    pub fn used(&self, circuit: &Circuit) -> RatingUse {
        let values = circuit.values();
        let width = self.rated.width.map(|width| values[width]);
        self.meter.finish(values[self.rated.value], width)
    }
}

#[derive(Default)]
struct Last {
    time: f64,
    x: Vec<f64>,
    mode: Vec<f64>,
}

impl Last {
    fn keep(&mut self, at: Point<'_>) {
        self.time = at.time;
        self.x.clear();
        self.x.extend_from_slice(at.x);
        self.mode.clear();
        self.mode.extend_from_slice(at.mode);
    }

    fn point(&self) -> Point<'_> {
        Point {
            time: self.time,
            x: &self.x,
            mode: &self.mode,
        }
    }
}

impl Feed {
    /// Nothing seen yet.
    pub fn new(netlist: &Netlist, keeps: Keeps<'_>) -> Self {
        let circuit = &netlist.circuit;
        let mut signals = Signals::default();
        let readings = netlist
            .readings
            .iter()
            .map(|reading| {
                let phrase = &reading.signal.phrase;
                let tap = circuit
                    .tap(phrase)
                    .expect("the signals of all readings were checked when they were read");
                (
                    signals.number(phrase.to_string(), phrase.kind(), tap),
                    reading.start(circuit.values()),
                )
            })
            .collect();
        if keeps.waveforms.is_some() {
            signals.add_unasked(circuit);
        }
        let recorder = keeps
            .waveforms
            .map(|(from, until)| Recorder::new(signals.named(), from, until));
        let recorded = (signals.len(), keeps.waveforms.map_or(0.0, |(from, _)| from));
        let core_losses = keeps
            .waveforms
            .map(|_| CoreLosses::new(circuit, &mut signals));
        Feed {
            pieces: keeps.pieces,
            readings,
            recorder,
            core_losses,
            ladders: keeps.waveforms.map(|_| Ladders::new(circuit)),
            recorded,
            opened: Vec::new(),
            ratings: metered(circuit, &mut signals),
            signals,
            accounts: keeps.accounts.map(<[usize]>::to_vec),
            keeper: None,
            last: Last::default(),
            log: EventLog::default(),
            steady: None,
        }
    }

    /// Takes what is shown; returns the simulated time [s].
    pub fn take(&mut self, circuit: &Circuit, shown: Shown<'_>, log: &EventLog) -> f64 {
        match shown {
            Shown::Start(at) => {
                self.keeper = Some(match self.accounts.take() {
                    None => LedgerKeeper::open(circuit, at),
                    Some(entries) => LedgerKeeper::of(entries, circuit, at),
                });
                self.last.keep(at);
                self.log = log.clone();
            }
            Shown::Settling => {}
            Shown::Settled(found) => self.steady = Some(found.clone()),
            Shown::Step(step) => self.step(circuit, step, log),
            Shown::Event {
                after,
                happened,
                impulses,
                ..
            } => {
                for impulse in impulses {
                    self.signals.impulse(circuit, impulse, after.time);
                    if let Some(keeper) = &mut self.keeper {
                        keeper.impulse(circuit, impulse, after.time);
                    }
                }
                for (actor, what) in happened {
                    self.happened(circuit, *actor, *what, after.time);
                }
                self.last.keep(after);
            }
        }
        self.last.time
    }

    fn happened(&mut self, circuit: &Circuit, actor: Actor, what: Happening, time: f64) {
        let ratings = self.ratings.iter_mut();
        for metered in ratings.filter(|metered| Actor::whole(metered.entry) == actor) {
            metered.meter.happened(what, time);
        }
        let Some(recorder) = &mut self.recorder else {
            return;
        };
        if time < self.recorded.1 {
            return;
        }
        self.log.note(&circuit.owner(actor), what, time);
        if what == Happening::Opens && !self.opened.contains(&actor) {
            self.opened.push(actor);
            recorder.look_closely();
        }
    }

    fn step(&mut self, circuit: &Circuit, step: &Step<'_>, log: &EventLog) {
        for (from, to) in step.parts(self.pieces) {
            self.signals.read(circuit, step, (from, to));
            for (signal, taking) in &mut self.readings {
                taking.feed(&self.signals.piece(*signal), log);
            }
            for metered in &mut self.ratings {
                metered.meter.feed(&self.signals.piece(metered.signal));
            }
            if let Some(losses) = &mut self.core_losses {
                losses.feed(&self.signals);
            }
            if let Some(recorder) = &mut self.recorder {
                recorder.step(from, to, self.signals.first(self.recorded.0));
            }
        }
        if let Some(keeper) = &mut self.keeper {
            keeper.step(circuit, step);
        }
        if let Some(ladders) = &mut self.ladders {
            ladders.step(circuit, step);
        }
        self.last.time = step.to;
        self.last.x.copy_from_slice(step.x1);
        self.last.mode.copy_from_slice(step.mode);
    }

    /// The outcome at the end of the run.
    pub fn finish(mut self, netlist: &Netlist, duration: f64, work: Work) -> Outcome {
        let circuit = &netlist.circuit;
        let ledger = self.close(circuit);
        let ratings = self.ratings.iter();
        // A period that was unknown is the duration.
        let duration = match (&netlist.analysis, &self.steady) {
            (Analysis::SteadyState(_), Some(steady)) => steady.period,
            _ => duration,
        };
        let periodic = matches!(netlist.analysis, Analysis::SteadyState(_));
        let losses = self.core_losses.as_ref();
        let findings = Findings {
            core_losses: losses
                .map_or(Vec::new(), |losses| losses.finish(self.last.time, periodic)),
            duration,
            reached: self.last.time,
            work: Some(work),
            readings: self.found(),
            ratings: ratings
                .map(|metered| rating_result(circuit, metered))
                .collect(),
            ledger,
            traces: self.recorder.map_or(Vec::new(), Recorder::into_traces),
            events: self.log,
            steady: self.steady,
        };
        let analysis = match netlist.analysis {
            Analysis::SteadyState(_) => "steady_state",
            Analysis::Transient(_) | Analysis::OperatingPoint => "transient",
        };
        let mut outcome = outcome(netlist, analysis, findings);
        let ladders = self.ladders.as_ref();
        outcome.cautions.extend(
            ladders
                .into_iter()
                .flat_map(|ladders| ladders.cautions(circuit)),
        );
        outcome
    }

    /// The figures alone at the end of the run.
    pub fn figures(mut self, circuit: &Circuit, work: Work) -> Figures {
        Figures {
            accounts: self.close(circuit).accounts,
            readings: self.found(),
            ratings: self
                .ratings
                .iter()
                .map(|metered| RatingFigure {
                    entry: metered.entry,
                    rated: metered.rated,
                    used: metered.used(circuit),
                })
                .collect(),
            work,
        }
    }

    fn close(&mut self, circuit: &Circuit) -> Ledger {
        let at = self.last.point();
        let keeper = self.keeper.take();
        keeper.map_or(Ledger::default(), |keeper| keeper.close(circuit, at))
    }

    /// What the readings came to so far.
    pub fn found(&self) -> Vec<Found> {
        let takings = self.readings.iter();
        takings.map(|(_, taking)| taking.finish()).collect()
    }
}

/// Every rating of every element with the signal that stresses it.
fn metered(circuit: &Circuit, signals: &mut Signals) -> Vec<Metered> {
    let mut all = Vec::new();
    for (k, entry) in circuit.entries.iter().enumerate() {
        for rated in &entry.ratings {
            let rating = rated.rating;
            let name = format!("{} of {}", rating.key, entry.name);
            all.push(Metered {
                entry: k,
                rated: *rated,
                signal: signals.number(name, rating.kind, stressing(circuit, k, rating)),
                meter: RatingMeter::new(rating),
            });
        }
    }
    all
}
