//! What watches a run: it samples signals step by step, feeds readings and ratings, keeps the ledger and the waveforms.

use super::cautions;
use super::coils::coil_reports;
use super::netlist::Netlist;
use super::outcome::{LimitResult, Outcome, RatingResult, ReadingResult, Work};
use super::repeated::{Figures, RatingFigure};
use crate::analysis::{Ledger, LedgerKeeper, simulate::Shown};
use crate::circuit::{Circuit, Tap};
use crate::dae::{Point, Step};
use crate::limits::{On, RatingMeter, RatingUse, Sense};
use crate::readings::{Outcome as Found, Taking};
use crate::signals::{EventLog, Phrase, Piece, Rated, Recorder, Watched};
use crate::units::Kind;

/// Most nodes whose potential is recorded unasked; beyond that a record would grow without use.
const MOST_RECORDED: usize = 24;

/// One signal: how it is read, what it measures, and its energy so far where it is one.
struct Signal {
    name: String,
    kind: Kind,
    tap: Tap,
    energy: f64,
}

/// Signals by name, each once.
#[derive(Default)]
struct Signals(Vec<Signal>);

impl Signals {
    /// The number of a signal, new or known.
    fn number(&mut self, name: String, kind: Kind, tap: Tap) -> usize {
        let known = self.0.iter().position(|signal| signal.name == name);
        known.unwrap_or_else(|| {
            self.0.push(Signal {
                name,
                kind,
                tap,
                energy: 0.0,
            });
            self.0.len() - 1
        })
    }
}

/// What a run keeps besides readings and ratings.
#[derive(Clone, Copy, Debug)]
pub struct Keeps<'a> {
    /// Instant [s] from which waveforms are kept; None for no waveform at all.
    pub waveforms_from: Option<f64>,
    /// Elements whose account is kept, by index; None for all.
    pub accounts: Option<&'a [usize]>,
}

/// The watcher of one run.
pub struct Feed {
    signals: Vec<Signal>,
    /// Readings, each with the number of its signal.
    readings: Vec<(usize, Taking)>,
    ratings: Vec<Metered>,
    recorder: Option<Recorder>,
    recorded: usize,
    accounts: Option<Vec<usize>>,
    keeper: Option<LedgerKeeper>,
    last: Last,
    log: EventLog,
    samples: [Vec<f64>; 4],
    values: Vec<[f64; 4]>,
}

/// A rating of an element at work.
struct Metered {
    entry: usize,
    rated: Rated,
    signal: usize,
    meter: RatingMeter,
}

