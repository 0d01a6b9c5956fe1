//! The order of every method, measured with equal steps: differential, algebraic and index-2 unknowns apart.

use super::problems::Written;
use crate::dae::methods::{Attempt, Stepper, Trial};
use crate::dae::{METHODS, Method, Point, Statistics, System};
use crate::math::Elimination;

/// Values at time 1 after `steps` equal steps; Newton's iteration is carried to rounding.
fn equal_steps(method: &Method, system: &dyn System, start: &[f64], steps: usize) -> Vec<f64> {
    let weights = vec![1e11; start.len()];
    let mut stepper = Stepper::new(method, system, Elimination::Automatic);
    let mut x = start.to_vec();
    let length = 1.0 / steps as f64;
    for step in 0..steps {
        let from = Point {
            time: step as f64 * length,
            x: &x,
            mode: &[],
        };
        let trial = Trial {
            from,
            length,
            weights: &weights,
        };
        match stepper.attempt(system, trial, &mut Statistics::default()) {
            Attempt::Solved { .. } => {}
            Attempt::Stalled { unknown, cause } => {
                panic!("{} at step {step}: {unknown} {cause}", method.name)
            }
        }
        x.copy_from_slice(stepper.end());
        stepper.lay();
        stepper.keep();
    }
    x
}

/// A pendulum-like pair with an algebraic companion: u' = v, v' = -sin u + cos(3 t) w, 0 = w - exp(-u v).
fn coupled() -> impl System {
    Written::new(3, |t, x, q, f, dq, df| {
        let (u, v, w) = (x[0], x[1], x[2]);
        let drive = (3.0 * t).cos();
        q.copy_from_slice(&[u, v, 0.0]);
        f.copy_from_slice(&[-v, u.sin() - drive * w, w - (-u * v).exp()]);
        dq.copy_from_slice(&[1.0, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, 0.0]);
        let e = (-u * v).exp();
        df.copy_from_slice(&[0.0, -1.0, 0.0, u.cos(), 0.0, -drive, v * e, u * e, 1.0]);
    })
}

#[test]
fn every_method_meets_its_order_in_differential_and_algebraic_unknowns() {
    let start = [0.5, 0.8, (-0.4_f64).exp()];
    for method in METHODS {
        let system = coupled();
        let truth = equal_steps(&METHODS[0], &system, &start, 4096);
        let coarse = equal_steps(method, &system, &start, 16);
        let fine = equal_steps(method, &system, &start, 32);
        for unknown in 0..3 {
            let ratio = (coarse[unknown] - truth[unknown]) / (fine[unknown] - truth[unknown]);
            let order = ratio.abs().log2();
            assert!(
                order > f64::from(method.order) - 0.3,
                "{} unknown {unknown}: {order:.2}",
                method.name
            );
        }
    }
}
