//! A contact that a relay's armature moves: it opens or closes where the armature passes a position.

use super::arc::{self, Arc};
use super::claims::Claims;
use super::contact::{BOUNCE, read_bounce};
use super::contact_pair::{self, Gap, Pair};
use super::element::{Branch, Happening, Point, Unknown, Unsound};
use super::kind::{NODES, Surroundings, Terminal, pair};
use super::movement::{CLOSED_RESISTANCE, Movement, OPEN_RESISTANCE, TRANSITION};
use super::stamper::Stamper;
use super::touching::{self, Touching};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The keys of a contact.
pub const KEYS: &[Key] = &[
    NODES,
    Key::optional(
        "closes_at_position",
        Takes::Quantity(units::LENGTH),
        "armature's gap at and below which it is closed",
    ),
    Key::optional(
        "opens_at_position",
        Takes::Quantity(units::LENGTH),
        "armature's gap at and below which it is open",
    ),
    CLOSED_RESISTANCE,
    OPEN_RESISTANCE,
    TRANSITION,
    BOUNCE,
    Key::optional(
        "arc",
        Takes::Map(ARC_KEYS),
        "breakdown of the gap and the arc in it",
    ),
];

/// The keys of `arc`: the armature makes the gap.
const ARC_KEYS: &[Key] = &[
    arc::MATERIAL,
    arc::MINIMUM_VOLTAGE,
    arc::MINIMUM_CURRENT,
    arc::CAPACITANCE,
    arc::COLUMN_FIELD,
    arc::BREAKDOWN_FIELD,
];

/// Mode values that a contact needs.
pub const MODES: usize = touching::MODES + 2;
/// 1 where the armature holds it closed, and the speed [m/s] with which it struck.
const HELD: usize = touching::MODES;
const STROKE: usize = touching::MODES + 1;

/// A contact of a relay.
pub struct RelayContact {
    /// Its name.
    pub name: String,
    touching: Touching,
    position_key: Value,
    /// True where it is closed with the armature at its seat.
    closes: bool,
    position: f64,
    gap: Unknown,
    /// Its terminals and current.
    pub branch: Branch,
}

impl RelayContact {
    /// Reads the mapping behind a contact's name.
    pub fn read(
        name: &str,
        fields: &Fields<'_>,
        around: &Surroundings<'_>,
    ) -> Option<(Vec<Terminal>, Self)> {
        let terminals = pair(fields).map(|terminals| {
            let named = |terminal: Terminal| Terminal {
                name: format!("{name}.{}", terminal.name),
                ..terminal
            };
            terminals.into_iter().map(named).collect()
        });
        let movement = Movement::read(fields);
        let rebounds = read_bounce(fields);
        let (opens, closes) = (
            fields.has("opens_at_position"),
            fields.has("closes_at_position"),
        );
        let position = if opens == closes {
            fields.error_here(
                "one-of",
                "a contact takes either `closes_at_position` or `opens_at_position`".into(),
                "write one of the two",
                "`closes_at_position: 0.3 mm` for one that is open at rest, `opens_at_position` for one that is closed",
            );
            None
        } else if closes {
            fields.positive("closes_at_position")
        } else {
            fields.positive("opens_at_position")
        };
        let arc = if fields.has("arc") {
            fields.map("arc").and_then(|map| {
                let arc = Arc::read(&map, around.ambient);
                map.finish();
                arc.map(Some)
            })
        } else {
            Some(None)
        };
        fields.finish();
        let contact = RelayContact {
            name: name.to_owned(),
            touching: Touching {
                pair: Pair {
                    movement: movement?,
                    arc: arc?,
                },
                rebounds: rebounds?,
            },
            position_key: position?,
            closes,
            position: 0.0,
            gap: Unknown::GROUND,
            branch: Branch::default(),
        };
        Some((terminals?, contact))
    }

    /// Re-derives the numbers; the position must lie between the armature's stops.
    ///
    /// # Errors
    /// A position that the armature never passes.
    pub fn derive(&mut self, values: &Values, (seated, open): (f64, f64)) -> Result<(), Unsound> {
        self.touching.derive(values)?;
        self.position = values[self.position_key];
        if seated < self.position && self.position < open {
            return Ok(());
        }
        let length = |value: f64| units::engineering(value, units::LENGTH, 4);
        Err(Unsound {
            word: "out-of-range",
            key: "contacts",
            headline: format!(
                "contact `{}` switches at {}, where the armature never passes",
                self.name,
                length(self.position)
            ),
            help: format!(
                "its position must lie between `seated_gap` {} and `open_gap` {}",
                length(seated),
                length(open)
            ),
        })
    }

