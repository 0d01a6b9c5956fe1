//! Laws that mislead an iteration: exponentials finer than the tolerance, nodes that nothing but algebra holds.

use super::problems::Written;
use crate::dae::{Advance, METHODS, March, Span, State, System, Tolerances};
use std::ops::ControlFlow;

/// 24 V, 0.5 H and 48 ohm into a node with a junction (1 nA, 46.6 mV) back to 24 V and a conductance that falls by
/// 16.8 e-folds within 1 us; no capacitance anywhere. Unknowns: node [V], current of the coil [A].
fn valve() -> impl System {
    let mut valve = Written::new(2, |t, x, q, f, dq, df| {
        let (v, i) = (x[0], x[1]);
        let g = (20.0_f64.ln() + (1e-6_f64.ln() - 20.0_f64.ln()) * (t * 1e6).min(1.0)).exp();
        let (nvt, is) = (0.0466, 1e-9);
        let e = ((v - 24.0) / nvt).exp();
        q.copy_from_slice(&[0.0, 0.5 * i]);
        f.copy_from_slice(&[g * v + is * (e - 1.0) - i, v + 48.0 * i - 24.0]);
        dq.copy_from_slice(&[0.0, 0.0, 0.0, 0.5]);
        df.copy_from_slice(&[g + is / nvt * e, -1.0, 1.0, 48.0]);
    });
    // From below the knee at 0.8 V the voltage goes no farther than the logarithm of what was asked for.
    valve.limit = |x, dx| {
        let (from, to, nvt) = (x[0] - 24.0, x[0] - 24.0 + dx[0], 0.0466);
        if to <= 0.8 || dx[0].abs() <= 2.0 * nvt {
            return false;
        }
        let share = 1.0 + dx[0] / nvt;
        dx[0] = if from > 0.0 && share > 0.0 {
            nvt * share.ln()
        } else {
            0.8 - from
        };
        true
    };
    valve
}

#[test]
fn a_junction_without_capacitance_is_followed_at_loose_and_fine_tolerances() {
    // i' L = -R i - vd with vd = n Vt ln(1 + i/Is) is nearly i = (I + V/R) exp(-t R/L) - V/R with V between 0.8 and
    // 0.94 V: the current of 0.5 A has fallen to 10 mA between 32 and 36 ms.
    for method in METHODS {
        let mut falls = Vec::new();
        for (absolute, relative) in [
            ([1e-3, 1e-5], 1e-2),
            ([1e-3, 1e-5], 1e-3),
            ([2e-5, 2e-7], 0.0),
        ] {
            let tolerances = Tolerances {
                absolute: absolute.to_vec(),
                relative,
                memory: 0.0,
            };
            let state = State {
                time: 0.0,
                x: vec![0.5 / 20.0, 0.5],
                mode: vec![],
            };
            let (mut highest, mut fall) = (0.0_f64, f64::NAN);
            let mut march = March::new(method, state);
            let ending = march.run(&valve(), Span::new(50e-3, &tolerances), &mut |advance| {
                if let Advance::Step(step) = advance {
                    highest = highest.max(step.x1[0]);
                    if step.x0[1] > 10e-3 && step.x1[1] <= 10e-3 {
                        // At loose tolerances a step may be longer than the window: ask the polynomial.
                        let (mut low, mut high) = (step.from, step.to);
                        for _ in 0..50 {
                            fall = 0.5 * (low + high);
                            if step.one_at(fall, 1).0 > 10e-3 {
                                low = fall;
                            } else {
                                high = fall;
                            }
                        }
                    }
                }
                ControlFlow::Continue(())
            });
            assert!(
                ending.is_ok(),
                "{} at {relative:e}: {ending:?}",
                method.name
            );
            assert!(
                (24.8..25.2).contains(&highest),
                "{} at {relative:e}: {highest} V",
                method.name
            );
            falls.push(fall);
        }
        assert!(
            falls.iter().all(|fall| (30e-3..38e-3).contains(fall)),
            "{}: {falls:?}",
            method.name
        );
    }
}
