//! An armature: a mass on a spring between two stops, pulled towards the pole.
//!
//! Its unknowns are the gap x [m] before the pole and its rate v = dx/dt [m/s]. Moving freely,
//! m dv/dt + damping v + pull - (preload + spring_rate (open_gap - x)) = 0. At a stop it leaves with -restitution times
//! the speed of the impact (Newton's law of impact, any textbook of mechanics) and rests there once a rebound would rise by
//! less than a millionth of the stroke: impacts stay finite in number. It leaves a stop when the net force turns.
//!
//! Mode values: where it is, and 1 while a start is being looked for. Then nothing moves: an armature that would leave
//! one stop is at the other.

use super::claims::{Claims, Measure};
use super::element::{Point, Unknown, Unsound};
use super::leg::OfFlux;
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The keys of `armature`.
pub const KEYS: &[Key] = &[
    Key::required(
        "mass",
        Takes::Quantity(units::MASS),
        "moving mass, at the pole",
    ),
    Key::required(
        "open_gap",
        Takes::Quantity(units::LENGTH),
        "gap before the pole at rest",
    ),
    Key::required(
        "seated_gap",
        Takes::Quantity(units::LENGTH),
        "gap that is left when it is pulled in",
    ),
    Key::required(
        "preload",
        Takes::Quantity(units::FORCE),
        "force of the spring at rest",
    ),
    Key::required(
        "spring_rate",
        Takes::Quantity(units::SPRING_RATE),
        "what the spring's force grows by on the way in",
    ),
    Key::default(
        "damping",
        Takes::Quantity(units::DAMPING),
        "0 N s/m",
        "friction in proportion to the speed",
    ),
    Key::required(
        "restitution",
        Takes::Quantity(units::RATIO),
        "speed after an impact on a stop over that before it",
    ),
];

/// Mode values that an armature needs.
pub const MODES: usize = 2;
/// Guards that it needs.
pub const GUARDS: usize = 2;
const STATE: usize = 0;
const SETTLES: usize = 1;

/// Values of `mode[STATE]`.
const OPEN: f64 = 0.0;
const SEATED: f64 = 1.0;
const FREE: f64 = 2.0;

/// Guards: of the outer stop and of the seat.
const OUTER: usize = 0;
const SEAT: usize = 1;
const NEVER: f64 = -1.0;

/// A rebound that would rise by less than this share of the stroke is none.
const STILL: f64 = 1e-6;

/// Rate [1/s] at which a resting armature would return to its stop if rounding took it away: it makes the state at rest
/// determined and moves nothing.
const RETURN: f64 = 1.0;

/// An armature.
pub struct Armature {
    keys: [Value; 7],
    seated_at_start: bool,
    mass: f64,
    open: f64,
    seated: f64,
    preload: f64,
    rate: f64,
    damping: f64,
    restitution: f64,
    /// The gap before the pole.
    pub gap: Unknown,
    speed: Unknown,
}

impl Armature {
    /// Reads the mapping behind `armature`.
    pub fn read(fields: &Fields<'_>, seated_at_start: bool) -> Option<Self> {
        let mass = fields.positive("mass");
        let open = fields.positive("open_gap");
        let seated = fields.non_negative("seated_gap");
        let preload = fields.non_negative("preload");
        let rate = fields.non_negative("spring_rate");
        let damping = fields.non_negative("damping");
        let restitution = fields.checked("restitution", "zero or more and below 1", |amount| {
            amount.low >= 0.0 && amount.high < 1.0
        });
        fields.finish();
        Some(Armature {
            keys: [
                mass?,
                open?,
                seated?,
                preload?,
                rate?,
                damping?,
                restitution?,
            ],
            seated_at_start,
            mass: 0.0,
            open: 0.0,
            seated: 0.0,
            preload: 0.0,
            rate: 0.0,
            damping: 0.0,
            restitution: 0.0,
            gap: Unknown::GROUND,
            speed: Unknown::GROUND,
        })
    }

