//! Switch: a conductance whose logarithm moves linearly during `transition`, from the instant of a change on.
//!
//! Modes: where it is (resting or moving, open or closed), since when, and the logarithm of the conductance it left from.
//! An edge during a transition departs from where the conductance is, at the same slope.

use super::claims::Claims;
use super::element::{
    Branch, Element, Energy, Follower, Happening, Path, PathKind, Point, Rhythm, Switching, Terms,
    Unsound, sum,
};
use super::junction::{Breakdown, REACH, VOLTS_PER_KELVIN};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::stamper::Stamper;
use super::switch_command::{Command, read_command};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::signals::Phrase;
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "switch",
    about: "A switch or driver transistor seen as a conductance that changes over a transition time.",
    keys: &[
        NODES,
        Key::required(
            "closed_resistance",
            Takes::Quantity(units::RESISTANCE),
            "resistance when closed",
        ),
        Key::required(
            "open_resistance",
            Takes::Quantity(units::RESISTANCE),
            "resistance when open",
        ),
        Key::required(
            "transition",
            Takes::Quantity(units::TIME),
            "duration of a change; 0 s is an ideal jump",
        ),
        Key::optional(
            "initially",
            Takes::Word(&["open", "closed"]),
            "state at the start",
        ),
        Key::optional(
            "opens_at",
            Takes::List(units::TIME),
            "instants at which it begins to open",
        ),
        Key::optional(
            "closes_at",
            Takes::List(units::TIME),
            "instants at which it begins to close",
        ),
        Key::optional(
            "square",
            Takes::Map(super::switch_command::SQUARE_KEYS),
            "closed while the square wave is high",
        ),
        Key::optional(
            "watches",
            Takes::Map(super::switch_command::WATCH_KEYS),
            "opens and closes by a signal",
        ),
        Key::optional(
            "breakdown_voltage",
            Takes::Quantity(units::VOLTAGE),
            "voltage of either sign at which the open switch breaks down",
        ),
        Key::optional(
            "breakdown_resistance",
            Takes::Quantity(units::RESISTANCE),
            "slope resistance in breakdown",
        ),
    ],
    read,
};

/// Places in the mode slice.
const STATE: usize = 0;
const SINCE: usize = 1;
const LEFT_FROM: usize = 2;
/// Number of the first period of a square: 0, or minus infinity where it has always run.
const FIRST: usize = 3;

/// Values of `mode[STATE]`.
const OPEN: f64 = 0.0;
const CLOSED: f64 = 1.0;
const OPENING: f64 = 2.0;
const CLOSING: f64 = 3.0;

struct Keys {
    closed: Value,
    open: Value,
    transition: Value,
    breakdown: Option<(Value, Value)>,
    ambient: Value,
}

struct Switch {
    keys: Keys,
    command: Command,
    initially_closed: bool,
    /// Logarithms of both conductances.
    closed: f64,
    open: f64,
    /// Conductances closed and open [S].
    at_rest: (f64, f64),
    transition: f64,
    breakdown: Option<Breakdown>,
    branch: Branch,
    watched: Terms,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let closed = fields.positive("closed_resistance");
    let open = fields.positive("open_resistance");
    let transition = fields.non_negative("transition");
    let breakdown = if fields.has("breakdown_voltage") || fields.has("breakdown_resistance") {
        let voltage = fields.needed_with("breakdown_voltage", "breakdown_resistance");
        let resistance = fields.needed_with("breakdown_resistance", "breakdown_voltage");
        Some(voltage.zip(resistance))
    } else {
        None
    };
    let (command, initially_closed) = read_command(fields)?;
    let keys = Keys {
        closed: closed?,
        open: open?,
        transition: transition?,
        breakdown: match breakdown {
            Some(pair) => Some(pair?),
            None => None,
        },
        ambient: around.ambient,
    };
    let element = Switch {
        keys,
        command,
        initially_closed,
        closed: 0.0,
        open: 0.0,
        at_rest: (0.0, 0.0),
        transition: 0.0,
        breakdown: None,
        branch: Branch::default(),
        watched: Terms::new(),
    };
    Some(Made::new(terminals?, element))
}

