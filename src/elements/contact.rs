//! Mechanical contact: a switch that rebounds as it closes, and whose gap may break down and carry an arc.
//!
//! Without an arc it opens and closes at the instants commanded. With one the gap has a length: it grows with
//! `opening_speed` from the instant of opening up to `gap`, and shrinks with `closing_speed` from the instant of closing until
//! the contacts touch. Rebounds are in `rebounds`, the gap's laws in `arc`.

use super::arc::{self, Arc};
use super::claims::Claims;
use super::contact_pair::{self, Gap, Pair};
use super::element::{
    Branch, Element, Energy, Follower, Happening, Path, PathKind, Point, Rhythm, Switching, Unsound,
};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::movement::{CLOSED_RESISTANCE, Movement, OPEN_RESISTANCE, TRANSITION};
use super::rebounds::{self, Rebounds};
use super::stamper::Stamper;
use super::switch_command::{
    CLOSES_AT, Command, INITIALLY, OPENS_AT, SQUARE, WATCHES, read_command,
};
use super::touching::{self, Touching};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "contact",
    about: "A mechanical contact that rebounds as it closes and whose gap may carry an arc.",
    keys: &[
        NODES,
        CLOSED_RESISTANCE,
        OPEN_RESISTANCE,
        TRANSITION,
        INITIALLY,
        OPENS_AT,
        CLOSES_AT,
        SQUARE,
        WATCHES,
        BOUNCE,
        Key::optional(
            "arc",
            Takes::Map(ARC_KEYS),
            "breakdown of the gap and the arc in it",
        ),
    ],
    read,
};

/// The key of the rebounds.
pub const BOUNCE: Key = Key::optional(
    "bounce",
    Takes::Map(rebounds::KEYS),
    "rebounds after each closing",
);

/// The keys of `arc`.
const ARC_KEYS: &[Key] = &[
    arc::MATERIAL,
    arc::MINIMUM_VOLTAGE,
    arc::MINIMUM_CURRENT,
    arc::CAPACITANCE,
    arc::COLUMN_FIELD,
    arc::BREAKDOWN_FIELD,
    Key::required(
        "gap",
        Takes::Quantity(units::LENGTH),
        "gap of the open contact",
    ),
    Key::required(
        "opening_speed",
        Takes::Quantity(units::SPEED),
        "speed at which the gap grows",
    ),
    Key::required(
        "closing_speed",
        Takes::Quantity(units::SPEED),
        "speed at which the gap shrinks, and with which the contact strikes",
    ),
];

/// Places of the modes behind those of the touching contacts. Number of the first period of a square: 0, or minus infinity
/// where it has always run.
const FIRST: usize = touching::MODES;
/// 1 where the last command was to close.
const COMMANDED: usize = FIRST + 1;
/// How the gap changes.
const WAY: usize = FIRST + 2;
/// Instant [s] since when it does, and the gap [m] then.
const SET_OUT: usize = FIRST + 3;
const FROM: usize = FIRST + 4;
const MODES: usize = FIRST + 5;

/// Values of `mode[WAY]`.
const STILL: f64 = 0.0;
const PARTS: f64 = 1.0;
const APPROACHES: f64 = 2.0;

/// How a contact with a gap moves.
struct Stroke {
    keys: [Value; 3],
    /// Gap of the open contact [m].
    gap: f64,
    /// Speeds of opening and closing [m/s].
    opening: f64,
    closing: f64,
}

struct Contact {
    touching: Touching,
    stroke: Option<Stroke>,
    command: Command,
    initially_closed: bool,
    branch: Branch,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let movement = Movement::read(fields);
    let rebounds = read_bounce(fields);
    let arc = if fields.has("arc") {
        fields
            .map("arc")
            .and_then(|arc| read_arc(&arc, around))
            .map(Some)
    } else {
        Some(None)
    };
    let (command, initially_closed) = read_command(fields)?;
    let (arc, stroke) = arc?.unzip();
    let element = Contact {
        touching: Touching {
            pair: Pair {
                movement: movement?,
                arc,
            },
            rebounds: rebounds?,
        },
        stroke,
        command,
        initially_closed,
        branch: Branch::default(),
    };
    Some(Made::new(terminals?, element))
}

/// Reads `bounce` where it is written: None on an error, Some(None) without.
pub fn read_bounce(fields: &Fields<'_>) -> Option<Option<Rebounds>> {
    if fields.has("bounce") {
        Rebounds::read(&fields.map("bounce")?).map(Some)
    } else {
        Some(None)
    }
}

