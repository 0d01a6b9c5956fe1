//! Cost of lines of 100 to 100 000 sections: factorisation, solution, and whole steps of the march.
//!
//! `cargo bench --bench ladder` prints the times; at the end the growth between the lengths is measured once more
//! and must stay below n^1.15 (the work is counted linear by the tests; this is about caches and allocations).

#[path = "../circuits/mod.rs"]
mod circuits;

use circuits::ladder::Ladder;
use coilbreak::dae::{Evaluation, METHODS, March, Method, Point, Span, State, System, Tolerances};
use coilbreak::math::{Elimination, Matrix, Scalar};
use criterion::{BenchmarkId, Criterion, Throughput, criterion_group};
use num_complex::Complex64;
use std::hint::black_box;
use std::ops::ControlFlow;
use std::time::Instant;

const SECTIONS: [usize; 4] = [100, 1000, 10_000, 100_000];
/// Largest exponent of growth.
const GROWTH: f64 = 1.15;
/// Length of the measured march [s].
const MARCHED: f64 = 0.4e-6;

/// The matrix (rate dq + df) of a line, factored.
fn matrix<T: Scalar>(ladder: &Ladder, rate: T, elimination: Elimination) -> Matrix<T> {
    let (n, slots) = (ladder.size(), ladder.pattern().len());
    let mut out = Evaluation {
        f: vec![0.0; n],
        q: vec![0.0; n],
        df: vec![0.0; slots],
        dq: vec![0.0; slots],
    };
    let x = vec![0.0; n];
    ladder.evaluate(
        Point {
            time: 0.0,
            x: &x,
            mode: &[1.0],
        },
        true,
        &mut out,
    );
    let pattern = ladder.pattern();
    let mut matrix = Matrix::new(n, &pattern.starts, &pattern.rows, elimination);
    for (value, (dq, df)) in matrix
        .values_mut()
        .iter_mut()
        .zip(out.dq.iter().zip(&out.df))
    {
        *value = rate * T::from_real(*dq) + T::from_real(*df);
    }
    matrix.factor().expect("the line's matrix is regular");
    matrix
}

/// Marches from rest; returns the number of steps tried.
fn march(ladder: &Ladder, march: &mut March, tolerances: &Tolerances) -> u64 {
    march.state = State {
        time: 0.0,
        x: vec![0.0; ladder.size()],
        mode: vec![1.0],
    };
    let before = march.counted.accepted + march.counted.rejected;
    march
        .run(ladder, Span::new(MARCHED, tolerances), &mut |_| {
            ControlFlow::Continue(())
        })
        .expect("the line is smooth");
    march.counted.accepted + march.counted.rejected - before
}

fn tolerances(ladder: &Ladder) -> Tolerances {
    Tolerances::absolute(vec![1e-5; ladder.size()])
}

fn algebra(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("ladder_algebra");
    group.sample_size(20);
    for sections in SECTIONS {
        let ladder = Ladder::new(sections);
        group.throughput(Throughput::Elements(sections as u64));
        let mut real = matrix(&ladder, 1e8, Elimination::Sparse);
        let mut pair = matrix(&ladder, Complex64::new(1e8, 1e8), Elimination::Sparse);
        let mut x = vec![1.0; ladder.size()];
        let mut z = vec![Complex64::new(1.0, 1.0); ladder.size()];
        let id = |name: &str| BenchmarkId::new(name, sections);
        group.bench_function(id("order_and_factor"), |b| {
            b.iter(|| matrix(black_box(&ladder), 1e8, Elimination::Sparse))
        });
        group.bench_function(id("factor_real"), |b| b.iter(|| real.factor()));
        group.bench_function(id("factor_complex"), |b| b.iter(|| pair.factor()));
        group.bench_function(id("solve_real"), |b| {
            b.iter(|| real.solve(black_box(&mut x)))
        });
        group.bench_function(id("solve_complex"), |b| {
            b.iter(|| pair.solve(black_box(&mut z)))
        });
    }
    group.finish();
}

/// Dense against sparse where circuits are small: the ground of the choice in `math::matrix`.
fn small(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("small");
    for sections in [1, 4, 10, 20] {
        let ladder = Ladder::new(sections);
        let mut x = vec![1.0; ladder.size()];
        for elimination in [Elimination::Dense, Elimination::Sparse] {
            let mut real = matrix(&ladder, 1e8, elimination);
            let id =
                |name: &str| BenchmarkId::new(format!("{name}_{elimination:?}"), ladder.size());
            group.bench_function(id("factor"), |b| b.iter(|| real.factor()));
            group.bench_function(id("solve"), |b| b.iter(|| real.solve(black_box(&mut x))));
        }
    }
    group.finish();
}

fn steps(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("ladder_march");
    group.sample_size(10);
    for method in METHODS {
        for sections in SECTIONS {
            let ladder = Ladder::new(sections);
            let tolerances = tolerances(&ladder);
            let mut whole = March::new(method, State::default());
            let tried = march(&ladder, &mut whole, &tolerances);
            // Elements: steps times sections, so that the rate printed is comparable between lengths.
            group.throughput(Throughput::Elements(tried * sections as u64));
            group.bench_function(BenchmarkId::new(method.name, sections), |b| {
                b.iter(|| march(&ladder, &mut whole, &tolerances));
            });
        }
    }
    group.finish();
}

/// Seconds of the quickest of some calls.
fn quickest(mut call: impl FnMut()) -> f64 {
    let time = |call: &mut dyn FnMut()| {
        let start = Instant::now();
        call();
        start.elapsed().as_secs_f64()
    };
    (0..7)
        .map(|_| time(&mut call))
        .fold(f64::INFINITY, f64::min)
}

/// Times of one length: factorisation, solution, one step.
fn times(method: &'static Method, sections: usize) -> [f64; 3] {
    let ladder = Ladder::new(sections);
    let mut real = matrix(&ladder, 1e8, Elimination::Sparse);
    let mut x = vec![1.0; ladder.size()];
    let repeats = 200_000 / sections;
    let factor = quickest(|| (0..repeats).for_each(|_| real.factor().expect("regular")));
    let solve = quickest(|| (0..repeats).for_each(|_| real.solve(&mut x)));
    let tolerances = tolerances(&ladder);
    let mut whole = March::new(method, State::default());
    let tried = march(&ladder, &mut whole, &tolerances);
    let step = quickest(|| {
        march(&ladder, &mut whole, &tolerances);
    });
    [
        factor / repeats as f64,
        solve / repeats as f64,
        step / tried as f64,
    ]
}

fn growth() {
    for method in METHODS {
        let (first, last) = (SECTIONS[0], SECTIONS[SECTIONS.len() - 1]);
        let (small, large) = (times(method, first), times(method, last));
        for (name, k) in [("factorisation", 0), ("solution", 1), ("step", 2)] {
            let exponent = (large[k] / small[k]).ln() / (last as f64 / first as f64).ln();
            println!(
                "{} {name}: {:.1} ns a section at {first}, {:.1} ns at {last}: n^{exponent:.3}",
                method.name,
                small[k] * 1e9 / first as f64,
                large[k] * 1e9 / last as f64
            );
            assert!(exponent <= GROWTH, "{name} grows as n^{exponent:.3}");
        }
    }
}

criterion_group! {
    name = benches;
    // Plots would need fonts that a bare machine does not have.
    config = Criterion::default().without_plots();
    targets = small, algebra, steps
}

fn main() {
    benches();
    growth();
}
