//! `accuracy` is the error of every waveform over the whole run, relative to its largest swing: what is asked is reached
//! within a factor 10, also after thousands of periods and after thousands of switching edges.

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