fn read_arc(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<(Arc, Stroke)> {
    let arc = Arc::read(fields, around.ambient);
    let gap = fields.positive("gap");
    let opening = fields.positive("opening_speed");
    let closing = fields.positive("closing_speed");
    fields.finish();
    let stroke = Stroke {
        keys: [gap?, opening?, closing?],
        gap: 0.0,
        opening: 0.0,
        closing: 0.0,
    };
    Some((arc?, stroke))
}

impl Contact {
    fn gap(&self, time: f64, mode: &[f64]) -> Gap {
        let Some(stroke) = &self.stroke else {
            return Gap {
                length: 0.0,
                shrinks: false,
            };
        };
        let gone = time - mode[SET_OUT];
        let (length, shrinks) = match mode[WAY] {
            PARTS => (mode[FROM] + stroke.opening * gone, false),
            APPROACHES => (mode[FROM] - stroke.closing * gone, true),
            _ => match self.touching.rebound(time, mode) {
                Some((flight, since)) => (flight.gap(stroke.closing, since), flight.falls(since)),
                None if mode[COMMANDED] == 0.0 => (stroke.gap, false),
                None => (0.0, false),
            },
        };
        Gap { length, shrinks }
    }

    /// End of the gap's way [s]; infinity where it stands still.
    fn arrival(&self, mode: &[f64]) -> f64 {
        let Some(stroke) = &self.stroke else {
            return f64::INFINITY;
        };
        match mode[WAY] {
            PARTS => mode[SET_OUT] + (stroke.gap - mode[FROM]) / stroke.opening,
            APPROACHES => mode[SET_OUT] + mode[FROM] / stroke.closing,
            _ => f64::INFINITY,
        }
    }

    /// Sets out towards a state; nothing happens where it is there or on the way.
    fn go(&self, closed: bool, time: f64, mode: &mut [f64]) -> Option<Happening> {
        if (mode[COMMANDED] != 0.0) == closed {
            return None;
        }
        let gap = self.gap(time, mode).length.max(0.0);
        let approached = mode[WAY] != STILL;
        mode[COMMANDED] = f64::from(u8::from(closed));
        if self.stroke.is_some() {
            mode[WAY] = if closed { APPROACHES } else { PARTS };
            mode[SET_OUT] = time;
            mode[FROM] = gap;
        }
        if closed {
            if self.stroke.is_none() {
                self.touching.touch(time, mode);
            }
            Some(Happening::Closes)
        } else {
            if !approached {
                self.touching.part(time, mode);
            }
            Some(Happening::Opens)
        }
    }

    /// The next change of the contact's own, a command aside.
    fn own_next(&self, time: f64, mode: &[f64]) -> f64 {
        self.touching.next(time, mode).min(self.arrival(mode))
    }

    fn own_change(&self, time: f64, mode: &mut [f64]) {
        self.touching.change(time, mode);
        if self.arrival(mode) <= time {
            let touches = mode[WAY] == APPROACHES;
            mode[WAY] = STILL;
            if touches {
                self.touching.touch(time, mode);
            }
        }
    }

    fn at_rest(&self, closed: bool, mode: &mut [f64]) {
        self.touching.at_rest(closed, mode);
        mode[COMMANDED] = f64::from(u8::from(closed));
        for place in [WAY, SET_OUT, FROM] {
            mode[place] = 0.0;
        }
    }
}

impl Element for Contact {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.touching.derive(values)?;
        if let Some(stroke) = &mut self.stroke {
            [stroke.gap, stroke.opening, stroke.closing] = stroke.keys.map(|key| values[key]);
        }
        self.command.derive(values)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let hidden = claims.probed && self.touching.pair.arc.is_some();
        self.branch = Branch::claim(claims, hidden);
        claims.modes(MODES);
        let arc = if self.touching.pair.arc.is_some() {
            contact_pair::GUARDS
        } else {
            0
        };
        claims.guards(arc + usize::from(self.command.watch().is_some()));
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let gap = self.gap(at.time, at.mode);
        self.touching.pair.stamp(&self.branch, at, gap, into);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn switching(&self) -> Option<&dyn Switching> {
        Some(self)
    }

    fn follower(&mut self) -> Option<&mut dyn Follower> {
        self.command.follower()
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::Conductive,
        }]
    }
}

impl Energy for Contact {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = self
            .touching
            .pair
            .through(&self.branch, at, self.gap(at.time, at.mode));
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        self.touching
            .pair
            .loss(&self.branch, at, self.gap(at.time, at.mode))
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        self.touching.pair.stored(&self.branch, at)
    }
}

impl Switching for Contact {
    fn start(&self, mode: &mut [f64]) {
        self.at_rest(self.initially_closed, mode);
        mode[FIRST] = 0.0;
    }

    fn rhythm(&self) -> Rhythm {
        self.command.rhythm()
    }

    fn forever(&self, time: f64, mode: &mut [f64]) {
        let Some((since, closed)) = self.command.last(time) else {
            return;
        };
        self.at_rest(!closed, mode);
        mode[FIRST] = f64::NEG_INFINITY;
        self.go(closed, since, mode);
        let mut now = since;
        loop {
            let next = self.own_next(now, mode);
            if next > time {
                return;
            }
            self.own_change(next, mode);
            now = next;
        }
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        touching::earlier(by, mode);
        mode[SET_OUT] -= by;
        if self.command.rhythm() == Rhythm::Once && by > 0.0 {
            self.start(mode);
        }
    }

    fn rest(&self, after: Happening, mode: &mut [f64]) -> bool {
        self.at_rest(after == Happening::Closes, mode);
        true
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let command = self.command.next(time, mode[FIRST]);
        self.own_next(time, mode).min(command)
    }

    fn at_instant(&self, time: f64, mode: &mut [f64]) -> Option<Happening> {
        self.own_change(time, mode);
        let closed = self.command.at(time, mode[FIRST])?;
        self.go(closed, time, mode)
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        if self.touching.pair.arc.is_some() {
            let gap = self.gap(at.time, at.mode);
            self.touching.pair.guards(&self.branch, at, gap, out);
        }
        if let (Some(watch), Some(last)) = (self.command.watch(), out.last_mut()) {
            *last = watch.guard(at.x, at.mode[COMMANDED] != 0.0);
        }
    }

    fn at_guard(
        &self,
        which: usize,
        time: f64,
        x: &mut [f64],
        mode: &mut [f64],
    ) -> Option<Happening> {
        if self.touching.pair.arc.is_some() && which < contact_pair::GUARDS {
            self.touching
                .pair
                .at_guard(which, &self.branch, time, x, mode);
            return None;
        }
        self.go(mode[COMMANDED] == 0.0, time, mode)
    }
}