impl Metered {
    fn used(&self, circuit: &Circuit) -> RatingUse {
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
        if keeps.waveforms_from.is_some() {
            for (name, kind, tap) in unasked(circuit) {
                signals.number(name, kind, tap);
            }
        }
        let recorded = signals.0.len();
        let ratings = metered(circuit, &mut signals);
        let signals = signals.0;
        let recorder = keeps.waveforms_from.map(|from| {
            let named = |signal: &Signal| (signal.name.clone(), signal.kind);
            Recorder::new(signals[..recorded].iter().map(named), from)
        });
        let size = circuit.unknowns.len();
        Feed {
            values: vec![[0.0; 4]; signals.len()],
            signals,
            readings,
            ratings,
            recorder,
            recorded,
            accounts: keeps.accounts.map(<[usize]>::to_vec),
            keeper: None,
            last: Last::default(),
            log: EventLog::default(),
            samples: std::array::from_fn(|_| vec![0.0; size]),
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
                self.keep(at, log);
            }
            Shown::Step(step) => self.step(circuit, step, log),
            Shown::Event {
                after, happened, ..
            } => {
                for (entry, what) in happened {
                    for metered in self
                        .ratings
                        .iter_mut()
                        .filter(|metered| metered.entry == *entry)
                    {
                        metered.meter.happened(*what, after.time);
                    }
                }
                self.keep(after, log);
            }
        }
        self.last.time
    }

    fn keep(&mut self, at: Point<'_>, log: &EventLog) {
        self.last.time = at.time;
        self.last.x.clear();
        self.last.x.extend_from_slice(at.x);
        self.last.mode.clear();
        self.last.mode.extend_from_slice(at.mode);
        self.log = log.clone();
    }

    fn step(&mut self, circuit: &Circuit, step: &Step<'_>, log: &EventLog) {
        self.sample(circuit, step);
        for (signal, values) in self.signals.iter_mut().zip(&mut self.values) {
            if matches!(signal.tap, Tap::Energy(_)) {
                *values = accumulated(signal.energy, step.from, step.to, *values);
                signal.energy = values[3];
            }
        }
        let piece = |values: &[f64; 4]| Piece {
            from: step.from,
            to: step.to,
            values: *values,
        };
        for (signal, taking) in &mut self.readings {
            taking.feed(&piece(&self.values[*signal]), log);
        }
        for metered in &mut self.ratings {
            metered.meter.feed(&piece(&self.values[metered.signal]));
        }
        if let Some(recorder) = &mut self.recorder {
            recorder.step(step.from, step.to, &self.values[..self.recorded]);
        }
        if let Some(keeper) = &mut self.keeper {
            keeper.step(circuit, step);
        }
        self.last.time = step.to;
        self.last.x.copy_from_slice(step.x1);
        self.last.mode.copy_from_slice(step.mode);
    }

    /// Reads every signal at both ends and both thirds of a step.
    fn sample(&mut self, circuit: &Circuit, step: &Step<'_>) {
        let length = step.to - step.from;
        let times = [
            step.from,
            step.from + length / 3.0,
            step.from + 2.0 * length / 3.0,
            step.to,
        ];
        step.at(times[0], &mut self.samples[0]);
        step.at(times[1], &mut self.samples[1]);
        step.at(times[2], &mut self.samples[2]);
        self.samples[3].copy_from_slice(step.x1);
        for (signal, values) in self.signals.iter().zip(&mut self.values) {
            for k in 0..4 {
                let at = Point {
                    time: times[k],
                    x: &self.samples[k],
                    mode: step.mode,
                };
                values[k] = circuit.read(&signal.tap, at);
            }
        }
    }

    /// The outcome at the end of the run.
    pub fn finish(mut self, netlist: &Netlist, duration: f64, work: Work) -> Outcome {
        let circuit = &netlist.circuit;
        let ledger = self.close(circuit);
        let found = self.found();
        let readings = netlist
            .readings
            .iter()
            .zip(&found)
            .map(|(reading, found)| reading_result(&reading.name.text, found))
            .collect();
        let ratings = self.rated(circuit);
        let limits = limit_results(netlist, &found, &ratings);
        let mut outcome = Outcome {
            title: netlist.title.clone(),
            analysis: "transient",
            duration,
            reached: self.last.time,
            work: Some(work),
            readings,
            limits,
            ratings,
            accounts: named(circuit, &ledger.accounts),
            ledger,
            coils: coil_reports(circuit),
            cautions: netlist.cautions.clone(),
            defaults: netlist.defaults.clone(),
            traces: self.recorder.map_or(Vec::new(), Recorder::into_traces),
            events: self.log,
        };
        cautions::add(netlist, &mut outcome);
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
        let at = Point {
            time: self.last.time,
            x: &self.last.x,
            mode: &self.last.mode,
        };
        let keeper = self.keeper.take();
        keeper.map_or(Ledger::default(), |keeper| keeper.close(circuit, at))
    }

    fn found(&self) -> Vec<Found> {
        self.readings
            .iter()
            .map(|(_, taking)| taking.finish())
            .collect()
    }

    fn rated(&self, circuit: &Circuit) -> Vec<RatingResult> {
        self.ratings
            .iter()
            .map(|metered| rating_result(circuit, metered))
            .collect()
    }
}

/// The outcome of a circuit at rest: every reading takes the value there.
pub fn at_rest(netlist: &Netlist, at: Point<'_>) -> Outcome {
    let circuit = &netlist.circuit;
    let found: Vec<Found> = netlist
        .readings
        .iter()
        .map(|reading| {
            let phrase = &reading.signal.phrase;
            let tap = circuit
                .tap(phrase)
                .expect("the signals of all readings were checked when they were read");
            let energy = matches!(tap, Tap::Energy(_));
            let value = if energy { 0.0 } else { circuit.read(&tap, at) };
            let mut taking = reading.start_at_rest();
            taking.feed(&Piece::instant(0.0, value), &EventLog::default());
            taking.finish()
        })
        .collect();
    let readings = netlist
        .readings
        .iter()
        .zip(&found)
        .map(|(reading, found)| reading_result(&reading.name.text, found))
        .collect();
    let limits = limit_results(netlist, &found, &[]);
    let mut outcome = Outcome {
        title: netlist.title.clone(),
        analysis: "operating_point",
        duration: 0.0,
        reached: 0.0,
        work: None,
        readings,
        limits,
        ratings: Vec::new(),
        accounts: Vec::new(),
        ledger: Ledger::default(),
        coils: coil_reports(circuit),
        cautions: netlist.cautions.clone(),
        defaults: netlist.defaults.clone(),
        traces: Vec::new(),
        events: EventLog::default(),
    };
    cautions::add(netlist, &mut outcome);
    outcome
}

