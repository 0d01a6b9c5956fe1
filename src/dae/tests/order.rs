//! The order of every method, measured with equal steps: differential, algebraic and index-2 unknowns apart.

use super::problems::{SMOOTH, Smooth};
use crate::dae::methods::{Attempt, Stepper, Trial};
use crate::dae::{METHODS, Method, Point, Statistics};
use crate::math::Elimination;

/// Largest error of each unknown from time 0 to 1 with equal steps: at their ends, and on the dense output.
struct Errors {
    ends: Vec<f64>,
    dense: Vec<f64>,
}

fn equal_steps(method: &Method, problem: &Smooth, steps: usize) -> Errors {
    let system = (problem.system)();
    let n = problem.unknowns.len();
    // Newton's iteration is carried to a few roundings of the unknowns, which are all about 1.
    let weights = vec![3e12; n];
    let mut stepper = Stepper::new(method, &*system, Elimination::Automatic);
    let mut x = (problem.solution)(0.0);
    let mut errors = Errors {
        ends: vec![0.0; n],
        dense: vec![0.0; n],
    };
    let mut here = vec![0.0; n];
    let length = 1.0 / steps as f64;
    for step in 0..steps {
        let time = step as f64 * length;
        let trial = Trial {
            from: Point {
                time,
                x: &x,
                mode: &[],
            },
            length,
            weights: &weights,
        };
        if let Attempt::Stalled { unknown, cause } =
            stepper.attempt(&*system, trial, &mut Statistics::default())
        {
            panic!(
                "{} on {}, step {step}: {unknown} {cause}",
                method.name, problem.name
            );
        }
        stepper.lay();
        for share in [0.1, 0.3, 0.5, 0.7, 0.9, 1.0] {
            stepper.dense().at(share, &mut here);
            let truth = (problem.solution)(time + share * length);
            for unknown in 0..n {
                let error = (here[unknown] - truth[unknown]).abs();
                errors.dense[unknown] = errors.dense[unknown].max(error);
                if share == 1.0 {
                    errors.ends[unknown] = errors.ends[unknown].max(error);
                }
            }
        }
        x.copy_from_slice(stepper.end());
        stepper.keep();
    }
    errors
}

/// Order expected of an unknown of this index (0: differential): at the ends, and on the dense output.
///
/// Radau IIA with s stages: 2 s - 1 for differential and algebraic unknowns, s for those of index 2; its polynomial has
/// degree s (Hairer & Wanner II, theorems IV.5.8, VI.1.1, VII.4.9, from memory). TR-BDF2: 2, and 2 for index 2.
fn expected(method: &Method, index: u32) -> (f64, f64) {
    match (method.name, index) {
        ("radau_iia_9", 2) => (5.0, 5.0),
        ("radau_iia_9", _) => (9.0, 6.0),
        ("radau_iia" | "graded_radau", 2) => (3.0, 3.0),
        ("radau_iia" | "graded_radau", _) => (5.0, 4.0),
        ("tr_bdf2", 2) => (2.0, 2.0),
        ("tr_bdf2", _) => (2.0, 2.0),
        ("esdirk4", 2) => (2.0, 2.0),
        ("esdirk4", _) => (4.0, 4.0),
        (name, _) => panic!("what is the order of {name}?"),
    }
}

#[test]
fn every_method_meets_its_order_on_every_smooth_problem() {
    for method in METHODS {
        for problem in SMOOTH {
            // Before rounding is met, a high order is seen only near its limit of short steps.
            let allowed = if method.order > 5 { 0.5 } else { 0.25 };
            // Few steps for the values of a high order (soon they are exact to rounding), more for its polynomial.
            let [few, more] = if method.order > 5 { [4, 8] } else { [16, 16] };
            let ends = [few, 2 * few].map(|steps| equal_steps(method, problem, steps).ends);
            let dense = [more, 2 * more].map(|steps| equal_steps(method, problem, steps).dense);
            for (unknown, &(name, index)) in problem.unknowns.iter().enumerate() {
                let (at_ends, between) = expected(method, index);
                for (place, order, errors) in
                    [("ends", at_ends, &ends), ("dense output", between, &dense)]
                {
                    let (before, after) = (errors[0][unknown], errors[1][unknown]);
                    let measured = (before / after).log2();
                    assert!(
                        measured > order - allowed || after < 1e-12,
                        "{} on {}, {name} ({place}): {measured:.2} for {order}, error {after:e}",
                        method.name,
                        problem.name
                    );
                }
            }
        }
    }
}
