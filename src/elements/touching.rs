//! Contacts that touch and rebound: a pair with its train of rebounds, whoever moves it.

use super::contact_pair::{self, Pair};
use super::element::Unsound;
use super::movement;
use super::rebounds::{Flight, Rebounds};
use crate::netlist::Values;

/// Mode values that it needs.
pub const MODES: usize = contact_pair::MODES + 3;
/// 1 after a touch that a train follows, and the instant [s] of it.
const TRAIN: usize = contact_pair::MODES;
const TOUCHED: usize = TRAIN + 1;
/// Number of the rebound that the contact is in; 0 for none.
const REBOUND: usize = TRAIN + 2;

/// A pair and its rebounds.
pub struct Touching {
    /// The electrical side.
    pub pair: Pair,
    /// Rebounds after each touch, where there are any.
    pub rebounds: Option<Rebounds>,
}

impl Touching {
    /// Re-derives the numbers.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        if let Some(rebounds) = &mut self.rebounds {
            rebounds.derive(values);
        }
        self.pair.derive(values)
    }

    /// The rebound that the contact is in, and how long after the touch [s].
    pub fn rebound(&self, time: f64, mode: &[f64]) -> Option<(Flight, f64)> {
        let flight = self.rebounds.as_ref()?.flight(mode[REBOUND] as usize)?;
        Some((flight, time - mode[TOUCHED]))
    }

    /// True where the contact is in a rebound.
    pub fn rebounds_now(mode: &[f64]) -> bool {
        mode[REBOUND] != 0.0
    }

    /// The contacts touch; a train may follow.
    pub fn touch(&self, time: f64, mode: &mut [f64]) {
        mode[REBOUND] = 0.0;
        mode[TRAIN] = f64::from(u8::from(self.rebounds.is_some()));
        mode[TOUCHED] = time;
        self.pair.touch(time, mode);
    }

    /// Whoever moves the contacts takes them apart: a train ends. They part unless a rebound has parted them already.
    pub fn part(&self, time: f64, mode: &mut [f64]) {
        let parted = Self::rebounds_now(mode);
        self.forget(mode);
        if !parted {
            self.pair.part(time, mode);
        }
    }

    /// No train goes on.
    pub fn forget(&self, mode: &mut [f64]) {
        mode[TRAIN] = 0.0;
        mode[REBOUND] = 0.0;
    }

    /// At rest, open or closed.
    pub fn at_rest(&self, closed: bool, mode: &mut [f64]) {
        self.pair.at_rest(closed, mode);
        self.forget(mode);
        mode[TOUCHED] = 0.0;
    }

    /// The next instant behind `time` at which something changes by itself, or infinity.
    pub fn next(&self, time: f64, mode: &[f64]) -> f64 {
        let train = match &self.rebounds {
            Some(rebounds) if mode[TRAIN] != 0.0 => rebounds
                .changes(mode[TOUCHED])
                .map(|change| change.0)
                .find(|&instant| instant > time)
                .unwrap_or(f64::INFINITY),
            _ => f64::INFINITY,
        };
        self.pair.movement.arrival(mode).min(train)
    }

    /// Takes what is due at this instant.
    pub fn change(&self, time: f64, mode: &mut [f64]) {
        self.pair.movement.arrive(time, mode);
        let Some(rebounds) = self.rebounds.as_ref().filter(|_| mode[TRAIN] != 0.0) else {
            return;
        };
        let mut changes = rebounds.changes(mode[TOUCHED]);
        if let Some((_, number, ends)) = changes.find(|change| change.0 == time) {
            if ends {
                mode[REBOUND] = 0.0;
                self.pair.touch(time, mode);
            } else {
                mode[REBOUND] = number as f64;
                self.pair.part(time, mode);
            }
        }
    }
}

/// Takes the memory of instants back by `by` seconds.
pub fn earlier(by: f64, mode: &mut [f64]) {
    movement::earlier(by, mode);
    mode[TOUCHED] -= by;
}
