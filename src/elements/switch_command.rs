//! What moves a switch: lists of instants, a square wave, or a watched signal with hysteresis.

use super::element::{Follower, Rhythm, Terms, Unsound, sum};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::signals::{Phrase, read_phrase};
use crate::units;

/// The key of the state at the start.
pub const INITIALLY: Key = Key::optional(
    "initially",
    Takes::Word(&["open", "closed"]),
    "state at the start",
);
/// The key of the instants of opening.
pub const OPENS_AT: Key = Key::optional(
    "opens_at",
    Takes::List(units::TIME),
    "instants at which it begins to open",
);
/// The key of the instants of closing.
pub const CLOSES_AT: Key = Key::optional(
    "closes_at",
    Takes::List(units::TIME),
    "instants at which it begins to close",
);
/// The key of a square wave that moves it.
pub const SQUARE: Key = Key::optional(
    "square",
    Takes::Map(SQUARE_KEYS),
    "closed while the square wave is high",
);
/// The key of a signal that moves it.
pub const WATCHES: Key = Key::optional(
    "watches",
    Takes::Map(WATCH_KEYS),
    "opens and closes by a signal",
);

/// The keys of `square`.
pub const SQUARE_KEYS: &[Key] = &[
    Key::required(
        "frequency",
        Takes::Quantity(units::FREQUENCY),
        "periods per second",
    ),
    Key::required(
        "duty",
        Takes::Quantity(units::RATIO),
        "fraction of the period from closing to opening",
    ),
    Key::default(
        "delay",
        Takes::Quantity(units::TIME),
        "0 s",
        "instant of the first closing",
    ),
];

/// The keys of `watches`.
pub const WATCH_KEYS: &[Key] = &[
    Key::required("signal", Takes::Phrase, "the signal that it watches"),
    Key::optional(
        "closes_above",
        Takes::Quantity(units::ANY),
        "closes when the signal rises to this",
    ),
    Key::optional(
        "opens_below",
        Takes::Quantity(units::ANY),
        "opens when the signal falls to this",
    ),
    Key::optional(
        "opens_above",
        Takes::Quantity(units::ANY),
        "opens when the signal rises to this",
    ),
    Key::optional(
        "closes_below",
        Takes::Quantity(units::ANY),
        "closes when the signal falls to this",
    ),
];

/// What moves a switch.
pub enum Command {
    /// Instants, each with the state that it leads to.
    Instants {
        /// Instants as parameters, true where it closes.
        keys: Vec<(Value, bool)>,
        /// Instants [s] in order of time.
        at: Vec<(f64, bool)>,
    },
    /// Closed while a square wave is high.
    Square {
        /// Frequency, duty and delay as parameters.
        keys: [Value; 3],
        /// Periods per second.
        frequency: f64,
        /// Fraction of the period from closing to opening.
        duty: f64,
        /// First closing [s].
        delay: f64,
    },
    /// A watched signal.
    Watch(Watch),
    /// Nothing: it stays as it is.
    Still,
}

/// A watched signal with its thresholds.
pub struct Watch {
    phrase: Phrase,
    /// The signal in unknowns.
    terms: Terms,
    high_key: Value,
    low_key: Value,
    /// True where it closes above and opens below.
    closes_above: bool,
    high: f64,
    low: f64,
}

impl Watch {
    /// Negative until the switch must change: the distance to the threshold that matters now.
    pub fn guard(&self, x: &[f64], closed: bool) -> f64 {
        let signal = sum(&self.terms, x);
        if closed == self.closes_above {
            self.low - signal
        } else {
            signal - self.high
        }
    }
}

impl Follower for Watch {
    fn follows(&self) -> Vec<&Phrase> {
        vec![&self.phrase]
    }

    fn connect(&mut self, terms: Vec<Terms>) {
        self.terms = terms.into_iter().next().unwrap_or_default();
    }
}

