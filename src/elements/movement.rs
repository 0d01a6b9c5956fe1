//! The conductance of a switch or contact on its way: its logarithm moves linearly during `transition`, from the instant
//! of a change on. An edge during a transition departs from where the conductance is, at the same slope.
//!
//! Three mode values: where it is (resting or moving, open or closed), since when, and the logarithm that it left from.

use super::element::Unsound;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// Mode values that a movement needs.
pub const MODES: usize = 3;
/// Places in them.
pub const STATE: usize = 0;
const SINCE: usize = 1;
const LEFT_FROM: usize = 2;

/// Values of `mode[STATE]`.
pub const OPEN: f64 = 0.0;
/// At rest, closed.
pub const CLOSED: f64 = 1.0;
const OPENING: f64 = 2.0;
const CLOSING: f64 = 3.0;

/// The key of the resistance when closed.
pub const CLOSED_RESISTANCE: Key = Key::required(
    "closed_resistance",
    Takes::Quantity(units::RESISTANCE),
    "resistance when closed",
);
/// The key of the resistance when open.
pub const OPEN_RESISTANCE: Key = Key::required(
    "open_resistance",
    Takes::Quantity(units::RESISTANCE),
    "resistance when open",
);
/// The key of the duration of a change.
pub const TRANSITION: Key = Key::required(
    "transition",
    Takes::Quantity(units::TIME),
    "duration of a change; 0 s is an ideal jump",
);

/// A conductance that is open, closed or on its way.
pub struct Movement {
    keys: [Value; 3],
    /// Logarithms of both conductances.
    closed: f64,
    open: f64,
    /// Conductances closed and open [S].
    at_rest: (f64, f64),
    transition: f64,
}

impl Movement {
    /// Reads the three keys.
    pub fn read(fields: &Fields<'_>) -> Option<Self> {
        let closed = fields.positive("closed_resistance");
        let open = fields.positive("open_resistance");
        let transition = fields.non_negative("transition");
        Some(Movement {
            keys: [closed?, open?, transition?],
            closed: 0.0,
            open: 0.0,
            at_rest: (0.0, 0.0),
            transition: 0.0,
        })
    }

    /// Re-derives the numbers.
    ///
    /// # Errors
    /// It would conduct better when it is open.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let [closed, open, transition] = self.keys.map(|key| values[key]);
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
        self.transition = transition;
        Ok(())
    }

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

    /// Conductance [S] at a time.
    #[inline]
    pub fn conductance(&self, time: f64, mode: &[f64]) -> f64 {
        match mode[STATE] {
            CLOSED => self.at_rest.0,
            OPEN => self.at_rest.1,
            _ => self.logarithm(time, mode).exp(),
        }
    }

    /// Conductance when closed [S].
    pub fn when_closed(&self) -> f64 {
        self.at_rest.0
    }

    /// End of a movement [s]; infinity at rest.
    pub fn arrival(&self, mode: &[f64]) -> f64 {
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

    /// Comes to rest where an arrival is due.
    pub fn arrive(&self, time: f64, mode: &mut [f64]) {
        if self.arrival(mode) <= time {
            mode[STATE] = if is_or_gets_closed(mode) {
                CLOSED
            } else {
                OPEN
            };
        }
    }

    /// Sets out towards a state; false where it is there or on the way.
    pub fn go(&self, closed: bool, time: f64, mode: &mut [f64]) -> bool {
        if is_or_gets_closed(mode) == closed {
            return false;
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
        true
    }

    /// As if the last change had come at `since` from the other state at rest.
    pub fn went(&self, closed: bool, since: f64, time: f64, mode: &mut [f64]) {
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
}

/// At rest, open or closed.
pub fn at_rest(closed: bool, mode: &mut [f64]) {
    mode[STATE] = if closed { CLOSED } else { OPEN };
    mode[SINCE] = 0.0;
    mode[LEFT_FROM] = 0.0;
}

/// True where it is closed or on its way there.
pub fn is_or_gets_closed(mode: &[f64]) -> bool {
    mode[STATE] == CLOSED || mode[STATE] == CLOSING
}

/// Takes the memory of instants back by `by` seconds.
pub fn earlier(by: f64, mode: &mut [f64]) {
    mode[SINCE] -= by;
}