    /// True where it is closed with the armature at its seat.
    pub fn closes_seated(&self) -> bool {
        self.closes
    }

    /// Number of guards.
    pub fn guard_count(&self) -> usize {
        1 + if self.touching.pair.arc.is_some() {
            contact_pair::GUARDS
        } else {
            0
        }
    }

    /// Claims terminals from `first` on, modes and guards.
    pub fn claim(&mut self, claims: &mut Claims<'_>, first: usize, gap: Unknown) {
        let hidden = claims.probed && self.touching.pair.arc.is_some();
        self.branch = Branch::claim_at(claims, first, hidden);
        self.gap = gap;
        claims.modes(MODES);
        claims.guards(self.guard_count());
    }

    fn gap(&self, at: Point<'_>) -> Gap {
        if let Some((flight, since)) = self.touching.rebound(at.time, at.mode) {
            return Gap {
                length: flight.gap(at.mode[STROKE], since),
                shrinks: flight.falls(since),
            };
        }
        let length = match at.mode[HELD] != 0.0 {
            true => 0.0,
            false => (self.gap.of(at.x) - self.position).abs(),
        };
        Gap {
            length,
            shrinks: false,
        }
    }

    /// Stamps its current.
    pub fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        self.touching
            .pair
            .stamp(&self.branch, at, self.gap(at), into);
    }

    /// Current into its first terminal [A].
    pub fn through(&self, at: Point<'_>) -> f64 {
        self.touching.pair.through(&self.branch, at, self.gap(at))
    }

    /// Power turned to heat [W].
    pub fn loss(&self, at: Point<'_>) -> f64 {
        self.touching.pair.loss(&self.branch, at, self.gap(at))
    }

    /// Energy in its stray capacitance [J].
    pub fn stored(&self, at: Point<'_>) -> f64 {
        self.touching.pair.stored(&self.branch, at)
    }

    /// At rest with the armature at a stop.
    pub fn at_rest(&self, seated: bool, mode: &mut [f64]) {
        let closed = seated == self.closes;
        self.touching.at_rest(closed, mode);
        mode[HELD] = f64::from(u8::from(closed));
        mode[STROKE] = 0.0;
    }

    /// Takes the memory of instants back.
    pub fn earlier(&self, by: f64, mode: &mut [f64]) {
        touching::earlier(by, mode);
    }

    /// The next change by itself.
    pub fn next(&self, time: f64, mode: &[f64]) -> f64 {
        self.touching.next(time, mode)
    }

    /// Takes what is due at this instant.
    pub fn change(&self, time: f64, mode: &mut [f64]) {
        self.touching.change(time, mode);
    }

    /// Fills its guards: the armature passes, then those of the arc.
    pub fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        let beyond = self.gap.of(at.x) - self.position;
        // It waits for the gap to grow where it is closed at the seat, or open there and shut again.
        out[0] = if (at.mode[HELD] != 0.0) == self.closes {
            beyond
        } else {
            -beyond
        };
        if self.touching.pair.arc.is_some() {
            let gap = self.gap(at);
            self.touching
                .pair
                .guards(&self.branch, at, gap, &mut out[1..]);
        }
    }

    /// Takes the event of a guard; `speed` [m/s] is the armature's.
    pub fn at_guard(
        &self,
        which: usize,
        time: f64,
        speed: f64,
        x: &[f64],
        mode: &mut [f64],
    ) -> Option<Happening> {
        if which > 0 {
            self.touching
                .pair
                .at_guard(which - 1, &self.branch, time, x, mode);
            return None;
        }
        let closed = mode[HELD] == 0.0;
        mode[HELD] = f64::from(u8::from(closed));
        if closed {
            mode[STROKE] = speed.abs();
            self.touching.touch(time, mode);
            Some(Happening::Closes)
        } else {
            self.touching.part(time, mode);
            Some(Happening::Opens)
        }
    }
}