/// Reads what moves the switch, and whether it starts closed.
pub fn read_command(fields: &Fields<'_>) -> Option<(Command, bool)> {
    let initially = if fields.has("initially") {
        Some(fields.word("initially")?)
    } else {
        None
    };
    let listed = fields.has("opens_at") || fields.has("closes_at");
    let ways = [listed, fields.has("square"), fields.has("watches")]
        .iter()
        .filter(|&&way| way)
        .count();
    if ways > 1 {
        fields.error_here(
            "one-of",
            "a switch is moved by one thing: instants, `square` or `watches`".into(),
            "more than one is written here",
            "keep one of `opens_at`/`closes_at`, `square`, `watches`",
        );
        return None;
    }
    let command = if fields.has("square") {
        read_square(fields)?
    } else if fields.has("watches") {
        read_watch(fields)?
    } else if listed {
        read_instants(fields)?
    } else {
        Command::Still
    };
    let needs_start = matches!(command, Command::Instants { .. } | Command::Still);
    if needs_start && initially.is_none() {
        fields.missing("initially");
        return None;
    }
    Some((command, initially == Some("closed")))
}

fn read_square(fields: &Fields<'_>) -> Option<Command> {
    let square = fields.map("square")?;
    let frequency = square.positive("frequency");
    let duty = square.positive("duty");
    let delay = square.non_negative("delay");
    square.finish();
    Some(Command::Square {
        keys: [frequency?, duty?, delay?],
        frequency: 0.0,
        duty: 0.0,
        delay: 0.0,
    })
}

fn read_watch(fields: &Fields<'_>) -> Option<Command> {
    let watches = fields.map("watches")?;
    let phrase = read_phrase(&watches, "signal").map(|written| written.phrase);
    let direct = watches.has("closes_above") || watches.has("opens_below");
    let inverse = watches.has("opens_above") || watches.has("closes_below");
    if direct == inverse {
        watches.error_here(
            "one-of",
            "a watch takes two thresholds of one sense".into(),
            "the sense is not clear",
            "write `closes_above` with `opens_below`, or `opens_above` with `closes_below`",
        );
        watches.finish();
        return None;
    }
    let kind = phrase.as_ref().map(Phrase::kind);
    let (upper, lower) = if direct {
        ("closes_above", "opens_below")
    } else {
        ("opens_above", "closes_below")
    };
    let high = kind.and_then(|kind| watches.value_as(upper, kind));
    let low = kind.and_then(|kind| watches.value_as(lower, kind));
    watches.finish();
    let watch = Watch {
        phrase: phrase?,
        terms: Terms::new(),
        high_key: high?,
        low_key: low?,
        closes_above: direct,
        high: 0.0,
        low: 0.0,
    };
    Some(Command::Watch(watch))
}

fn read_instants(fields: &Fields<'_>) -> Option<Command> {
    let mut keys = Vec::new();
    let mut sound = true;
    for (key, closed) in [("opens_at", false), ("closes_at", true)] {
        if fields.has(key) {
            match fields.list_as(key, units::TIME) {
                Some(values) => keys.extend(values.into_iter().map(|value| (value, closed))),
                None => sound = false,
            }
        }
    }
    sound.then_some(Command::Instants {
        keys,
        at: Vec::new(),
    })
}

impl Command {
    /// The watch, where it is one.
    pub fn watch(&self) -> Option<&Watch> {
        match self {
            Command::Watch(watch) => Some(watch),
            _ => None,
        }
    }

    /// The watch as what follows a signal, where it is one.
    pub fn follower(&mut self) -> Option<&mut dyn Follower> {
        match self {
            Command::Watch(watch) => Some(watch),
            _ => None,
        }
    }

