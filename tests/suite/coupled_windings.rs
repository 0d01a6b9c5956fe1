//! Guards: windings that share legs follow the closed forms of linear ones, keep the reciprocity of saturated ones, and
//! leak as they were told.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use std::fmt::Write;

const MU0: f64 = 4e-7 * std::f64::consts::PI;

/// Three legs between two nodes, a winding on each, fed by current sources; readings at rest.
fn three_legs(material: &str, currents: [f64; 3]) -> String {
    let mut text = format!(
        "
materials:
  iron: {material}
elements:
  m: {{kind: magnetic_circuit,
      legs: {{left: {{shape: effective, length: 120 mm, area: 50 mm², material: iron, between: [p, q]}},
             middle: {{shape: effective, length: 50 mm, area: 100 mm², gap: 0.4 mm, material: iron, between: [p, q]}},
             right: {{shape: effective, length: 120 mm, area: 60 mm², material: iron, between: [q, p]}}}},
      windings: {{a: {{nodes: [na, ground], leg: left, turns: 200, resistance: 1 Ω}},
                 b: {{nodes: [nb, ground], leg: middle, turns: 150, resistance: 1 Ω}},
                 c: {{nodes: [nc, ground], leg: right, turns: 300, resistance: 1 Ω}}}}}}
"
    );
    for (winding, current) in ["a", "b", "c"].iter().zip(currents) {
        writeln!(
            text,
            "  s{winding}: {{kind: current_source, nodes: [ground, n{winding}], current: {current:e} A}}"
        )
        .expect("a text grows");
    }
    text += "analysis: operating_point\nreadings:\n";
    for winding in ["a", "b", "c"] {
        for (short, phrase) in [
            ("flux", "flux linkage of"),
            ("density", "flux density in"),
            ("inductance", "inductance of"),
        ] {
            writeln!(
                text,
                "  {short}_{winding}: {{signal: {phrase} m.{winding}, take: final}}"
            )
            .expect("a text grows");
        }
    }
    text
}

/// Reluctances of the three legs [1/H] with a straight material of this permeability.
fn reluctances(permeability: f64) -> [f64; 3] {
    [
        0.12 / (permeability * MU0 * 50e-6),
        (0.05 / permeability + 0.4e-3) / (MU0 * 100e-6),
        0.12 / (permeability * MU0 * 60e-6),
    ]
}

#[test]
fn three_straight_legs_follow_their_reluctances() {
    let currents = [0.8, -0.3, 0.5];
    let text = three_legs("{initial_permeability: 1800}", currents);
    let outcome = outcome(&from_text(&text, &[]));
    let [r1, r2, r3] = reluctances(1800.0);
    // The drop from p to q, by the conductances of the legs; the third points the other way.
    let forces = [
        200.0 * currents[0],
        150.0 * currents[1],
        300.0 * currents[2],
    ];
    let drop =
        -(forces[0] / r1 + forces[1] / r2 - forces[2] / r3) / (1.0 / r1 + 1.0 / r2 + 1.0 / r3);
    let fluxes = [
        (forces[0] + drop) / r1,
        (forces[1] + drop) / r2,
        (forces[2] - drop) / r3,
    ];
    let areas = [50e-6, 100e-6, 60e-6];
    let parallel = |a: f64, b: f64| a * b / (a + b);
    let inductances = [
        200.0 * 200.0 / (r1 + parallel(r2, r3)),
        150.0 * 150.0 / (r2 + parallel(r1, r3)),
        300.0 * 300.0 / (r3 + parallel(r1, r2)),
    ];
    let source = "magnetic potentials over reluctances, closed form";
    let bound = Bound::Relative(1e-9);
    for (k, winding) in ["a", "b", "c"].iter().enumerate() {
        let read = |what: &str| value(&outcome, &format!("{what}_{winding}"));
        check(
            "three legs",
            source,
            read("density"),
            fluxes[k] / areas[k],
            bound,
        );
        check(
            "three legs",
            source,
            read("inductance"),
            inductances[k],
            bound,
        );
    }
}

/// d(linkage of j)/d(current of k) by central differences.
fn slope(currents: [f64; 3], j: usize, k: usize) -> f64 {
    let step = 1e-4;
    let flux = |change: f64| {
        let mut moved = currents;
        moved[k] += change;
        let material = "{initial_permeability: 1800, saturation: 1.4 T}";
        let outcome = outcome(&from_text(&three_legs(material, moved), &[]));
        value(&outcome, ["flux_a", "flux_b", "flux_c"][j])
    };
    (flux(step) - flux(-step)) / (2.0 * step)
}

