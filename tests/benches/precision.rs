//! Work and error of every method over accuracies, on problems with known solutions and the four circuits.
//!
//! `cargo bench --bench precision` prints the table; `-- METHOD PROBLEM ACCURACY` marches one of them (names may be
//! shortened), to be counted by an instruction counter. Figures and what they say are in `tests/benches/README.md`.

#[path = "../circuits/mod.rs"]
mod circuits;

use circuits::cases::CASES;
use circuits::problems::PROBLEMS;
use coilbreak::dae::{METHODS, Method, Statistics};
use std::time::Instant;

/// Accuracies asked of the whole run.
const ACCURACIES: [f64; 7] = [1e-2, 1e-3, 1e-4, 1e-5, 1e-6, 1e-7, 1e-8];

/// One march: error over swing, and work.
type Marched = Option<(f64, Statistics)>;
type Kind = (&'static str, Box<dyn Fn(&'static Method, f64) -> Marched>);

fn kinds() -> Vec<Kind> {
    let mut kinds: Vec<Kind> = Vec::new();
    for problem in PROBLEMS {
        kinds.push((
            problem.name,
            Box::new(|method, accuracy| {
                let reached = problem.run(method, accuracy).ok()?;
                Some((reached.error, reached.counted))
            }),
        ));
    }
    for case in CASES {
        kinds.push((
            case.name,
            Box::new(|method, accuracy| {
                let outcome = (case.run)(method, accuracy).ok()?;
                let waveforms = outcome.quantities.iter().filter(|q| q.name != "t_peak");
                let error = waveforms.map(|q| q.error()).fold(0.0, f64::max);
                Some((error, outcome.counted))
            }),
        ));
    }
    kinds
}

fn main() {
    let words: Vec<String> = std::env::args()
        .skip(1)
        .filter(|word| word != "--bench")
        .collect();
    let begins =
        |name: &str, word: Option<&String>| word.is_none_or(|word| name.starts_with(word.as_str()));
    let accuracies = words
        .get(2)
        .and_then(|word| word.parse().ok())
        .map_or(ACCURACIES.to_vec(), |accuracy| vec![accuracy]);
    for (name, march) in kinds() {
        if !begins(name, words.get(1)) {
            continue;
        }
        println!("\n{name}");
        println!(
            "{:12} {:>7} {:>9} {:>8} {:>6} {:>8} {:>8} {:>8} {:>9}",
            "method", "asked", "error", "steps", "lost", "factors", "solves", "evals", "time_us"
        );
        for method in METHODS {
            if words.first().is_some_and(|word| method.name != *word) {
                continue;
            }
            for &accuracy in &accuracies {
                let begun = Instant::now();
                let Some((error, counted)) = march(method, accuracy) else {
                    println!("{:12} {accuracy:>7.0e} gave up", method.name);
                    continue;
                };
                let time = begun.elapsed().as_secs_f64() * 1e6;
                println!(
                    "{:12} {accuracy:>7.0e} {error:>9.1e} {:>8} {:>6} {:>8} {:>8} {:>8} {time:>9.0}",
                    method.name,
                    counted.accepted,
                    counted.rejected,
                    counted.factorizations,
                    counted.solves,
                    counted.evaluations,
                );
            }
        }
    }
}
