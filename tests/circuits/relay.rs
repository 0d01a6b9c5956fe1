//! A relay coil interrupted by a switch, in nodal form: with a diode, bare, or with a snubber across the switch.
//!
//! 24 V; coil of 400 ohm in series with a gapped core (4000 turns, 50 mm2, 60 mm, gap 0.15 mm, Js 1.5 T, mu_i 3000),
//! 80 pF across it; switch 10 S until 20 ms, then ln G linear to 1e-7 S within 1 us. Diode 1 nA, n 1.8, 0.2 ohm,
//! 20 pF; bare: 100 pF from the switch to ground; snubber 470 ohm + 100 nF. Start: switch closed, nothing stored
//! but the 24 V across the 80 pF (and -24 V across the junction). Invented parts.

use super::laws::{Core, Diode, Junction, SWITCH_MODES, VT, conductance};
use super::stamps::{GROUND, Places, Stamps};
use coilbreak::dae::{Cause, Evaluation, Pattern, Point, System};

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Suppressor {
    Diode,
    None,
    Snubber,
}

/// Unknowns: supply node and current, switch node, flux linkage, winding current, junction or snubber node.
pub const P: usize = 0;
pub const SUPPLY: usize = 1;
pub const S: usize = 2;
pub const LINKAGE: usize = 3;
pub const WINDING: usize = 4;
pub const EXTRA: usize = 5;

pub struct Relay {
    pub suppressor: Suppressor,
    pub core: Core,
    pub diode: Diode,
    places: Places,
}

pub const OPENS: f64 = 20e-3;
pub const OPEN: f64 = 20e-3 + 1e-6;

impl Relay {
    pub fn new(suppressor: Suppressor) -> Self {
        let mut relay = Relay {
            suppressor,
            core: Core::new(4000.0, 50e-6, 60e-3, 0.15e-3, 1.5, 3000.0),
            diode: Diode {
                junction: Junction {
                    is: 1e-9,
                    nvt: 1.8 * VT,
                },
                conductance: 1.0 / 0.2,
                capacitance: 20e-12,
            },
            places: Places::new(0, |_| {}),
        };
        let (x, mode) = (relay.start(), relay.closed());
        relay.places = Places::new(x.len(), |s| relay.stamp(s, 0.0, &x, &mode));
        relay
    }

    pub fn start(&self) -> Vec<f64> {
        let mut x = vec![24.0, 0.0, 0.0, 0.0, 0.0];
        match self.suppressor {
            Suppressor::Diode => x.push(-24.0),
            Suppressor::None => {}
            Suppressor::Snubber => x.push(0.0),
        }
        x
    }

    pub fn closed(&self) -> Vec<f64> {
        vec![0.0, 0.0, 10.0_f64.ln(), 0.0]
    }

    /// Largest swing of each unknown after the opening, from the reference solution's own figures.
    pub fn swings(&self) -> Vec<f64> {
        let kick = match self.suppressor {
            Suppressor::Diode => 25.0,
            Suppressor::None => 7500.0,
            Suppressor::Snubber => 310.0,
        };
        let mut swings = vec![24.0, 0.054, kick, 0.3, 0.054];
        if self.suppressor != Suppressor::None {
            swings.push(if self.suppressor == Suppressor::Diode {
                1.0
            } else {
                kick
            });
        }
        swings
    }

    fn stamp(&self, s: &mut Stamps<'_>, time: f64, x: &[f64], mode: &[f64]) {
        s.carry(x, P, GROUND, SUPPLY);
        s.f(SUPPLY, x[P] - 24.0);
        s.df(SUPPLY, P, 1.0);
        let (i, slope) = self.core.current(x[LINKAGE]);
        s.carry(x, P, S, WINDING);
        s.f(WINDING, x[WINDING] - i);
        s.df(WINDING, WINDING, 1.0);
        s.df(WINDING, LINKAGE, -slope);
        s.q(LINKAGE, x[LINKAGE]);
        s.dq(LINKAGE, LINKAGE, 1.0);
        s.f(LINKAGE, 400.0 * x[WINDING] - (x[P] - x[S]));
        s.df(LINKAGE, WINDING, 400.0);
        s.df(LINKAGE, P, -1.0);
        s.df(LINKAGE, S, 1.0);
        s.capacitance(x, P, S, 80e-12);
        s.conductance(x, S, GROUND, conductance(mode, time));
        match self.suppressor {
            Suppressor::Diode => self.diode.stamp(s, x, S, P, EXTRA),
            Suppressor::None => s.capacitance(x, S, GROUND, 100e-12),
            Suppressor::Snubber => {
                s.conductance(x, S, EXTRA, 1.0 / 470.0);
                s.capacitance(x, EXTRA, GROUND, 100e-9);
            }
        }
    }

    /// Powers [W] of winding, switch and suppressor, each by its own loss law.
    pub fn losses(&self, time: f64, x: &[f64], mode: &[f64]) -> [f64; 3] {
        let suppressor = match self.suppressor {
            Suppressor::Diode => {
                let i = self.diode.conductance * (x[S] - x[P] - x[EXTRA]);
                i * i / self.diode.conductance + x[EXTRA] * self.diode.junction.current(x[EXTRA]).0
            }
            Suppressor::None => 0.0,
            Suppressor::Snubber => (x[S] - x[EXTRA]).powi(2) / 470.0,
        };
        [
            400.0 * x[WINDING].powi(2),
            conductance(mode, time) * x[S].powi(2),
            suppressor,
        ]
    }
}

impl System for Relay {
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
    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        self.suppressor == Suppressor::Diode && self.diode.junction.limit(x[EXTRA], &mut dx[EXTRA])
    }
    fn mode_size(&self) -> usize {
        SWITCH_MODES
    }
    fn next_event(&self, time: f64, _mode: &[f64]) -> f64 {
        [OPENS, OPEN]
            .into_iter()
            .find(|&event| event > time)
            .unwrap_or(f64::INFINITY)
    }
    fn transition(&self, _cause: Cause, time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        let (on, off) = (10.0_f64.ln(), 1e-7_f64.ln());
        mode[0] += 1.0;
        let line = if time < OPEN {
            [time, on, (off - on) / 1e-6]
        } else {
            [time, off, 0.0]
        };
        mode[1..].copy_from_slice(&line);
        true
    }
}
