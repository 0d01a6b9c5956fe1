//! A line of equal sections: series inductance and resistance, shunt capacitance and leakage, as a system.
//!
//! n sections of 1 uH + 0.1 ohm and 1 nF beside 10 Mohm; source 0 to 1 V linearly in 1 us behind 50 ohm, 50 ohm at the end.

use super::stamps::{GROUND, Places, Stamps};
use coilbreak::dae::{Cause, Evaluation, Pattern, Point, System};

pub struct Ladder {
    pub sections: usize,
    places: Places,
}

impl Ladder {
    pub fn new(sections: usize) -> Self {
        let mut ladder = Ladder {
            sections,
            places: Places::new(0, |_| {}),
        };
        let x = vec![0.0; 1 + 2 * sections];
        ladder.places = Places::new(x.len(), |s| ladder.stamp(s, 0.0, &x, &[1.0]));
        ladder
    }

    /// Unknown of the voltage behind section `k` (from 1); 0 is the node behind the source's resistance.
    pub fn node(&self, k: usize) -> usize {
        2 * k
    }

    /// Unknown of the current through section `k` (from 1).
    pub fn current(&self, k: usize) -> usize {
        2 * k - 1
    }

    fn stamp(&self, s: &mut Stamps<'_>, time: f64, x: &[f64], mode: &[f64]) {
        let source = if mode[0] > 0.5 { time * 1e6 } else { 1.0 };
        s.f(0, (x[0] - source) / 50.0);
        s.df(0, 0, 1.0 / 50.0);
        for k in 1..=self.sections {
            let (before, here, i) = (self.node(k - 1), self.node(k), self.current(k));
            s.carry(x, before, here, i);
            s.f(i, 0.1 * x[i] - (x[before] - x[here]));
            s.df(i, i, 0.1);
            s.df(i, before, -1.0);
            s.df(i, here, 1.0);
            s.q(i, 1e-6 * x[i]);
            s.dq(i, i, 1e-6);
            s.capacitance(x, here, GROUND, 1e-9);
            s.conductance(x, here, GROUND, 1e-7);
        }
        s.conductance(x, self.node(self.sections), GROUND, 1.0 / 50.0);
    }
}

impl System for Ladder {
    fn size(&self) -> usize {
        self.places.pattern.size
    }
    fn pattern(&self) -> &Pattern {
        &self.places.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        self.places
            .fill(slopes, out, |s| self.stamp(s, at.time, at.x, at.mode));
    }
    fn mode_size(&self) -> usize {
        1
    }
    fn next_event(&self, _time: f64, mode: &[f64]) -> f64 {
        if mode[0] > 0.5 { 1e-6 } else { f64::INFINITY }
    }
    fn transition(&self, _cause: Cause, _time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        mode[0] = 0.0;
        true
    }
}
