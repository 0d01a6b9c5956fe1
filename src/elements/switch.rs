//! Switch: a conductance that moves between two values (see `movement`), by the clock or by a watched signal.

use super::claims::Claims;
use super::element::{
    Branch, Element, Energy, Follower, Happening, Path, PathKind, Point, Rhythm, Switching, Unsound,
};
use super::junction::{Breakdown, REACH, VOLTS_PER_KELVIN};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair};
use super::movement::{
    self, CLOSED_RESISTANCE, Movement, OPEN_RESISTANCE, TRANSITION, is_or_gets_closed,
};
use super::stamper::Stamper;
use super::switch_command::{
    CLOSES_AT, Command, INITIALLY, OPENS_AT, SQUARE, WATCHES, read_command,
};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "switch",
    about: "A switch or driver transistor seen as a conductance that changes over a transition time.",
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

/// Place behind the movement's modes: number of the first period of a square, 0, or minus infinity where it has always
/// run.
const FIRST: usize = movement::MODES;

struct Keys {
    breakdown: Option<(Value, Value)>,
    ambient: Value,
}

struct Switch {
    keys: Keys,
    command: Command,
    initially_closed: bool,
    movement: Movement,
    breakdown: Option<Breakdown>,
    branch: Branch,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let movement = Movement::read(fields);
    let breakdown = if fields.has("breakdown_voltage") || fields.has("breakdown_resistance") {
        let voltage = fields.needed_with("breakdown_voltage", "breakdown_resistance");
        let resistance = fields.needed_with("breakdown_resistance", "breakdown_voltage");
        Some(voltage.zip(resistance))
    } else {
        None
    };
    let (command, initially_closed) = read_command(fields)?;
    let keys = Keys {
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
        movement: movement?,
        breakdown: None,
        branch: Branch::default(),
    };
    Some(Made::new(terminals?, element))
}

impl Switch {
    /// Sets out towards a state; nothing happens where it is there or on the way.
    fn go(&self, closed: bool, time: f64, mode: &mut [f64]) -> Option<Happening> {
        self.movement.go(closed, time, mode).then_some(if closed {
            Happening::Closes
        } else {
            Happening::Opens
        })
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
        let conductance = self.movement.conductance(at.time, at.mode);
        let (current, slope) = self.broken_down(voltage);
        (conductance * voltage + current, conductance + slope)
    }
}

impl Element for Switch {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.movement.derive(values)?;
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
        claims.modes(movement::MODES + 1);
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
        self.command.follower()
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
        voltage * voltage * self.movement.conductance(at.time, at.mode)
            + voltage * self.broken_down(voltage).0
    }

    fn stored(&self, _at: Point<'_>) -> f64 {
        0.0
    }
}

impl Switching for Switch {
    fn start(&self, mode: &mut [f64]) {
        movement::at_rest(self.initially_closed, mode);
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
        self.movement.went(closed, since, time, mode);
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        movement::earlier(by, mode);
        if self.command.rhythm() == Rhythm::Once && by > 0.0 {
            self.start(mode);
        }
    }

    fn rest(&self, after: Happening, mode: &mut [f64]) -> bool {
        mode[movement::STATE] = if after == Happening::Closes {
            movement::CLOSED
        } else {
            movement::OPEN
        };
        true
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let arrival = self.movement.arrival(mode);
        let command = self.command.next(time, mode[FIRST]);
        // An arrival that is due is never missed, even where rounding puts it on the instant itself.
        arrival.min(command)
    }

    fn at_instant(&self, time: f64, mode: &mut [f64]) -> Option<Happening> {
        self.movement.arrive(time, mode);
        let closed = self.command.at(time, mode[FIRST])?;
        self.go(closed, time, mode)
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        if let Some(watch) = self.command.watch() {
            out[0] = watch.guard(at.x, is_or_gets_closed(at.mode));
        }
    }

    fn at_guard(
        &self,
        _which: usize,
        time: f64,
        _x: &mut [f64],
        mode: &mut [f64],
    ) -> Option<Happening> {
        self.go(!is_or_gets_closed(mode), time, mode)
    }
}
