//! Whole runs: the relay from text to outcome, the peers' four cases, and the cost of a step over the number of nodes.
//!
//! `cargo bench --bench runs`. Figures and what they say are in `tests/benches/README.md`.

use coilbreak::analysis::{Analysis, Settings, Simulation, Wish};
use coilbreak::netlist::Input;
use coilbreak::run::{Netlist, method, read, run};
use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use std::fmt::Write as _;
use std::hint::black_box;
use std::ops::ControlFlow;
use std::path::Path;

fn input(path: &str) -> Input {
    Input::File(Path::new(env!("CARGO_MANIFEST_DIR")).join(path))
}

fn netlist(input: &Input) -> Netlist {
    read(input, &[]).unwrap_or_else(|_| panic!("the benchmark's netlist is sound"))
}

fn go_on(_: f64, _: f64) -> ControlFlow<()> {
    ControlFlow::Continue(())
}

/// The shipped relay netlist: reading, and the run with readings, ratings, ledger and waveforms.
fn relay(criterion: &mut Criterion) {
    let file = input("netlists/relay_diode.yaml");
    let mut group = criterion.benchmark_group("relay");
    group.bench_function("read", |bench| bench.iter(|| netlist(black_box(&file))));
    let relay = netlist(&file);
    group.bench_function("run", |bench| {
        bench.iter(|| {
            run(black_box(&relay), &mut go_on)
                .map(|outcome| outcome.reached)
                .unwrap_or(f64::NAN)
        });
    });
    group.finish();
}

/// The simulation alone: start, pilot and run with nobody watching. Returns the steps of the run.
fn simulate(netlist: &Netlist, accuracy: f64) -> u64 {
    let Analysis::Transient(transient) = &netlist.analysis else {
        panic!("the benchmark's netlist is a transient")
    };
    let values = netlist.circuit.values();
    let settings = Settings::new(values[transient.duration], accuracy, transient.start);
    let simulation = Simulation {
        circuit: &netlist.circuit,
        settings,
        method: method(),
        warm: None,
    };
    let wishes = netlist
        .readings
        .iter()
        .map(|reading| Wish {
            window: reading.window(values),
            unknowns: Vec::new(),
        })
        .collect();
    let scales = simulation.pilot(wishes).expect("the pilot runs");
    let (counted, _) = simulation
        .run_scaled(&scales, &mut |_, _, _| ControlFlow::Continue(()))
        .expect("the simulation runs");
    counted.accepted
}

/// The peers' cases, each with the loosest accuracy that keeps every quantity within 1e-3 there and at all tighter ones
/// tried, and within 1e-5.
const CASES: [(&str, [f64; 2]); 4] = [
    ("r1", [1e-2, 1e-4]),
    ("r2", [1e-3, 7e-6]),
    ("r3", [5e-3, 3e-5]),
    ("b", [3e-2, 3e-4]),
];

fn cases(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("cases");
    group.sample_size(10);
    for (case, accuracies) in CASES {
        let netlist = netlist(&input(&format!("tests/netlists/peers/{case}.yaml")));
        for accuracy in accuracies {
            group.bench_function(BenchmarkId::new(case, format!("{accuracy:e}")), |bench| {
                bench.iter(|| simulate(black_box(&netlist), accuracy));
            });
        }
    }
    group.finish();
}

/// A chain of diodes and capacitors on a sine: every node nonlinear, every step alike.
fn chain(nodes: usize) -> String {
    let mut text = String::from(
        "elements:
  source: {kind: voltage_source, nodes: [n0, ground], voltage: {sine: {amplitude: 10 V, frequency: 1 kHz}}}
",
    );
    for k in 1..nodes {
        let before = k - 1;
        let _ = writeln!(
            text,
            "  r{k}: {{kind: resistor, nodes: [n{before}, n{k}], resistance: 100 Ω}}
  d{k}: {{kind: diode, anode: n{k}, cathode: ground, saturation_current: 1 nA, ideality_factor: 1.8, junction_capacitance: 1 nF}}"
        );
    }
    text + "analysis: {transient: {duration: 5 ms, start: zero}}\n"
}

fn nodes(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("step");
    group.sample_size(10);
    for count in [5, 20, 60] {
        let netlist = netlist(&Input::Text {
            name: "chain".into(),
            bytes: chain(count).into(),
            folder: None,
        });
        group.throughput(Throughput::Elements(simulate(&netlist, 1e-4)));
        group.bench_function(BenchmarkId::new("nodes", count), |bench| {
            bench.iter(|| simulate(black_box(&netlist), 1e-4));
        });
    }
    group.finish();
}

/// What an armature with its contact costs beside the same coil without one.
fn armature(criterion: &mut Criterion) {
    let path = "tests/netlists/relay_by_solver.yaml";
    let relay = netlist(&input(path));
    let text = "
materials:
  relay_iron: {initial_permeability: 3000, saturation: 1.5 T}
cores:
  k1_core: {shape: effective, length: 60 mm, area: 50 mm², gap: 0.05 mm, material: relay_iron}
elements:
  supply: {kind: voltage_source, nodes: [drive, ground], voltage: {steps: {at: [[0 s, 0 V], [5 ms, 24 V], [60 ms, 0 V]]}}}
  k1: {kind: coil, nodes: [drive, ground], core: k1_core, turns: 4000, resistance: 400 Ω, self_capacitance: 0 F}
analysis: {transient: {duration: 120 ms}}
";
    let coil = netlist(&Input::Text {
        name: "coil".into(),
        bytes: text.into(),
        folder: None,
    });
    let mut group = criterion.benchmark_group("armature");
    for (name, netlist) in [("coil", &coil), ("relay", &relay)] {
        group.bench_function(name, |bench| {
            bench.iter(|| simulate(black_box(netlist), 1e-4))
        });
    }
    group.finish();
}

criterion_group!(benches, relay, cases, nodes, armature);
criterion_main!(benches);