    /// Re-derives the numbers.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        match self {
            Command::Instants { keys, at } => {
                *at = keys
                    .iter()
                    .map(|&(key, closed)| (values[key], closed))
                    .collect();
                at.sort_by(|a, b| a.0.total_cmp(&b.0));
                check_instants(at)
            }
            Command::Square {
                keys,
                frequency,
                duty,
                delay,
            } => {
                [*frequency, *duty, *delay] = keys.map(|key| values[key]);
                if *duty < 1.0 {
                    return Ok(());
                }
                Err(Unsound {
                    word: "out-of-range",
                    key: "square.duty",
                    headline: format!("a duty of {duty} never opens the switch"),
                    help:
                        "the duty lies between 0 and 1; without a square write `initially: closed`"
                            .into(),
                })
            }
            Command::Watch(watch) => {
                (watch.high, watch.low) = (values[watch.high_key], values[watch.low_key]);
                if watch.low < watch.high {
                    return Ok(());
                }
                Err(Unsound {
                    word: "no-hysteresis",
                    key: "watches",
                    headline: format!(
                        "the upper threshold {} is not above the lower {}",
                        units::engineering(watch.high, watch.phrase.kind(), 6),
                        units::engineering(watch.low, watch.phrase.kind(), 6)
                    ),
                    help: "leave a gap between the thresholds, or the switch would chatter".into(),
                })
            }
            Command::Still => Ok(()),
        }
    }

    /// The next instant strictly after `time` at which it commands a change; `first` is the number of the first period
    /// of a square, 0 from the start on.
    pub fn next(&self, time: f64, first: f64) -> f64 {
        match self {
            Command::Instants { at, .. } => at
                .iter()
                .map(|&(instant, _)| instant)
                .find(|&instant| instant > time)
                .unwrap_or(f64::INFINITY),
            Command::Square {
                frequency,
                duty,
                delay,
                ..
            } => {
                let period = ((time - delay) * frequency).floor().max(first);
                // One period either side covers the rounding of the quotient.
                let near = [period - 1.0, period, period + 1.0, period + 2.0];
                near.iter()
                    .filter(|&&k| k >= first)
                    .flat_map(|&k| [delay + k / frequency, delay + (k + duty) / frequency])
                    .filter(|&instant| instant > time)
                    .fold(f64::INFINITY, f64::min)
            }
            _ => f64::INFINITY,
        }
    }

    /// What the clock makes of it.
    pub fn rhythm(&self) -> Rhythm {
        match self {
            Command::Instants { .. } => Rhythm::Once,
            Command::Square { frequency, .. } => Rhythm::Every(1.0 / frequency),
            Command::Watch(_) | Command::Still => Rhythm::None,
        }
    }

    /// The last command of a square at or before `time`, as if it had always run: its instant, and whether it closes.
    pub fn last(&self, time: f64) -> Option<(f64, bool)> {
        let Command::Square {
            frequency,
            duty,
            delay,
            ..
        } = self
        else {
            return None;
        };
        let periods = (time - delay) * frequency + 1e-9;
        let (whole, phase) = (periods.floor(), periods - periods.floor());
        Some(if phase < *duty {
            (delay + whole / frequency, true)
        } else {
            (delay + (whole + duty) / frequency, false)
        })
    }

    /// The state commanded at exactly this instant, if any.
    pub fn at(&self, time: f64, first: f64) -> Option<bool> {
        match self {
            Command::Instants { at, .. } => at
                .iter()
                .find(|&&(instant, _)| instant == time)
                .map(|&(_, closed)| closed),
            Command::Square {
                frequency,
                duty,
                delay,
                ..
            } => {
                let period = ((time - delay) * frequency).round();
                let near = [period - 1.0, period, period + 1.0];
                let at = |fraction: f64| {
                    near.iter()
                        .any(|&k| k >= first && delay + (k + fraction) / frequency == time)
                };
                if at(0.0) {
                    Some(true)
                } else if at(*duty) {
                    Some(false)
                } else {
                    None
                }
            }
            _ => None,
        }
    }
}

/// Two commands at one instant contradict each other or are one too many.
fn check_instants(at: &[(f64, bool)]) -> Result<(), Unsound> {
    if let Some(first) = at.first()
        && first.0 < 0.0
    {
        return Err(Unsound {
            word: "out-of-range",
            key: if first.1 { "closes_at" } else { "opens_at" },
            headline: format!(
                "the instant {} lies before the start",
                units::engineering(first.0, units::TIME, 6)
            ),
            help: "time runs from 0 s; the state before is `initially`".into(),
        });
    }
    match at.windows(2).find(|pair| pair[0].0 == pair[1].0) {
        None => Ok(()),
        Some(pair) => Err(Unsound {
            word: "same-instant",
            key: "opens_at",
            headline: format!(
                "the switch gets two commands at {}",
                units::engineering(pair[0].0, units::TIME, 6)
            ),
            help: "give each instant once, in `opens_at` or in `closes_at`".into(),
        }),
    }
}
