//! Circuits whose whole waveform is known in closed form.

/// A charged capacitor rings with a coil: 1 nF, 1 mH, 159 kHz. Unknowns: voltage, current.
mod ringing {
    use crate::circuits::problems::Hand;
    use coilbreak::dae::System;

    const C: f64 = 1e-9;
    const L: f64 = 1e-3;
    const VOLTS: f64 = 10.0;
    /// 2 pi sqrt(LC) [s].
    pub const PERIOD: f64 = std::f64::consts::TAU * 1e-6;
    pub const SWINGS: &[f64] = &[20.0, 0.02];

    pub fn system(r: f64) -> Box<dyn System> {
        Box::new(Hand::new(2, move |s, _, x| {
            s.q(0, C * x[0]);
            s.dq(0, 0, C);
            s.f(0, x[1]);
            s.df(0, 1, 1.0);
            s.q(1, L * x[1]);
            s.dq(1, 1, L);
            s.f(1, r * x[1] - x[0]);
            s.df(1, 0, -1.0);
            s.df(1, 1, r);
        }))
    }

    pub fn start() -> Vec<f64> {
        vec![VOLTS, 0.0]
    }

    /// L C v'' + r C v' + v = 0.
    pub fn solution(r: f64, t: f64) -> Vec<f64> {
        let (a, w0) = (r / (2.0 * L), 1.0 / (L * C).sqrt());
        let w = (w0 * w0 - a * a).sqrt();
        let (sin, cos) = (w * t).sin_cos();
        let e = VOLTS * (-a * t).exp();
        vec![e * (cos + a / w * sin), C * e * w0 * w0 / w * sin]
    }
}

/// With 1 ohm: quality 1000.
pub mod ring {
    pub use super::ringing::{PERIOD, SWINGS, start};
    pub fn system() -> Box<dyn coilbreak::dae::System> {
        super::ringing::system(1.0)
    }
    pub fn solution(t: f64) -> Vec<f64> {
        super::ringing::solution(1.0, t)
    }
}

/// With 0.05 ohm: quality 20 000.
pub mod barely {
    pub use super::ringing::{PERIOD, SWINGS, start};
    pub fn system() -> Box<dyn coilbreak::dae::System> {
        super::ringing::system(0.05)
    }
    pub fn solution(t: f64) -> Vec<f64> {
        super::ringing::solution(0.05, t)
    }
}

/// The same coil and capacitor with 50 ohm (quality 20) on a sine at its resonance, from rest.
pub mod driven {
    use crate::circuits::problems::Hand;
    use coilbreak::dae::System;

    const C: f64 = 1e-9;
    const L: f64 = 1e-3;
    const R: f64 = 50.0;
    pub const PERIOD: f64 = std::f64::consts::TAU * 1e-6;
    pub const SWINGS: &[f64] = &[40.0, 0.04];

    pub fn system() -> Box<dyn System> {
        Box::new(Hand::new(2, |s, t, x| {
            s.q(0, C * x[0]);
            s.dq(0, 0, C);
            s.f(0, -x[1]);
            s.df(0, 1, -1.0);
            s.q(1, L * x[1]);
            s.dq(1, 1, L);
            s.f(1, R * x[1] + x[0] - (1e6 * t).sin());
            s.df(1, 0, 1.0);
            s.df(1, 1, R);
        }))
    }

    pub fn start() -> Vec<f64> {
        vec![0.0, 0.0]
    }

    /// At resonance the forced current is sin(w0 t)/R, the forced voltage -cos(w0 t)/(w0 C R); free parts start it at rest.
    pub fn solution(t: f64) -> Vec<f64> {
        let (a, w0) = (R / (2.0 * L), 1e6);
        let w = (w0 * w0 - a * a).sqrt();
        let forced = -1.0 / (w0 * C * R);
        // v = forced cos w0 t + e^(-a t) (A cos w t + B sin w t), v(0) = 0, v'(0) = 0.
        let (big_a, big_b) = (-forced, -forced * a / w);
        let (sin, cos) = (w * t).sin_cos();
        let e = (-a * t).exp();
        let v = forced * (w0 * t).cos() + e * (big_a * cos + big_b * sin);
        let slope = -forced * w0 * (w0 * t).sin()
            + e * ((-a * big_a + w * big_b) * cos + (-a * big_b - w * big_a) * sin);
        vec![v, C * slope]
    }
}

/// 24 V stepped onto 4 ohm and a saturating coil without gap: linkage' = V - R i(linkage).
pub mod saturating {
    use crate::circuits::laws::Core;
    use crate::circuits::problems::Hand;
    use coilbreak::dae::System;
    use std::sync::OnceLock;

    const R: f64 = 4.0;
    const VOLTS: f64 = 24.0;
    /// Just before the current has settled at 6 A.
    pub const UNTIL: f64 = 1.5e-3;
    pub const SWINGS: &[f64] = &[0.031, 6.0];

    fn core() -> Core {
        Core::new(200.0, 100e-6, 120e-3, 0.0, 1.6, 4000.0)
    }

    /// Unknowns: linkage, current (algebraic).
    pub fn system() -> Box<dyn System> {
        let core = core();
        Box::new(Hand::new(2, move |s, _, x| {
            s.q(0, x[0]);
            s.dq(0, 0, 1.0);
            s.f(0, R * x[1] - VOLTS);
            s.df(0, 1, R);
            let (i, slope) = core.current(x[0]);
            s.f(1, x[1] - i);
            s.df(1, 1, 1.0);
            s.df(1, 0, -slope);
        }))
    }

    pub fn start() -> Vec<f64> {
        vec![0.0, 0.0]
    }

    /// Time at each of many linkages, t = integral of d linkage/(V - R i): Gauss's rule with three points a piece.
    fn table() -> &'static [(f64, f64)] {
        static TABLE: OnceLock<Vec<(f64, f64)>> = OnceLock::new();
        TABLE.get_or_init(|| {
            let core = core();
            let rate = |linkage: f64| 1.0 / (VOLTS - R * core.current(linkage).0);
            let (step, mut linkage, mut time) = (1e-6, 0.0, 0.0);
            let mut table = vec![(0.0, 0.0)];
            while time < 1.01 * UNTIL {
                let shift = 0.5 * step * 0.6_f64.sqrt();
                let middle = linkage + 0.5 * step;
                time += step / 18.0
                    * (5.0 * rate(middle - shift)
                        + 8.0 * rate(middle)
                        + 5.0 * rate(middle + shift));
                linkage += step;
                table.push((time, linkage));
            }
            table
        })
    }

    /// Linkage and current at `t` from the last point of the table before it.
    pub fn solution(t: f64) -> Vec<f64> {
        let core = core();
        let table = table();
        let at = table.partition_point(|&(time, _)| time <= t).max(1) - 1;
        let (from, start) = table[at];
        // From the table's point on: a step of at most 1e-6 Wb by the classical formula of order 4.
        let rise = |linkage: f64| VOLTS - R * core.current(linkage).0;
        let h = t - from;
        let k1 = rise(start);
        let k2 = rise(start + 0.5 * h * k1);
        let k3 = rise(start + 0.5 * h * k2);
        let k4 = rise(start + h * k3);
        let linkage = start + h / 6.0 * (k1 + 2.0 * k2 + 2.0 * k3 + k4);
        vec![linkage, core.current(linkage).0]
    }
}