/// Waveforms that are kept unasked: what a person looks at first.
fn unasked(circuit: &Circuit) -> Vec<(String, Kind, Tap)> {
    let mut phrases: Vec<String> = Vec::new();
    for entry in &circuit.entries {
        match entry.kind.word {
            "switch" => phrases.push(format!("voltage across {}", entry.name)),
            "coil" => {
                for words in ["winding current of", "flux density in", "saturation of"] {
                    phrases.push(format!("{words} {}", entry.name));
                }
            }
            "inductor" => phrases.push(format!("current through {}", entry.name)),
            _ => {}
        }
    }
    for node in circuit.node_names.iter().take(MOST_RECORDED) {
        phrases.push(format!("voltage at {node}"));
    }
    phrases
        .iter()
        .filter_map(|text| {
            let phrase = crate::signals::Phrase::parse(text).ok()?;
            let tap = circuit.tap(&phrase).ok()?;
            Some((text.clone(), phrase.kind(), tap))
        })
        .collect()
}

/// A cubic through the running integral of a power given at both ends and both thirds of a step.
fn accumulated(start: f64, from: f64, to: f64, power: [f64; 4]) -> [f64; 4] {
    let piece = Piece {
        from,
        to,
        values: power,
    };
    let third = (to - from) / 3.0;
    let up_to = |end: f64| piece.within(from, end).map_or(0.0, |part| part.integral());
    [
        start,
        start + up_to(from + third),
        start + up_to(from + 2.0 * third),
        start + piece.integral(),
    ]
}

fn named(
    circuit: &Circuit,
    accounts: &[crate::analysis::Account],
) -> Vec<(String, crate::analysis::Account)> {
    circuit
        .entries
        .iter()
        .zip(accounts)
        .map(|(entry, account)| (entry.name.clone(), *account))
        .collect()
}

/// Every rating of every element with the signal that stresses it.
fn metered(circuit: &Circuit, signals: &mut Signals) -> Vec<Metered> {
    let mut all = Vec::new();
    for (k, entry) in circuit.entries.iter().enumerate() {
        for rated in &entry.ratings {
            let tap = match rated.rating.watches {
                Watched::Voltage => voltage(entry),
                Watched::Current => Some(Tap::Current(k, 0)),
                Watched::Power => Some(Tap::Power(k)),
                Watched::FluxDensity => {
                    let owner = crate::signals::Owner {
                        element: entry.name.clone(),
                        winding: None,
                    };
                    circuit
                        .tap(&Phrase::Of(crate::signals::Quantity::FluxDensity, owner))
                        .ok()
                }
                Watched::Temperature => None,
            };
            // What the element has no waveform for is listed without a stress.
            let tap = tap.unwrap_or(Tap::Power(k));
            let name = format!("{} of {}", rated.rating.key, entry.name);
            let signal = signals.number(name, rated.rating.kind, tap);
            all.push(Metered {
                entry: k,
                rated: *rated,
                signal,
                meter: RatingMeter::new(rated.rating),
            });
        }
    }
    all
}

/// The voltage that ratings of an element mean: first less second terminal, anode less cathode; of a suppressor
/// diode, whose first node is the cathode, the other way round.
fn voltage(entry: &crate::circuit::Entry) -> Option<Tap> {
    let (a, b) = (*entry.nodes.first()?, *entry.nodes.get(1)?);
    Some(if entry.kind.word == "suppressor_diode" {
        Tap::Potential(b, a)
    } else {
        Tap::Potential(a, b)
    })
}

fn reading_result(name: &str, found: &Found) -> ReadingResult {
    let (value, time) = found.value_and_time();
    ReadingResult {
        name: name.to_owned(),
        value,
        kind: found.kind,
        time,
        remark: found.remark,
    }
}

fn rating_result(circuit: &Circuit, metered: &Metered) -> RatingResult {
    RatingResult {
        element: circuit.entries[metered.entry].name.clone(),
        rating: metered.rated.rating.key.to_owned(),
        kind: metered.rated.rating.kind,
        used: metered.used(circuit),
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
