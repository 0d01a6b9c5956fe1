//! Periodic states: where closed forms and published figures have them, and how deviations from them grow.

use super::problems::Written;
use crate::dae::{
    Cause, Cycle, Evaluation, METHODS, Orbit, Pattern, Point, State, System, Tolerances, shoot,
};
use std::ops::ControlFlow;

fn find(system: &dyn System, state: &mut State, period: f64, free: bool) -> Orbit {
    let n = system.size();
    let tolerances = Tolerances::absolute(vec![1e-10; n]);
    let cycle = Cycle {
        period,
        free,
        tolerances: &tolerances,
        scales: &vec![1.0; n],
        enough: 1e-8,
        longest_step: f64::INFINITY,
        plain: 2,
        most: (20, 0),
    };
    let orbit = shoot(system, &METHODS[0], state, &cycle, &mut |_| {
        ControlFlow::Continue(())
    })
    .unwrap();
    assert!(orbit.converged, "{orbit:?}");
    orbit
}

#[test]
fn a_driven_branch_comes_to_its_phasor_at_once() {
    // i' = (sin(2 pi t) - R i)/L: a time constant of 200 periods, |i| = 1/sqrt(R^2 + (2 pi L)^2) behind by atan(2 pi L/R).
    let (r, l) = (1.0, 200.0);
    let omega = std::f64::consts::TAU;
    let system = Written::new(1, move |t, x, q, f, dq, df| {
        (q[0], f[0]) = (l * x[0], r * x[0] - (omega * t).sin());
        (dq[0], df[0]) = (l, r);
    });
    let mut state = State {
        time: 0.0,
        x: vec![0.0],
        mode: vec![],
    };
    let orbit = find(&system, &mut state, 1.0, false);
    let known = -(omega * l).atan2(r).sin() / r.hypot(omega * l);
    assert!((state.x[0] - known).abs() < 1e-9, "{} {known}", state.x[0]);
    assert!((orbit.multipliers[0].re - (-r / l).exp()).abs() < 1e-9);
    assert!(orbit.periods <= 5, "{}", orbit.periods);
}

#[test]
fn a_self_oscillating_circuit_finds_its_period() {
    // Van der Pol, mu = 1: period 6.6632868593231301896996820305 (published, e.g. by Andersen and Geer 1982; from
    // memory); the other multiplier is exp of the integral of mu (1 - x^2) over a period.
    let system = Written::new(2, |_, x, q, f, dq, df| {
        q.copy_from_slice(x);
        f.copy_from_slice(&[-x[1], x[0] - (1.0 - x[0] * x[0]) * x[1]]);
        dq.copy_from_slice(&[1.0, 0.0, 0.0, 1.0]);
        df.copy_from_slice(&[0.0, -1.0, 1.0 + 2.0 * x[0] * x[1], -(1.0 - x[0] * x[0])]);
    });
    for near in [6.0, 7.3] {
        let mut state = State {
            time: 0.0,
            x: vec![1.0, 0.0],
            mode: vec![],
        };
        let orbit = find(&system, &mut state, near, true);
        assert!(
            (orbit.period - 6.663_286_859_323_13).abs() < 1e-7,
            "{near}: {}",
            orbit.period
        );
        assert_eq!(orbit.multipliers.len(), 1);
        let slowest = orbit.multipliers[0];
        assert!(
            slowest.im == 0.0 && (slowest.re - 8.595_9e-4).abs() < 1e-6,
            "{slowest}"
        );
    }
}

/// An ideal converter with control of its peak current: up at `rise` until the current meets `level` - `ramp` t, then down
/// at `fall` until the clock strikes. mode: 1 while rising; instant of the last strike; strikes.
struct PeakCurrent {
    pattern: Pattern,
    rise: f64,
    fall: f64,
    ramp: f64,
}

impl System for PeakCurrent {
    fn size(&self) -> usize {
        1
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        out.q[0] = at.x[0];
        out.f[0] = if at.mode[0] == 1.0 {
            -self.rise
        } else {
            self.fall
        };
        if slopes {
            (out.dq[0], out.df[0]) = (1.0, 0.0);
        }
    }
    fn mode_size(&self) -> usize {
        3
    }
    fn next_event(&self, _time: f64, mode: &[f64]) -> f64 {
        mode[2] + 1.0
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        let level = 1.0 - self.ramp * (at.time - at.mode[1]);
        out[0] = if at.mode[0] == 1.0 {
            at.x[0] - level
        } else {
            -1.0
        };
    }
    fn transition(&self, cause: Cause, time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        if cause == Cause::Time {
            mode.copy_from_slice(&[1.0, time, mode[2] + 1.0]);
        } else {
            mode[0] = 0.0;
        }
        true
    }
    fn earlier(&self, by: f64, mode: &mut [f64]) {
        mode[1] -= by;
        mode[2] -= by.round();
    }
}

#[test]
fn control_of_the_peak_current_multiplies_deviations_as_its_closed_form_says() {
    // -(m2 - mc)/(m1 + mc); without a ramp -D/(1 - D) with D = m2/(m1 + m2), unstable above one half. Textbook result of
    // converter control, derived here: di1 = -(m2 - mc)/(m1 + mc) di0.
    for (rise, fall, ramp) in [
        (0.7, 0.3, 0.0),
        (0.4, 0.6, 0.0),
        (0.4, 0.6, 0.25),
        (0.5, 0.5, 0.1),
    ] {
        let system = PeakCurrent {
            pattern: Pattern::from_positions(1, &[(0, 0)]),
            rise,
            fall,
            ramp,
        };
        // The periodic state: rise from 1 - ramp D - rise D with D = fall/(rise + fall).
        let duty = fall / (rise + fall);
        let valley = 1.0 - ramp * duty - rise * duty;
        let mut state = State {
            time: 0.0,
            x: vec![valley + 0.01],
            mode: vec![1.0, 0.0, 0.0],
        };
        let orbit = find(&system, &mut state, 1.0, false);
        let known = -(fall - ramp) / (rise + ramp);
        assert!(
            (orbit.multipliers[0].re - known).abs() < 1e-6,
            "{:?} {known}",
            orbit.multipliers
        );
        assert!(
            (state.x[0] - valley).abs() < 1e-8,
            "{} {valley}",
            state.x[0]
        );
    }
}