    /// Re-derives the numbers.
    ///
    /// # Errors
    /// Stops that are exchanged.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        [
            self.mass,
            self.open,
            self.seated,
            self.preload,
            self.rate,
            self.damping,
            self.restitution,
        ] = self.keys.map(|key| values[key]);
        if self.seated < self.open {
            return Ok(());
        }
        Err(Unsound {
            word: "out-of-range",
            key: "armature.seated_gap",
            headline: format!(
                "seated, the armature leaves a gap of {}, open {}",
                units::engineering(self.seated, units::LENGTH, 4),
                units::engineering(self.open, units::LENGTH, 4)
            ),
            help: "`open_gap` must exceed `seated_gap`; are they exchanged?".into(),
        })
    }

    /// Claims gap and speed.
    pub fn claim(&mut self, claims: &mut Claims<'_>) {
        self.gap = claims.unknown("armature's gap", Measure::Length);
        self.speed = claims.unknown("armature's speed", Measure::Speed);
    }

    /// The gaps [m] when seated and open.
    pub fn stops(&self) -> (f64, f64) {
        (self.seated, self.open)
    }

    /// Its rate of change of the gap [m/s].
    pub fn speed(&self, x: &[f64]) -> f64 {
        self.speed.of(x)
    }

    /// Force of the spring [N], which opens.
    fn spring(&self, gap: f64) -> f64 {
        self.preload + self.rate * (self.open - gap)
    }

    /// The gap [m] of the stop that it rests at.
    fn stop(&self, mode: &[f64]) -> f64 {
        if mode[STATE] == SEATED {
            self.seated
        } else {
            self.open
        }
    }

    /// Stamps its two rows; `pull` hangs on the flux that `flux` over `turns` makes up.
    pub fn stamp(
        &self,
        at: Point<'_>,
        pull: OfFlux,
        (flux, turns): (&[(Unknown, f64)], f64),
        into: &mut Stamper<'_>,
    ) {
        let (gap, speed) = (self.gap.of(at.x), self.speed.of(at.x));
        let free = at.mode[STATE] == FREE;
        let when_free = |value: f64| if free { value } else { 0.0 };
        let at_rest = |value: f64| if free { 0.0 } else { value };
        into.q(self.gap, gap);
        into.dq(self.gap, self.gap, 1.0);
        into.f(
            self.gap,
            when_free(-speed) + at_rest(RETURN * (gap - self.stop(at.mode))),
        );
        into.df(self.gap, self.speed, when_free(-1.0));
        into.df(self.gap, self.gap, at_rest(RETURN));

        into.q(self.speed, self.mass * speed);
        into.dq(self.speed, self.speed, self.mass);
        let force = self.damping * speed + pull.value - self.spring(gap);
        into.f(
            self.speed,
            when_free(force) + at_rest(RETURN * self.mass * speed),
        );
        into.df(
            self.speed,
            self.speed,
            when_free(self.damping) + at_rest(RETURN * self.mass),
        );
        into.df(self.speed, self.gap, when_free(self.rate));
        for &(unknown, slope) in pull.others() {
            into.df(self.speed, unknown, when_free(slope));
        }
        for &(unknown, factor) in flux {
            into.df(
                self.speed,
                unknown,
                when_free(pull.by_flux * factor / turns),
            );
        }
    }

    /// Power of its friction [W].
    pub fn loss(&self, x: &[f64]) -> f64 {
        self.damping * self.speed.of(x).powi(2)
    }

    /// Energy of motion and of the spring [J].
    pub fn stored(&self, x: &[f64]) -> f64 {
        let stroke = self.open - self.gap.of(x);
        0.5 * self.mass * self.speed.of(x).powi(2)
            + self.preload * stroke
            + 0.5 * self.rate * stroke * stroke
    }

    /// Energy that an impact turns to heat [J].
    pub fn struck(&self, before: &[f64], after: &[f64]) -> f64 {
        let (speed, left) = (self.speed.of(before), self.speed.of(after));
        // What goes on the same way has not struck: another's event has its rounding in the speed.
        if speed * left > 0.0 {
            return 0.0;
        }
        let kept = if left == 0.0 { 0.0 } else { self.restitution };
        0.5 * self.mass * speed * speed * (1.0 - kept * kept)
    }

    /// Modes at the start.
    pub fn start(&self, mode: &mut [f64]) {
        mode[STATE] = if self.seated_at_start { SEATED } else { OPEN };
        mode[SETTLES] = 1.0;
    }

    /// True where it rests at its seat.
    pub fn is_seated(&self, mode: &[f64]) -> bool {
        mode[STATE] == SEATED
    }

    /// True while a start is being looked for.
    pub fn settles(mode: &[f64]) -> bool {
        mode[SETTLES] != 0.0
    }

    /// From here on it moves.
    pub fn sets_out(mode: &mut [f64]) {
        mode[SETTLES] = 0.0;
    }

    /// Fills its guards.
    pub fn guards(&self, at: Point<'_>, pull: f64, out: &mut [f64]) {
        let gap = self.gap.of(at.x);
        let closing = pull - self.spring(gap);
        (out[OUTER], out[SEAT]) = match at.mode[STATE] {
            FREE => (gap - self.open, self.seated - gap),
            SEATED => (NEVER, -closing),
            _ => (closing, NEVER),
        };
    }

    /// Takes the event of a guard; `pull` [N] is that of the instant.
    pub fn at_guard(&self, which: usize, pull: f64, x: &mut [f64], mode: &mut [f64]) {
        if Self::settles(mode) {
            mode[STATE] = if which == OUTER { SEATED } else { OPEN };
            return;
        }
        if mode[STATE] != FREE {
            mode[STATE] = FREE;
            return;
        }
        let (stop, state, out) = if which == OUTER {
            (self.open, OPEN, -1.0)
        } else {
            (self.seated, SEATED, 1.0)
        };
        let speed = -self.restitution * self.speed.of(x);
        // Net force into the stop, and how far the rebound rises against it.
        let holding = out * (pull - self.spring(stop));
        let rise = 0.5 * self.mass * speed * speed;
        let rests = rise <= holding * STILL * (self.open - self.seated);
        if let Some(gap) = x.get_mut(self.gap.0 as usize) {
            *gap = stop;
        }
        if let Some(value) = x.get_mut(self.speed.0 as usize) {
            *value = if rests { 0.0 } else { speed };
        }
        if rests {
            mode[STATE] = state;
        }
    }
}
