//! A step-down converter in nodal form, from rest.
//!
//! 24 V; switch with period 10 us: from k T on ln G rises linearly from ln 1e-6 to ln 50 S within 20 ns, falls back
//! from k T + 2.5 us within 20 ns. Diode 10 uA, n 1.05, 10 mohm, 300 pF; snubber 5 ohm + 1 nF; inductor 30 mohm,
//! 22 turns, 60 mm2, 55 mm, gap 0.3 mm, Js 0.48 T, mu_i 2000; output 15 mohm + 100 uF, 1.8 ohm. Invented parts.

use super::laws::{Core, Diode, Junction, SWITCH_MODES, VT, conductance};
use super::stamps::{GROUND, Places, Stamps};
use coilbreak::dae::{Cause, Evaluation, Pattern, Point, System};

/// Unknowns: supply node and current, switched node, linkage, winding current, junction, snubber, output,
/// output capacitor.
pub const P: usize = 0;
pub const SUPPLY: usize = 1;
pub const X: usize = 2;
pub const LINKAGE: usize = 3;
pub const WINDING: usize = 4;
pub const VJ: usize = 5;
pub const SNUBBER: usize = 6;
pub const OUT: usize = 7;
pub const STORE: usize = 8;

pub const PERIOD: f64 = 10e-6;
const EDGES: [f64; 4] = [0.0, 20e-9, 2.5e-6, 2.52e-6];

pub struct Buck {
    pub core: Core,
    pub diode: Diode,
    places: Places,
}

impl Buck {
    pub fn new() -> Self {
        let mut buck = Buck {
            core: Core::new(22.0, 60e-6, 55e-3, 0.3e-3, 0.48, 2000.0),
            diode: Diode {
                junction: Junction {
                    is: 10e-6,
                    nvt: 1.05 * VT,
                },
                conductance: 1.0 / 10e-3,
                capacitance: 300e-12,
            },
            places: Places::new(0, |_| {}),
        };
        let (x, mode) = (buck.start(), buck.off());
        buck.places = Places::new(x.len(), |s| buck.stamp(s, 0.0, &x, &mode));
        buck
    }

    pub fn start(&self) -> Vec<f64> {
        let mut x = vec![0.0; 9];
        (x[P], x[SUPPLY]) = (24.0, 0.0);
        x
    }

    /// The first edge begins at time zero.
    pub fn off(&self) -> Vec<f64> {
        let mut mode = vec![0.0; SWITCH_MODES];
        self.begin(0, &mut mode);
        mode
    }

    fn edge(number: usize) -> f64 {
        (number / 4) as f64 * PERIOD + EDGES[number % 4]
    }

    fn begin(&self, number: usize, mode: &mut [f64]) {
        let (off, on) = (1e-6_f64.ln(), 50.0_f64.ln());
        let slope = (on - off) / 20e-9;
        let line = [[off, slope], [on, 0.0], [on, -slope], [off, 0.0]][number % 4];
        mode.copy_from_slice(&[number as f64, Buck::edge(number), line[0], line[1]]);
    }

    /// Wanted swings: whole for the switched quantities, the ripple's for the output.
    pub fn swings(&self) -> Vec<f64> {
        vec![24.0, 12.0, 24.0, 3e-4, 12.0, 1.0, 24.0, 9e-3, 9e-3]
    }

    fn stamp(&self, s: &mut Stamps<'_>, time: f64, x: &[f64], mode: &[f64]) {
        s.carry(x, P, GROUND, SUPPLY);
        s.f(SUPPLY, x[P] - 24.0);
        s.df(SUPPLY, P, 1.0);
        s.conductance(x, P, X, conductance(mode, time));
        self.diode.stamp(s, x, GROUND, X, VJ);
        s.conductance(x, X, SNUBBER, 1.0 / 5.0);
        s.capacitance(x, SNUBBER, GROUND, 1e-9);
        let (i, slope) = self.core.current(x[LINKAGE]);
        s.carry(x, X, OUT, WINDING);
        s.f(WINDING, x[WINDING] - i);
        s.df(WINDING, WINDING, 1.0);
        s.df(WINDING, LINKAGE, -slope);
        s.q(LINKAGE, x[LINKAGE]);
        s.dq(LINKAGE, LINKAGE, 1.0);
        s.f(LINKAGE, 30e-3 * x[WINDING] - (x[X] - x[OUT]));
        s.df(LINKAGE, WINDING, 30e-3);
        s.df(LINKAGE, X, -1.0);
        s.df(LINKAGE, OUT, 1.0);
        s.conductance(x, OUT, STORE, 1.0 / 15e-3);
        s.capacitance(x, STORE, GROUND, 100e-6);
        s.conductance(x, OUT, GROUND, 1.0 / 1.8);
    }

    /// Power [W] in the diode by its own loss law.
    pub fn diode_loss(&self, x: &[f64]) -> f64 {
        let i = self.diode.conductance * (-x[X] - x[VJ]);
        i * i / self.diode.conductance + x[VJ] * self.diode.junction.current(x[VJ]).0
    }
}

impl System for Buck {
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
        self.diode.junction.limit(x[VJ], &mut dx[VJ])
    }
    fn mode_size(&self) -> usize {
        SWITCH_MODES
    }
    fn next_event(&self, _time: f64, mode: &[f64]) -> f64 {
        Buck::edge(mode[0] as usize + 1)
    }
    fn transition(&self, _cause: Cause, _time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        self.begin(mode[0] as usize + 1, mode);
        true
    }
}
