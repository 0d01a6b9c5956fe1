//! Guards: an armature falls, bounces and swings as mechanics says; a relay pulls in and lets go as a general-purpose solver has
//! it; what the pull does is what the field loses; and the energy adds up.

use crate::netlists::{from_file, from_text, outcome, value};
use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::elements::Point;

const SOLVER: &str = "scipy's solve_ivp (DOP853) with events, tests/data/relay_by_solver/solve.py";

/// An armature that a current holds at its seat until 1 ms, with its keys given.
fn mechanics(armature: &str, more: &str) -> String {
    format!(
        "
cores:
  air: {{shape: effective, length: 20 mm, area: 50 mm²}}
elements:
  supply: {{kind: current_source, nodes: [ground, drive], current: {{steps: {{at: [[0 s, 400 A], [1 ms, 0 A]]}}}}}}
  k1: {{kind: relay, nodes: [drive, ground], core: air, turns: 100, resistance: 1 pΩ, self_capacitance: 0 F, initially: seated,
       armature: {{{armature}}}}}
analysis: {{transient: {{duration: 40 ms, accuracy: 1e-6}}}}
readings:
{more}
"
    )
}

/// Pushed by 2 N on 1 g over 1 mm: free fall t = sqrt(2 s m/F), impact at v = sqrt(2 s F/m), then bounces of 2 e^k v m/F;
/// the whole series lasts t (1 + e)/(1 - e).
#[test]
fn an_armature_falls_and_bounces_as_a_geometric_series() {
    let text = mechanics(
        "mass: 1 g, open_gap: 1.2 mm, seated_gap: 0.2 mm, preload: 2 N, spring_rate: 0 N/m, restitution: 0.6",
        "  first: {signal: position of k1, take: first_time, rises_to: 1.1999999 mm}
  whole: {signal: position of k1, take: time_below, level: 1.19999 mm, from: 1 ms}
  last: {signal: position of k1, take: final}
  low: {signal: position of k1, take: lowest, from: 2.1 ms}",
    );
    let outcome = outcome(&from_text(&text, &[]));
    let fall = (2.0 * 1e-3 * 1e-3 / 2.0f64).sqrt();
    let source = "free fall and Newton's law of impact";
    let at = |name: &str| value(&outcome, name);
    // The last 0.1 nm of the fall take 50 ns less.
    check(
        "armature",
        source,
        at("first") - 1e-3,
        fall,
        Bound::Relative(1e-4),
    );
    // A rebound rises by e² of the fall: 0.36 mm.
    check(
        "armature",
        source,
        at("low"),
        1.2e-3 - 0.36e-3,
        Bound::Relative(1e-5),
    );
    // Below the level for all of the series but the moments near the stop.
    check(
        "armature",
        source,
        at("whole"),
        fall * 1.6 / 0.4,
        Bound::Relative(2e-2),
    );
    check(
        "armature",
        source,
        at("last"),
        1.2e-3,
        Bound::Relative(1e-9),
    );
    // All that the spring gives is struck out of the armature: 2 N over 1 mm.
    let account = &outcome.ledger.accounts[1];
    check(
        "armature",
        source,
        account.dissipated,
        2e-3,
        Bound::Relative(1e-5),
    );
    assert!(
        outcome.ledger.imbalance < 1e-4,
        "{}",
        outcome.ledger.imbalance
    );
}