impl Switch {
    /// Logarithm of the conductance at a time. Smooth at the arrival too, whose event ends it: derivatives look past it.
    fn logarithm(&self, time: f64, mode: &[f64]) -> f64 {
        match mode[STATE] {
            OPENING => mode[LEFT_FROM] - self.slope() * (time - mode[SINCE]),
            CLOSING => mode[LEFT_FROM] + self.slope() * (time - mode[SINCE]),
            CLOSED => self.closed,
            _ => self.open,
        }
    }

    /// Change of the logarithm per second while moving.
    fn slope(&self) -> f64 {
        (self.closed - self.open) / self.transition
    }

    /// End of a movement; infinity at rest.
    fn arrival(&self, mode: &[f64]) -> f64 {
        let way = match mode[STATE] {
            OPENING => mode[LEFT_FROM] - self.open,
            CLOSING => self.closed - mode[LEFT_FROM],
            _ => return f64::INFINITY,
        };
        // A whole way takes the transition as written, without the rounding of a quotient.
        let fraction = way / (self.closed - self.open);
        mode[SINCE]
            + if fraction >= 1.0 {
                self.transition
            } else {
                fraction * self.transition
            }
    }

    fn is_or_gets_closed(mode: &[f64]) -> bool {
        mode[STATE] == CLOSED || mode[STATE] == CLOSING
    }

    /// Sets out towards a state; nothing happens where it is there or on the way.
    fn go(&self, closed: bool, time: f64, mode: &mut [f64]) -> Option<Happening> {
        if Self::is_or_gets_closed(mode) == closed {
            return None;
        }
        let from = self.logarithm(time, mode);
        mode[LEFT_FROM] = from;
        mode[SINCE] = time;
        mode[STATE] = match (closed, self.transition > 0.0) {
            (true, true) => CLOSING,
            (false, true) => OPENING,
            (true, false) => CLOSED,
            (false, false) => OPEN,
        };
        Some(if closed {
            Happening::Closes
        } else {
            Happening::Opens
        })
    }

    fn conductance(&self, at: Point<'_>) -> f64 {
        match at.mode[STATE] {
            CLOSED => self.at_rest.0,
            OPEN => self.at_rest.1,
            _ => self.logarithm(at.time, at.mode).exp(),
        }
    }

    /// Breakdown current [A] and slope [S].
    fn broken_down(&self, voltage: f64) -> (f64, f64) {
        match &self.breakdown {
            None => (0.0, 0.0),
            Some(breakdown) => {
                let (up, up_slope) = breakdown.current(voltage);
                let (down, down_slope) = breakdown.current(-voltage);
                (up - down, up_slope + down_slope)
            }
        }
    }

    /// Current [A] and slope [S].
    fn current(&self, at: Point<'_>, voltage: f64) -> (f64, f64) {
        let conductance = self.conductance(at);
        let (current, slope) = self.broken_down(voltage);
        (conductance * voltage + current, conductance + slope)
    }
}

impl Element for Switch {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let (closed, open) = (values[self.keys.closed], values[self.keys.open]);
        if closed >= open {
            return Err(Unsound {
                word: "out-of-range",
                key: "open_resistance",
                headline: format!(
                    "open, the switch has {}, closed {}",
                    units::engineering(open, units::RESISTANCE, 4),
                    units::engineering(closed, units::RESISTANCE, 4)
                ),
                help: "`open_resistance` must exceed `closed_resistance`; are they exchanged?"
                    .into(),
            });
        }
        self.closed = -closed.ln();
        self.open = -open.ln();
        self.at_rest = (self.closed.exp(), self.open.exp());
        self.transition = values[self.keys.transition];
        self.breakdown = self.keys.breakdown.map(|(voltage, resistance)| Breakdown {
            knee: values[voltage],
            resistance: values[resistance],
            softness: VOLTS_PER_KELVIN * values[self.keys.ambient],
        });
        self.command.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.branch = Branch::claim(claims, false);
        if self.keys.breakdown.is_some() {
            claims.reach([self.branch.a, self.branch.b], REACH);
        }
        claims.modes(4);
        claims.guards(usize::from(self.command.watch().is_some()));
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let (current, slope) = self.current(at, self.branch.voltage(at.x));
        self.branch.conduct(at.x, current, slope, into);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn switching(&self) -> Option<&dyn Switching> {
        Some(self)
    }