#[test]
fn saturated_legs_act_on_each_other_alike() {
    for currents in [[0.8, -0.3, 0.5], [2.0, 1.0, 0.1]] {
        for (j, k) in [(0, 1), (0, 2), (1, 2)] {
            let (there, back) = (slope(currents, j, k), slope(currents, k, j));
            check(
                "reciprocity of saturated legs",
                "second derivative of the co-energy, by central differences",
                there,
                back,
                Bound::Relative(1e-5),
            );
        }
    }
}

/// A straight ring with two windings of 100 and 50 turns; 25.13 mH on the first.
fn ring(leakage: &str) -> String {
    format!(
        "
materials:
  iron: {{initial_permeability: 2000}}
cores:
  ring: {{shape: effective, length: 100 mm, area: 100 mm², material: iron}}
elements:
  source: {{kind: voltage_source, nodes: [rail, ground], voltage: 1 V}}
  t: {{kind: transformer, core: ring, {leakage},
      windings: {{a: {{nodes: [rail, ground], turns: 100, resistance: 0.4 Ω}},
                 b: {{nodes: [out, ground], turns: 50, resistance: 0.1 Ω}}}}}}
"
    )
}

/// Permeance of that ring [H].
const PERMEANCE: f64 = 2000.0 * MU0 * 100e-6 / 0.1;

#[test]
fn a_shorted_transformer_shows_the_leakage_told() {
    let text = ring("leakage: 300 µH")
        + "
  short: {kind: resistor, nodes: [out, ground], resistance: 0.1 Ω}
analysis: {transient: {duration: 2 ms, start: zero, accuracy: 1e-7}}
readings:
  i1: {signal: winding current of t.a, take: value_at, at: 0.2 ms}
  i2: {signal: winding current of t.b, take: value_at, at: 0.2 ms}
  late: {signal: winding current of t.a, take: value_at, at: 1.5 ms}
";
    let outcome = outcome(&from_text(&text, &[]));
    // Reduced to the first: 0.4 Ω and 4 (0.1 + 0.1) Ω. L1 = P N² + x each, M = P N², with L1 - M²/L1 = 300 µH.
    let (shared, wanted) = (PERMEANCE * 1e4, 300e-6_f64);
    let own = 0.5 * (wanted - 2.0 * shared + (4.0 * shared * shared + wanted * wanted).sqrt());
    let whole = shared + own;
    assert!((whole - shared * shared / whole - wanted).abs() < 1e-12);
    let (r1, r2) = (0.4, 0.8);
    // L di/dt = v - R i with L = [[whole, shared], [shared, whole]]: two exponentials.
    let det = whole * whole - shared * shared;
    let a = [
        [-whole * r1 / det, shared * r2 / det],
        [shared * r1 / det, -whole * r2 / det],
    ];
    let (trace, product) = (a[0][0] + a[1][1], r1 * r2 / det);
    let root = (trace * trace - 4.0 * product).sqrt();
    let (fast, slow) = (0.5 * (trace - root), 0.5 * (trace + root));
    let end = [1.0 / r1, 0.0];
    let rate = [whole / det, -shared / det];
    let current = |k: usize, t: f64| {
        // i - end = c1 exp(fast t) + c2 exp(slow t), from i(0) = 0 and its slope.
        let c1 = (rate[k] + slow * end[k]) / (fast - slow);
        let c2 = -end[k] - c1;
        end[k] + c1 * (fast * t).exp() + c2 * (slow * t).exp()
    };
    let source = "two coupled circuits switched on, closed form";
    let bound = Bound::Relative(1e-5);
    check(
        "leakage",
        source,
        value(&outcome, "i1"),
        current(0, 0.2e-3),
        bound,
    );
    check(
        "leakage",
        source,
        value(&outcome, "i2"),
        2.0 * current(1, 0.2e-3),
        bound,
    );
    check(
        "leakage",
        source,
        value(&outcome, "late"),
        current(0, 1.5e-3),
        bound,
    );
}