/// From the seat the spring's force turns at s0 = preload/rate + stroke: x = x0 - s0 (1 - exp(-a t)(cos w t + a/w sin w t)) until
/// the stop, with a = d/2m and w² = k/m - a².
#[test]
fn an_armature_swings_as_a_damped_oscillator() {
    let text = mechanics(
        "mass: 2 g, open_gap: 10 mm, seated_gap: 0.5 mm, preload: 0 N, spring_rate: 2 N/mm, damping: 0.8 N s/m, restitution: 0",
        "  p1: {signal: position of k1, take: value_at, at: 1.7 ms}
  p2: {signal: position of k1, take: value_at, at: 2.2 ms}",
    );
    let outcome = outcome(&from_text(&text, &[]));
    let (m, k, d, stroke) = (2e-3, 2e3, 0.8, 9.5e-3);
    let a: f64 = d / (2.0 * m);
    let w = (k / m - a * a).sqrt();
    for (name, t) in [("p1", 0.7e-3), ("p2", 1.2e-3)] {
        let left = stroke * (-a * t).exp() * ((w * t).cos() + a / w * (w * t).sin());
        check(
            "armature",
            "closed form of the damped oscillator",
            value(&outcome, name),
            10e-3 - left,
            Bound::Relative(1e-5),
        );
    }
}

#[test]
fn a_relay_operates_and_releases_as_a_general_purpose_solver_has_it() {
    let table = rows(include_str!("../data/relay_by_solver/relay.csv"));
    let of = |event: &str| {
        let row = table
            .iter()
            .find(|row| row.text("event") == event && row.get("number") == 1.0);
        row.unwrap_or_else(|| panic!("no {event}"))
    };
    let netlist = from_file("tests/netlists/relay_by_solver.yaml", &[]);
    let outcome = outcome(&netlist);
    for (reading, event) in [
        ("operate", "closes"),
        ("closes", "closes"),
        ("seats", "strikes_seat"),
        ("release", "opens"),
        ("opens", "opens"),
        ("strikes_outer", "strikes_outer"),
    ] {
        check(
            "instants of a relay",
            SOLVER,
            value(&outcome, reading),
            of(event).get("time_s"),
            Bound::Relative(1e-4),
        );
    }
    for (reading, event) in [("at_operate", "closes"), ("at_release", "opens")] {
        check(
            "currents of a relay",
            SOLVER,
            value(&outcome, reading),
            of(event).get("value"),
            Bound::Relative(1e-3),
        );
    }
    assert!(
        outcome.ledger.imbalance < 1e-3,
        "{}",
        outcome.ledger.imbalance
    );
}

/// F = n Φ²/(2 mu0 A) of the gapped core with linear iron: topic 12 of the check values, the rows with one gap.
#[test]
fn the_pull_is_that_of_the_gapped_core() {
    let table = rows(include_str!("../data/armature_force.csv"));
    for row in table.iter().filter(|row| row.get("n_gaps") == 1.0) {
        let text = format!(
            "
materials:
  iron: {{initial_permeability: {}, saturation: 1e9 T}}
cores:
  core: {{shape: effective, length: {} mm, area: {} mm², material: iron}}
elements:
  supply: {{kind: current_source, nodes: [ground, drive], current: {} A}}
  k1: {{kind: relay, nodes: [drive, ground], core: core, turns: {}, resistance: 1 Ω, self_capacitance: 0 F,
       armature: {{mass: 1 g, open_gap: {} mm, seated_gap: 0.01 mm, preload: 1 kN, spring_rate: 0 N/m, restitution: 0}}}}
analysis: operating_point
readings:
  pull: {{signal: pull of k1, take: final}}
  inductance: {{signal: inductance of k1, take: final}}
",
            row.get("mur"),
            row.get("lc_mm"),
            row.get("A_mm2"),
            row.get("I_A"),
            row.get("N"),
            row.get("gap_mm")
        );
        let outcome = outcome(&from_text(&text, &[]));
        for (reading, column) in [("pull", "F_N"), ("inductance", "L_H")] {
            check(
                "pull of an armature",
                "closed form of the gapped core, tests/data/armature_force.csv",
                value(&outcome, reading),
                row.get(column),
                Bound::Relative(1e-7),
            );
        }
    }
}

/// Pull = -dW/dx at constant flux: differences of the energy that the element says it stores, of fourth order.
#[test]
fn the_pull_is_the_slope_of_the_stored_energy() {
    slope_of_energy(&from_file("tests/netlists/relay_by_solver.yaml", &[]), 1e-8);
}