    fn follower(&mut self) -> Option<&mut dyn Follower> {
        if self.command.watch().is_some() {
            Some(self)
        } else {
            None
        }
    }

    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        self.breakdown
            .as_ref()
            .is_some_and(|breakdown| breakdown.limit_both_ways(&self.branch, x, dx))
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::Conductive,
        }]
    }
}

impl Energy for Switch {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = match self.branch.current {
            Some(i) => i.of(at.x),
            None => self.current(at, self.branch.voltage(at.x)).0,
        };
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let voltage = self.branch.voltage(at.x);
        voltage * voltage * self.conductance(at) + voltage * self.broken_down(voltage).0
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }
}

impl Follower for Switch {
    fn follows(&self) -> Vec<&Phrase> {
        self.command
            .watch()
            .map(|watch| &watch.phrase)
            .into_iter()
            .collect()
    }

    fn connect(&mut self, terms: Vec<Terms>) {
        self.watched = terms.into_iter().next().unwrap_or_default();
    }
}

impl Switching for Switch {
    fn start(&self, mode: &mut [f64]) {
        mode[STATE] = if self.initially_closed { CLOSED } else { OPEN };
        mode[SINCE] = 0.0;
        mode[LEFT_FROM] = 0.0;
        mode[FIRST] = 0.0;
    }

    fn rhythm(&self) -> Rhythm {
        self.command.rhythm()
    }

    fn forever(&self, time: f64, mode: &mut [f64]) {
        let Some((since, closed)) = self.command.last(time) else {
            return;
        };
        mode[FIRST] = f64::NEG_INFINITY;
        mode[SINCE] = since;
        let (moving, rest, left) = if closed {
            (CLOSING, CLOSED, self.open)
        } else {
            (OPENING, OPEN, self.closed)
        };
        mode[LEFT_FROM] = left;
        mode[STATE] = if time < since + self.transition {
            moving
        } else {
            rest
        };
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        mode[SINCE] -= by;
        if self.command.rhythm() == Rhythm::Once && by > 0.0 {
            self.start(mode);
        }
    }

    fn rest(&self, after: Happening, mode: &mut [f64]) -> bool {
        mode[STATE] = if after == Happening::Closes {
            CLOSED
        } else {
            OPEN
        };
        true
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let arrival = self.arrival(mode);
        let command = self.command.next(time, mode[FIRST]);
        // An arrival that is due is never missed, even where rounding puts it on the instant itself.
        arrival.min(command)
    }

    fn at_instant(&self, time: f64, mode: &mut [f64]) -> Option<Happening> {
        if self.arrival(mode) <= time {
            mode[STATE] = if Self::is_or_gets_closed(mode) {
                CLOSED
            } else {
                OPEN
            };
        }
        let closed = self.command.at(time, mode[FIRST])?;
        self.go(closed, time, mode)
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        if let Some(watch) = self.command.watch() {
            out[0] = watch.guard(sum(&self.watched, at.x), Self::is_or_gets_closed(at.mode));
        }
    }

    fn at_guard(
        &self,
        _which: usize,
        time: f64,
        _x: &mut [f64],
        mode: &mut [f64],
    ) -> Option<Happening> {
        self.go(!Self::is_or_gets_closed(mode), time, mode)
    }
}
