//! Eliminations side by side on the matrices that circuits make: first factorisation, refactorisation, solution.
//!
//! `cargo run --release --manifest-path tests/benches/candidates/Cargo.toml`; lines of many sections only with
//! `-- SECTIONS...`, grids with `-- grid SIDE`. A time is the quickest of many samples of about 0.2 ms: other work on
//! the machine only ever adds. Refactorisation goes round the matrices of a whole run. Errors are backward errors by
//! component, |A x - b|/(|A| |x| + |b|), the worst of the run.

mod kernels;
mod matrices;

use coilbreak::math::{Elimination, Scalar};
use kernels::{Faer, Kernel, Nalgebra, Own};
use matrices::Set;
use std::hint::black_box;
use std::time::Instant;

/// Seconds of the quickest of many calls.
fn quickest(mut call: impl FnMut()) -> f64 {
    let mut time = |calls: usize| {
        let start = Instant::now();
        (0..calls).for_each(|_| call());
        start.elapsed().as_secs_f64() / calls as f64
    };
    let calls = ((2e-4 / time(1)) as usize).clamp(1, 100_000);
    let begin = Instant::now();
    let mut best = f64::INFINITY;
    for sample in 0..300 {
        if sample >= 5 && begin.elapsed().as_secs_f64() > 0.25 {
            break;
        }
        best = best.min(time(calls));
    }
    best
}

fn words(seconds: f64) -> String {
    match seconds {
        s if s < 1e-6 => format!("{:.0} ns", s * 1e9),
        s if s < 1e-3 => format!("{:.2} us", s * 1e6),
        s => format!("{:.2} ms", s * 1e3),
    }
}

fn measure<T: Scalar>(set: &Set<T>, name: &str, make: impl Fn() -> Box<dyn Kernel<T>>) {
    let first = quickest(|| {
        let mut kernel = make();
        kernel.factor(&set.values[0]);
        black_box(kernel.filled());
    });
    let mut kernel = make();
    let mut round = set.values.iter().cycle();
    let factor = quickest(|| kernel.factor(round.next().expect("a set has values")));
    let mut x = vec![T::ONE; set.size];
    let solve = quickest(|| {
        x.fill(T::ONE);
        kernel.solve(black_box(&mut x));
    });
    let mut fresh = make();
    let mut worst = 0.0_f64;
    for values in &set.values {
        fresh.factor(values);
        x.fill(T::ONE);
        fresh.solve(&mut x);
        worst = worst.max(set.error(values, &x));
    }
    let filled = fresh
        .filled()
        .map_or(String::new(), |filled| format!(" filled {filled}"));
    println!(
        "{:<28}{:>7}{:>8}  {name:<9}{:>11}{:>11}{:>11}  error {worst:.0e}{filled}",
        set.name,
        set.size,
        set.rows.len(),
        words(first),
        words(factor),
        words(solve),
    );
}

fn all<T>(set: &Set<T>)
where
    T: Scalar + faer::traits::ComplexField + nalgebra::ComplexField,
{
    measure(set, "sparse", || {
        Box::new(Own::new(set, Elimination::Sparse))
    });
    measure(set, "faer", || Box::new(Faer::new(set)));
    if set.size <= 300 {
        measure(set, "dense", || Box::new(Own::new(set, Elimination::Dense)));
        measure(set, "nalgebra", || Box::new(Nalgebra::new(set)));
    }
}

fn main() {
    println!(
        "{:<28}{:>7}{:>8}  {:<9}{:>11}{:>11}{:>11}",
        "matrix", "size", "entries", "by", "first", "again", "solution"
    );
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    if let [word, side] = arguments.as_slice()
        && word == "grid"
    {
        let set = matrices::grid(side.parse().expect("a number of nodes along a side"));
        println!(
            "{}: {} entries filled in the order of approximate minimum degree",
            set.name,
            kernels::minimum_degree(&set)
        );
        return all(&set);
    }
    let netlists = if arguments.is_empty() {
        let files = ["relay_diode", "buck_telemetry", "valve_on_cable"];
        files
            .map(|name| (name.to_owned(), matrices::shipped(name)))
            .to_vec()
    } else {
        let sections = arguments
            .iter()
            .map(|sections| sections.parse().expect("a number of sections"));
        sections
            .map(|n: usize| (format!("line of {n}"), matrices::line(n)))
            .collect()
    };
    for (name, text) in &netlists {
        let run = matrices::run(name, text);
        all(&run.real());
        all(&run.complex());
        all(&run.coupled());
    }
}