/// The same on a yoke with fringing, leakage and hinge; its law's slope is itself a difference, good to about 1e-8.
#[test]
fn the_pull_on_a_yoke_is_the_slope_of_the_stored_energy() {
    let text = std::fs::read_to_string("tests/netlists/relay_by_solver.yaml")
        .expect("a netlist is text")
        .replace(
            "{shape: effective, length: 60 mm, area: 50 mm², gap: 0.05 mm, material: relay_iron}",
            "{shape: yoke, core_diameter: 8 mm, core_length: 25 mm, frame_width: 16 mm, frame_thickness: 2 mm,
             frame_distance: 13 mm, armature_thickness: 2 mm, gap: 0.6 mm, residual_gap: 0.02 mm, hinge_gap: 0.05 mm,
             material: relay_iron}",
        );
    let netlist = from_text(&text, &[]);
    slope_of_energy(&netlist, 1e-6);
    let outcome = outcome(&netlist);
    assert!(
        outcome.ledger.imbalance < 1e-3,
        "{}",
        outcome.ledger.imbalance
    );
    assert!(value(&outcome, "operate") < 20e-3);
}

fn slope_of_energy(netlist: &coilbreak::run::Netlist, bound: f64) {
    let circuit = &netlist.circuit;
    let tap = |text: &str| {
        circuit
            .tap(&text.parse().expect("a phrase"))
            .expect("it is there")
    };
    let (pull, spring) = (tap("pull of k1"), (0.5, 1200.0, 0.6e-3));
    let entry = circuit.index_of("k1").expect("a relay");
    let place = |what: &str| {
        let claimed = circuit.unknowns.iter();
        let mut of_k1 = claimed
            .enumerate()
            .filter(|(_, c)| c.element == Some(entry));
        let found = of_k1.find(|(_, c)| c.what == what);
        found.unwrap_or_else(|| panic!("no {what}")).0
    };
    let (gap, linkage) = (place("armature's gap"), place("flux linkage"));
    let mode = circuit.start_mode();
    for flux in [0.02, 0.1, 0.28, 0.35] {
        for at in [0.08e-3, 0.2e-3, 0.55e-3] {
            let field = |x_gap: f64| {
                let mut x = vec![0.0; circuit.unknowns.len()];
                (x[gap], x[linkage]) = (x_gap, flux);
                let point = Point {
                    time: 0.0,
                    x: &x,
                    mode: &mode,
                };
                let (preload, rate, open) = spring;
                let stroke = open - x_gap;
                let of_spring = preload * stroke + 0.5 * rate * stroke * stroke;
                (
                    circuit.stored(entry, point) - of_spring,
                    circuit.read(&pull, point),
                )
            };
            let h = 0.01 * at;
            let difference = |k: f64| field(at + k * h).0 - field(at - k * h).0;
            let slope = (8.0 * difference(1.0) - difference(2.0)) / (12.0 * h);
            check(
                "pull of an armature",
                "slope of the field's energy over the gap, by differences",
                field(at).1,
                slope,
                Bound::Relative(bound),
            );
        }
    }
}

#[test]
fn an_energized_relay_starts_with_its_armature_seated() {
    let text = std::fs::read_to_string("tests/netlists/relay_by_solver.yaml")
        .expect("a netlist is text")
        .replace(
            "{steps: {at: [[0 s, 0 V], [5 ms, 24 V], [60 ms, 0 V]]}}",
            "24 V",
        );
    let outcome = outcome(&from_text(
        &text.replace("take: value_at, at: k1.main closes", "take: final"),
        &["analysis.transient.duration=5 ms"],
    ));
    let last = |name: &str| {
        outcome
            .trace(name)
            .and_then(|trace| trace.pieces.last())
            .map(|piece| piece.values[3])
    };
    assert_eq!(last("position of k1"), Some(0.05e-3));
    assert!(last("voltage at load").is_some_and(|voltage| voltage < 0.1));
}
