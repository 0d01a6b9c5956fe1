//! Operating points and consistent starts against hand-solved circuits.

use super::problems::Written;
use crate::dae::{System, Tolerances, Trouble, consistent_start, operating_point};

/// A source of 5 V, 1 kohm and a string of two junctions (1e-14 A, 25 mV) to ground; unknowns: both nodes of it.
fn string_of_junctions() -> impl System {
    Written::new(2, |_, x, q, f, dq, df| {
        let diode = |v: f64| {
            (
                1e-14 * (v / 0.025).exp_m1(),
                1e-14 / 0.025 * (v / 0.025).exp(),
            )
        };
        let (upper, upper_slope) = diode(x[0] - x[1]);
        let (lower, lower_slope) = diode(x[1]);
        q.fill(0.0);
        dq.fill(0.0);
        f.copy_from_slice(&[(x[0] - 5.0) / 1e3 + upper, lower - upper]);
        df.copy_from_slice(&[
            1e-3 + upper_slope,
            -upper_slope,
            -upper_slope,
            upper_slope + lower_slope,
        ]);
    })
}

#[test]
fn junctions_come_into_conduction_from_a_cold_guess_without_limiting() {
    let system = string_of_junctions();
    let tolerances = Tolerances::absolute(vec![1e-9; 2]);
    let mut x = vec![0.0; 2];
    operating_point(&system, 0.0, &[], &mut x, &tolerances, &[0, 1]).unwrap();
    assert!((x[0] - 2.0 * x[1]).abs() < 1e-8, "{x:?}");
    let current = 1e-14 * (x[1] / 0.025).exp_m1();
    assert!(((5.0 - x[0]) / 1e3 - current).abs() < 1e-9, "{x:?}");
}

#[test]
fn a_node_that_only_capacitors_hold_rests_at_its_charge() {
    // 1 nF from a 10 V node to x1, 3 nF from x1 to ground, no charge on x1 in sum: x1 rests at 2.5 V.
    let system = Written::new(2, |_, x, q, f, dq, df| {
        q.copy_from_slice(&[0.0, 1e-9 * (x[1] - x[0]) + 3e-9 * x[1]]);
        f.copy_from_slice(&[x[0] - 10.0, 0.0]);
        dq.copy_from_slice(&[0.0, 0.0, -1e-9, 4e-9]);
        df.copy_from_slice(&[1.0, 0.0, 0.0, 0.0]);
    });
    let tolerances = Tolerances::absolute(vec![1e-9; 2]);
    let mut x = vec![0.0; 2];
    operating_point(&system, 0.0, &[], &mut x, &tolerances, &[]).unwrap();
    assert!(
        (x[0] - 10.0).abs() < 1e-9 && (x[1] - 2.5).abs() < 1e-6,
        "{x:?}"
    );
}

#[test]
fn no_operating_point_is_an_error_that_names_an_unknown() {
    // x^2 + 1 = 0 has none.
    let system = Written::new(1, |_, x, q, f, dq, df| {
        q[0] = x[0];
        dq[0] = 1.0;
        f[0] = x[0] * x[0] + 1.0;
        df[0] = 2.0 * x[0];
    });
    let tolerances = Tolerances::absolute(vec![1e-9]);
    let error = operating_point(&system, 0.0, &[], &mut [0.3], &tolerances, &[0]).unwrap_err();
    assert_eq!(error.unknown, Some(0));
    assert!(
        matches!(error.cause, Trouble::Unsettled | Trouble::NotFinite),
        "{:?}",
        error.cause
    );
}

#[test]
fn a_consistent_start_keeps_charges_and_solves_the_rest() {
    // 1 uF at 3 V behind 10 ohm to a source of 5 V: the node in between floats to 5 V less what 0.2 A drops.
    let system = Written::new(3, |_, x, q, f, dq, df| {
        q.copy_from_slice(&[1e-6 * x[0], 0.0, 0.0]);
        dq.copy_from_slice(&[1e-6, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0]);
        f.copy_from_slice(&[
            (x[0] - x[1]) / 10.0,
            (x[1] - x[0]) / 10.0 + x[2],
            x[1] - 5.0,
        ]);
        df.copy_from_slice(&[0.1, -0.1, 0.0, -0.1, 0.1, 1.0, 0.0, 1.0, 0.0]);
    });
    let tolerances = Tolerances::absolute(vec![1e-9; 3]);
    let mut x = vec![0.0; 3];
    consistent_start(&system, 0.0, &[], &[3e-6, 0.0, 0.0], &mut x, &tolerances).unwrap();
    assert!(
        (x[0] - 3.0).abs() < 1e-8 && (x[1] - 5.0).abs() < 1e-9 && (x[2] + 0.2).abs() < 1e-8,
        "{x:?}"
    );
}

#[test]
fn a_system_without_unknowns_marches() {
    use crate::dae::{METHODS, March, Span, State};
    let system = Written::new(0, |_, _, _, _, _, _| {});
    let tolerances = Tolerances::absolute(vec![]);
    for method in METHODS {
        let mut march = March::new(method, State::default());
        march
            .run(&system, Span::new(1.0, &tolerances), &mut |_| {
                std::ops::ControlFlow::Continue(())
            })
            .unwrap();
        assert_eq!(march.state.time, 1.0);
    }
}
