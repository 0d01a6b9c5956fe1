//! `accuracy` is the error of every waveform over the whole run, relative to its largest swing: what is asked is reached
//! within a factor 10, also after thousands of periods and after thousands of switching edges.

use super::circuits::measure::{extremes, passes};
use super::circuits::problems::{PROBLEMS, Problem};
use crate::record::{Bound, check};
use coilbreak::dae::METHODS;

const ASKED: [f64; 7] = [1e-2, 1e-3, 1e-4, 1e-5, 1e-6, 1e-7, 1e-8];

fn error(problem: &Problem, accuracy: f64) -> f64 {
    match problem.run(&METHODS[0], accuracy) {
        Ok(reached) => reached.error,
        Err(error) => panic!("{} at {accuracy:e}: {error}", problem.name),
    }
}

#[test]
fn every_waveform_is_within_ten_times_the_accuracy_asked_over_the_whole_run() {
    for problem in PROBLEMS {
        for accuracy in ASKED {
            let reached = error(problem, accuracy) / accuracy;
            check(
                problem.name,
                problem.source,
                reached,
                0.0,
                Bound::Absolute(10.0),
            );
        }
    }
}

#[test]
fn the_published_values_are_met_to_eight_digits() {
    for problem in PROBLEMS.iter().filter(|problem| problem.is_published()) {
        check(
            problem.name,
            problem.source,
            error(problem, 1e-8),
            0.0,
            Bound::Absolute(1e-8),
        );
    }
}

#[test]
fn peaks_and_passages_between_steps_are_located_to_the_accuracy_asked() {
    // v = V e^(-a t) (cos w t + a/w sin w t) and i = V C w0²/w e^(-a t) sin w t with a = R/2L, w² = 1/LC - a²: the current
    // passes zero and the voltage peaks at every multiple of pi/w. An error of the current of `accuracy` times its swing,
    // divided by its slope there, is an error of the instant.
    let ring = &PROBLEMS[0];
    let (a, w0) = (500.0, 1e6_f64);
    let w = (w0 * w0 - a * a).sqrt();
    let source = "closed form of the damped oscillation";
    // At 1e-2 a step may be longer than half a period and hold two passages.
    for accuracy in &ASKED[1..] {
        let accuracy = *accuracy;
        let (mut passed, mut peaked) = (0.0, 0.0);
        ring.march(&METHODS[0], accuracy, &mut |step| {
            let length = step.to - step.from;
            if step.x0[1] * step.x1[1] < 0.0 {
                passed += 1.0;
                let time = step.from + length * passes(step, 1, 0.0);
                let bound = 10.0 * accuracy * 2.0 / w;
                let truth = passed * std::f64::consts::PI / w;
                check(
                    "passage of a ring's current",
                    source,
                    time,
                    truth,
                    Bound::Absolute(bound),
                );
            }
            for (value, share) in extremes(step, 0) {
                // The start is a peak too, and is given.
                let later = step.from + share * length > 1e-6;
                if later && share > 0.0 && share < 1.0 {
                    peaked += 1.0;
                    let truth = 10.0 * (-a * peaked * std::f64::consts::PI / w).exp();
                    let bound = Bound::Absolute(10.0 * accuracy * 20.0);
                    check(
                        "peak of a ring's voltage",
                        source,
                        value.abs(),
                        truth,
                        bound,
                    );
                }
            }
        })
        .unwrap();
        assert!(
            passed >= 39.0 && peaked >= 38.0,
            "{accuracy:e}: {passed} passages, {peaked} peaks"
        );
    }
}
