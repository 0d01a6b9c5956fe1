//! Laws of the circuits: core, junction, and a switch whose ln G is linear in time. Sources: see relay.rs.

use super::stamps::Stamps;

pub const MU0: f64 = 4e-7 * std::f64::consts::PI;
/// Thermal voltage [V] at 300.15 K.
pub const VT: f64 = 1.380649e-23 * 300.15 / 1.602176634e-19;

/// Core with gap: B = mu0 H + Js H/(|H| + Ha), H length + B gap/mu0 = N i, linkage = N area B.
#[derive(Clone, Copy, Debug)]
pub struct Core {
    pub turns: f64,
    pub area: f64,
    pub length: f64,
    pub gap: f64,
    pub js: f64,
    pub ha: f64,
}

impl Core {
    pub fn new(
        turns: f64,
        area: f64,
        length: f64,
        gap: f64,
        js: f64,
        initial_permeability: f64,
    ) -> Self {
        Core {
            turns,
            area,
            length,
            gap,
            js,
            ha: js / (MU0 * (initial_permeability - 1.0)),
        }
    }

    /// Winding current [A] and its slope [1/H] at a flux linkage [Wb].
    pub fn current(&self, linkage: f64) -> (f64, f64) {
        let b = linkage / (self.turns * self.area);
        let (size, rest) = (b.abs(), MU0 * self.ha + self.js - b.abs());
        let root = (rest * rest + 4.0 * MU0 * self.ha * size).sqrt();
        let h = if rest > 0.0 {
            2.0 * self.ha * size / (rest + root)
        } else {
            (root - rest) / (2.0 * MU0)
        };
        let slope = MU0 + self.js * self.ha / (h + self.ha).powi(2);
        let current = (h.copysign(b) * self.length + b * self.gap / MU0) / self.turns;
        let per_linkage = (self.length / slope + self.gap / MU0) / (self.turns.powi(2) * self.area);
        (current, per_linkage)
    }
}

/// Junction i = Is (exp(v/(n Vt)) - 1).
#[derive(Clone, Copy, Debug)]
pub struct Junction {
    pub is: f64,
    pub nvt: f64,
}

impl Junction {
    pub fn current(&self, v: f64) -> (f64, f64) {
        let e = (v / self.nvt).exp();
        (self.is * (v / self.nvt).exp_m1(), self.is / self.nvt * e)
    }

    /// Shortens a step of the junction's voltage where the exponential would be overshot: beyond the knee the
    /// current, not the voltage, moves as the tangent says.
    pub fn limit(&self, v: f64, dv: &mut f64) -> bool {
        let knee = self.nvt * (self.nvt / (self.is * std::f64::consts::SQRT_2)).ln();
        let goal = v + *dv;
        if goal <= knee || dv.abs() <= 2.0 * self.nvt {
            return false;
        }
        let limited = if v > 0.0 {
            let share = 1.0 + *dv / self.nvt;
            if share > 0.0 {
                v + self.nvt * share.ln()
            } else {
                knee
            }
        } else {
            self.nvt * (goal / self.nvt).ln()
        };
        *dv = limited - v;
        true
    }
}

/// Mode of the switch: count of events, then t0 [s], ln G at t0, slope of ln G [1/s].
pub const SWITCH_MODES: usize = 4;

pub fn conductance(mode: &[f64], time: f64) -> f64 {
    (mode[2] + mode[3] * (time - mode[1])).exp()
}

/// The junction with series resistance and constant capacitance from `anode` to `cathode`; `vj` is its voltage.
pub struct Diode {
    pub junction: Junction,
    pub conductance: f64,
    pub capacitance: f64,
}

impl Diode {
    pub fn stamp(&self, s: &mut Stamps<'_>, x: &[f64], anode: usize, cathode: usize, vj: usize) {
        use super::stamps::value;
        let g = self.conductance;
        let i = g * (value(x, anode) - value(x, cathode) - x[vj]);
        let (ij, gj) = self.junction.current(x[vj]);
        // Through the resistance from the anode to the cathode, and out of the junction's own row.
        s.f(anode, i);
        s.f(cathode, -i);
        s.f(vj, ij - i);
        s.q(vj, self.capacitance * x[vj]);
        s.dq(vj, vj, self.capacitance);
        for (row, sign) in [(anode, 1.0), (cathode, -1.0), (vj, -1.0)] {
            s.df(row, anode, sign * g);
            s.df(row, cathode, -sign * g);
            s.df(row, vj, -sign * g);
        }
        s.df(vj, vj, gj);
    }
}
