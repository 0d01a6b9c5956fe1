//! The electrical side of two contacts: a conductance that opens and closes, and with an arc what the gap does.
//!
//! The owner moves the contacts and says how wide the gap is. With an arc the states are: touching; *held* together by a
//! bridge of molten metal after the contacts have begun to part; open; burning. What leads from one to the other is in `arc`.

use super::arc::Arc;
use super::element::{Branch, Point, Unsound};
use super::movement::{self, Movement};
use super::stamper::Stamper;
use crate::netlist::Values;

/// Mode values that a pair needs.
pub const MODES: usize = movement::MODES + 3;
/// Guards that a pair with an arc needs.
pub const GUARDS: usize = 2;
/// 1 where a bridge holds the parting contacts together.
const HELD: usize = movement::MODES;
/// Place of the sign of a burning arc's voltage; 0 where none burns.
pub const BURNS: usize = movement::MODES + 1;
/// 1 where the bridge parted with the current of an arc.
const FED: usize = movement::MODES + 2;

/// The guards: what lights an arc, and what ends it or the bridge.
const LIGHTS: usize = 0;
const ENDS: usize = 1;
/// Value of a guard that does not apply.
const NEVER: f64 = -1.0;

/// Two contacts.
pub struct Pair {
    /// Their conductance.
    pub movement: Movement,
    /// What happens in the gap; None for contacts that merely conduct or not.
    pub arc: Option<Arc>,
}

/// Where the contacts are.
#[derive(Clone, Copy, Debug)]
pub struct Gap {
    /// Gap [m]; 0 where they touch.
    pub length: f64,
    /// True where it shrinks.
    pub shrinks: bool,
}

impl Pair {
    /// Re-derives the numbers.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.movement.derive(values)?;
        match &mut self.arc {
            Some(arc) => arc.derive(values, self.movement.when_closed()),
            None => Ok(()),
        }
    }

    /// Stray capacitance across the contacts [F].
    pub fn capacitance(&self) -> f64 {
        self.arc.as_ref().map_or(0.0, Arc::capacitance)
    }

    /// Current [A] through the contacts and its slope [S], the stray capacitance aside.
    fn current(&self, at: Point<'_>, voltage: f64, gap: Gap) -> (f64, f64) {
        match self.burning(at.mode, gap) {
            Some(arc) => {
                let conductance = self.movement.when_closed();
                (conductance * (voltage - arc), conductance)
            }
            None => {
                let conductance = self.movement.conductance(at.time, at.mode);
                (conductance * voltage, conductance)
            }
        }
    }

    /// The signed voltage of the arc that burns [V].
    fn burning(&self, mode: &[f64], gap: Gap) -> Option<f64> {
        let arc = self.arc.as_ref()?;
        (mode[BURNS] != 0.0).then(|| mode[BURNS] * arc.burning(gap.length))
    }

    /// Stamps current and charge between the terminals of a branch.
    pub fn stamp(&self, branch: &Branch, at: Point<'_>, gap: Gap, into: &mut Stamper<'_>) {
        let voltage = branch.voltage(at.x);
        let (current, slope) = self.current(at, voltage, gap);
        branch.conduct(at.x, current, slope, into);
        if self.arc.is_some() {
            let capacitance = self.capacitance();
            branch.store(capacitance * voltage, capacitance, into);
        }
    }

    /// Current into the first terminal [A].
    pub fn through(&self, branch: &Branch, at: Point<'_>, gap: Gap) -> f64 {
        match branch.current {
            Some(i) => i.of(at.x),
            None => self.current(at, branch.voltage(at.x), gap).0,
        }
    }

    /// Power turned to heat [W]: in the conductance, or in the arc and the contacts' resistance behind it.
    pub fn loss(&self, branch: &Branch, at: Point<'_>, gap: Gap) -> f64 {
        let voltage = branch.voltage(at.x);
        match self.burning(at.mode, gap) {
            Some(arc) => {
                let conductance = self.movement.when_closed();
                let behind = voltage - arc;
                conductance * behind * behind + conductance * behind * arc
            }
            None => voltage * voltage * self.movement.conductance(at.time, at.mode),
        }
    }

    /// Energy in the stray capacitance [J].
    pub fn stored(&self, branch: &Branch, at: Point<'_>) -> f64 {
        0.5 * self.capacitance() * branch.voltage(at.x).powi(2)
    }

    /// At rest, open or closed.
    pub fn at_rest(&self, closed: bool, mode: &mut [f64]) {
        movement::at_rest(closed, mode);
        mode[HELD] = 0.0;
        mode[BURNS] = 0.0;
        mode[FED] = 0.0;
    }

    /// The contacts begin to part.
    pub fn part(&self, time: f64, mode: &mut [f64]) {
        if self.arc.is_some() {
            mode[HELD] = 1.0;
        } else {
            self.movement.go(false, time, mode);
        }
    }

    /// The contacts touch.
    pub fn touch(&self, time: f64, mode: &mut [f64]) {
        if mode[BURNS] != 0.0 {
            // An arc that burns up to the touch leaves no moment without conduction.
            self.at_rest(true, mode);
        }
        mode[HELD] = 0.0;
        mode[FED] = 0.0;
        self.movement.go(true, time, mode);
    }

    /// Fills the two guards of an arc.
    pub fn guards(&self, branch: &Branch, at: Point<'_>, gap: Gap, out: &mut [f64]) {
        let Some(arc) = &self.arc else {
            return;
        };
        out[LIGHTS] = NEVER;
        out[ENDS] = NEVER;
        let voltage = branch.voltage(at.x);
        if at.mode[BURNS] != 0.0 {
            let current = at.mode[BURNS] * self.current(at, voltage, gap).0;
            out[ENDS] = arc.minimum().1 - current;
        } else if at.mode[HELD] != 0.0 {
            out[LIGHTS] = self.current(at, voltage, gap).0.abs() - arc.minimum().1;
            out[ENDS] = gap.length - arc.bridge();
        } else if !movement::is_or_gets_closed(at.mode) {
            let line = if at.mode[FED] != 0.0 {
                arc.fed(gap.length)
            } else {
                arc.breakdown(gap.length, gap.shrinks)
            };
            out[LIGHTS] = voltage.abs() - line;
        }
    }

    /// Takes the event of a guard.
    pub fn at_guard(&self, which: usize, branch: &Branch, time: f64, x: &[f64], mode: &mut [f64]) {
        if mode[HELD] != 0.0 {
            mode[HELD] = 0.0;
            mode[FED] = f64::from(u8::from(which == LIGHTS));
            self.movement.go(false, time, mode);
        } else if which == LIGHTS {
            self.at_rest(false, mode);
            mode[BURNS] = branch.voltage(x).signum();
        } else {
            mode[BURNS] = 0.0;
        }
    }
}