#[test]
fn a_straight_transformer_is_coupled_inductors() {
    let ending = "
  load: {kind: resistor, nodes: [out, ground], resistance: 3 Ω}
  switch: {kind: switch, nodes: [out, far], closed_resistance: 10 mΩ, open_resistance: 100 kΩ, transition: 1 µs,
           initially: open, closes_at: [0.3 ms], opens_at: [0.9 ms]}
  more: {kind: resistor, nodes: [far, ground], resistance: 1 Ω}
analysis: {transient: {duration: 2 ms, start: zero, accuracy: 1e-6}}
readings:
  highest: {signal: voltage at out, take: highest}
  charge: {signal: winding current of t.a, take: integral}
  last: {signal: winding current of t.b, take: value_at, at: 1.2 ms}
";
    let coefficient = 0.97;
    let own = PERMEANCE / coefficient;
    let (first, second) = (1e4 * own, 2.5e3 * own);
    let coupled = format!(
        "
elements:
  source: {{kind: voltage_source, nodes: [rail, ground], voltage: 1 V}}
  t: {{kind: coupled_inductors, coefficient: {coefficient},
      windings: {{a: {{nodes: [rail, ground], inductance: {first:e} H, series_resistance: 0.4 Ω}},
                 b: {{nodes: [out, ground], inductance: {second:e} H, series_resistance: 0.1 Ω}}}}}}
"
    );
    let reference = outcome(&from_text(&(coupled + ending), &[]));
    let text = ring(&format!("coefficient: {coefficient}")) + ending;
    let reached = outcome(&from_text(&text, &[]));
    for reading in ["highest", "charge", "last"] {
        check(
            "coefficient of coupling",
            "coupled inductors of the same inductances",
            value(&reached, reading),
            value(&reference, reading),
            Bound::Relative(2e-5),
        );
    }
}

#[test]
fn windings_of_a_geometry_leak_as_the_formula_says() {
    let text = "
materials:
  iron: {initial_permeability: 2000}
cores:
  ring: {shape: effective, length: 100 mm, area: 100 mm², material: iron, mean_turn: 60 mm}
elements:
  source: {kind: current_source, nodes: [ground, top], current: 1 A}
  t: {kind: transformer, core: ring, concentric: {breadth: 20 mm, spacing: 0.3 mm},
      windings: {a: {nodes: [top, ground], turns: 100, resistance: 1 Ω, build: 2 mm},
                 b: {nodes: [out, ground], turns: 50, resistance: 1 Ω, build: 1.5 mm}}}
  open: {kind: resistor, nodes: [out, ground], resistance: 1 MΩ}
analysis: operating_point
readings:
  first: {signal: inductance of t.a, take: final}
  second: {signal: inductance of t.b, take: final}
";
    let outcome = outcome(&from_text(text, &[]));
    let u = std::f64::consts::PI * 20.0 / 3.8;
    let rogowski = 1.0 - (1.0 - (-u).exp()) / u;
    let between = MU0 * 0.06 / 0.02 * rogowski * (2e-3 / 3.0 + 0.3e-3 + 1.5e-3 / 3.0);
    let source = "mu0 N² (mean turn/breadth)(a/3 + d + b/3) with Rogowski's factor (from memory), half on each side";
    let bound = Bound::Relative(1e-9);
    let whole = PERMEANCE + 0.5 * between;
    check(
        "leakage of concentric windings",
        source,
        value(&outcome, "first"),
        1e4 * whole,
        bound,
    );
    check(
        "leakage of concentric windings",
        source,
        value(&outcome, "second"),
        2.5e3 * whole,
        bound,
    );
}

#[test]
fn a_closed_ring_takes_the_flux_of_its_leg_over() {
    // A straight leg pair fed by a current that is switched off: the ring alone keeps the flux, with L/R of one turn.
    let text = "
materials:
  iron: {initial_permeability: 1000}
elements:
  source: {kind: current_source, nodes: [ground, top], current: {steps: {at: [[0 s, 1 A], [1 ms, 0 A]]}}}
  m: {kind: magnetic_circuit,
      legs: {yoke: {shape: effective, length: 100 mm, area: 50 mm², material: iron, between: [p, q]},
             back: {shape: effective, length: 50 mm, area: 50 mm², material: iron, between: [q, p]}},
      windings: {coil: {nodes: [top, ground], leg: yoke, turns: 100, resistance: 1 Ω}},
      shading_rings: {ring: {leg: back, resistance: 0.1 mΩ, temperature_coefficient: 0 /K}}}
analysis: {transient: {duration: 20 ms, accuracy: 1e-6}}
readings:
  after: {signal: winding current of m.ring, take: value_at, at: 1.001 ms}
  later: {signal: winding current of m.ring, take: value_at, at: 6.001 ms}
";
    let outcome = outcome(&from_text(text, &[]));
    let inductance = 1000.0 * MU0 * 50e-6 / 0.15;
    let current = |t: f64| 100.0 * (-t * 0.1e-3 / inductance).exp();
    let source = "decay of a shorted turn, closed form";
    for (reading, t) in [("after", 1e-6), ("later", 5.001e-3)] {
        let reached = value(&outcome, reading);
        check(
            "shading ring",
            source,
            reached,
            current(t),
            Bound::Relative(1e-4),
        );
    }
}
