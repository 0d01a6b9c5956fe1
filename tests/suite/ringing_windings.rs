//! Guards: in the equations a winding loses at every frequency what its copper loses there, a steady current meets its
//! resistance alone, and a ring is damped by the copper at the ring's own frequency.

use crate::netlists::{from_file, from_text, outcome, value};
use crate::record::{Bound, check};
use coilbreak::magnetics::losses::impedance::Layers;
use coilbreak::magnetics::losses::{Impedance, Ladder};
use coilbreak::magnetics::wire::{COPPER, TWENTY, copper_ratio};
use num_complex::Complex64;
use std::f64::consts::{PI, TAU};

const CORE: &str = "
materials:
  powder: {initial_permeability: 60}
cores:
  core: {shape: effective, length: 60 mm, area: 50 mm², mean_turn: 50 mm, material: powder}
";
/// A winding of three layers; turns touch.
const COIL: &str =
    "core: core, turns: 90, wire: {diameter: 0.4 mm, outer_diameter: 0.45 mm}, layers: 3";

const LAYERS: Layers = Layers {
    count: 3.0,
    pitch: 0.45e-3,
};

/// The resistivity of copper at 25 °C [Ω m], and the winding's resistance [Ω].
fn copper() -> (f64, f64) {
    let resistivity = copper_at(25.0);
    (
        resistivity,
        90.0 * 50e-3 * resistivity / (0.25 * PI * 0.4e-3 * 0.4e-3),
    )
}

fn of_law(law: &str) -> Impedance {
    match law {
        "dowell" => Impedance::equivalent_foil(0.4e-3, LAYERS, copper().0),
        _ => Impedance::rounds(0.4e-3, LAYERS, copper().0),
    }
}

#[test]
fn a_sine_loses_what_the_copper_loses_at_its_frequency() {
    for law in ["dowell", "ferreira"] {
        let impedance = of_law(law);
        let ladder = Ladder::of(impedance);
        for share in [0.03, 1.0, 10.0, 90.0] {
            let frequency = share * impedance.corner();
            let out = outcome(&from_text(
                &format!(
                    "{CORE}
elements:
  drive: {{kind: current_source, nodes: [ground, a], current: {{sine: {{amplitude: 0.5 A, frequency: {frequency:e} Hz}}}}}}
  coil: {{kind: coil, nodes: [a, ground], {COIL}, skin_and_proximity: {law}, self_capacitance: 0 F}}
analysis: {{steady_state: {{period: {:e} s, accuracy: 1e-5}}}}
readings:
  lost: {{signal: power in coil, take: mean}}
",
                    1.0 / frequency
                ),
                &[],
            ));
            let lost = value(&out, "lost") / (0.5 * 0.25 * copper().1);
            let subject = "loss of a winding in a sine";
            check(
                subject,
                "R(f) of the fitted ladder",
                lost,
                ladder.at(frequency).re,
                Bound::Relative(1e-4),
            );
            check(
                subject,
                "Dowell 1966, Ferreira 1994",
                lost,
                impedance.at(frequency).re,
                Bound::Relative(0.02),
            );
            let dissipated = out
                .accounts
                .iter()
                .find(|(name, _)| name == "coil")
                .map(|(_, account)| account.dissipated * frequency);
            check(
                "loss of a winding in its account",
                "mean of the power through its terminals",
                dissipated.expect("every element has an account"),
                value(&out, "lost"),
                Bound::Relative(1e-4),
            );
        }
    }
}

#[test]
fn a_steady_current_meets_the_resistance_alone() {
    let out = outcome(&from_text(
        &format!(
            "{CORE}
elements:
  drive: {{kind: voltage_source, nodes: [a, ground], voltage: 1 V}}
  coil: {{kind: coil, nodes: [a, ground], {COIL}, skin_and_proximity: dowell, self_capacitance: 0 F}}
analysis: {{operating_point: {{}}}}
readings:
  current: {{signal: winding current of coil, take: final}}
"
        ),
        &[],
    ));
    check(
        "steady current of a winding with a ladder",
        "Ohm's law",
        value(&out, "current"),
        1.0 / copper().1,
        Bound::Relative(1e-12),
    );
}

/// The natural frequency s [1/s] of a capacitance [F] across inductance [H], resistance [Ω] and ladder, by Newton from
/// the lossless one: s L + R z(s) + 1/(s C) = 0.
fn natural(ladder: &Ladder, resistance: f64, inductance: f64, capacitance: f64) -> Complex64 {
    let around = |s: Complex64| {
        let sections = ladder.sections.iter();
        let inside: Complex64 = sections
            .map(|section| section.share * s * section.time / (1.0 + s * section.time))
            .sum();
        s * inductance + resistance * (1.0 + inside) + (s * capacitance).inv()
    };
    let mut s = Complex64::new(0.0, 1.0 / (inductance * capacitance).sqrt());
    for _ in 0..60 {
        let step = 1e-6 * s;
        let slope = (around(s + step) - around(s - step)) / (2.0 * step);
        s -= around(s) / slope;
    }
    assert!(around(s).norm() < 1e-9 * (s * inductance).norm());
    s
}

#[test]
fn a_ring_decays_by_the_copper_at_its_own_frequency() {
    let (_, resistance) = copper();
    let inductance = 90f64.powi(2) * 4e-7 * PI * 60.0 * 50e-6 / 60e-3;
    let ladder = Ladder::of(of_law("ferreira"));
    // Some 120 kHz, 10 corners up: without the ladder it would ring some twenty times as long.
    let capacitance = 3.3e-9;
    let s = natural(&ladder, resistance, inductance, capacitance);
    let period = TAU / s.im;
    let alone = -0.5 * resistance / inductance;
    assert!(s.re < 5.0 * alone, "the ladder damps: {s} against {alone}");
    let at = |name: &str, count: f64| {
        format!(
            "  {name}: {{signal: voltage at a, take: value_at, at: {:e} s}}\n",
            count * period
        )
    };
    let out = outcome(&from_text(
        &format!(
            "{CORE}
elements:
  charged: {{kind: capacitor, nodes: [a, ground], capacitance: {capacitance:e} F, initial_voltage: 10 V}}
  coil: {{kind: coil, nodes: [a, ground], {COIL}, skin_and_proximity: ferreira, self_capacitance: 0 F}}
analysis: {{transient: {{duration: {:e} s, start: zero, accuracy: 1e-6}}}}
readings:
{}{}",
            32.0 * period,
            at("early", 5.0),
            at("late", 30.0),
        ),
        &[],
    ));
    check(
        "decay of a ring with a ladder",
        "root of s L + R z(s) + 1/(s C) = 0",
        value(&out, "late") / value(&out, "early"),
        (25.0 * period * s.re).exp(),
        Bound::Relative(1e-3),
    );
    assert!(out.ledger.imbalance < 1e-4, "{}", out.ledger.imbalance);
}

#[test]
fn the_inductance_of_a_coil_in_air_is_that_of_its_whole_field() {
    let of = |law: &str| {
        let netlist = from_text(
            &format!(
                "
cores:
  air: {{shape: solenoid, inner_diameter: 10 mm, outer_diameter: 13.6 mm, length: 45 mm}}
elements:
  coil: {{kind: coil, nodes: [a, ground], core: air, turns: 400, wire: {{diameter: 0.4 mm, outer_diameter: 0.45 mm}},
         skin_and_proximity: {law}, self_capacitance: 0 F}}
  load: {{kind: resistor, nodes: [a, ground], resistance: 1 Ω}}
analysis: {{transient: {{duration: 1 ms, start: zero}}}}
"
            ),
            &[],
        );
        coilbreak::run::coil_reports(&netlist.circuit)[0].inductance_at_zero
    };
    for law in ["dowell", "ferreira"] {
        check(
            "inductance of a coil in air at rest",
            "the shape's own, whatever the copper does",
            of(law),
            of("none"),
            Bound::Relative(1e-12),
        );
    }
}

#[test]
fn the_copper_of_a_coil_is_told_over_frequency_law_beside_ladder() {
    let netlist = from_file("netlists/flow_meter_coil.yaml", &[]);
    let report = &coilbreak::run::coil_reports(&netlist.circuit)[0];
    let copper = report.copper.as_ref().expect("its winding has a law");
    assert!((4..=5).contains(&copper.sections));
    let source = "Dowell 1966";
    for point in copper
        .points
        .iter()
        .filter(|point| point.frequency <= copper.up_to)
    {
        let subject = "copper over frequency";
        let (law, ladder) = (point.resistance, point.ladder_resistance);
        check(subject, source, ladder, law, Bound::Relative(0.02));
        let (law, ladder) = (point.inductance, point.ladder_inductance);
        check(subject, source, ladder, law, Bound::Relative(0.02));
    }
    // 8 layers of 0.5 mm in 0.544 mm at 25 °C.
    let layers = Layers {
        count: 8.0,
        pitch: coilbreak::magnetics::wire::grade_one(0.5e-3),
    };
    let exact = Impedance::equivalent_foil(0.5e-3, layers, copper_at(25.0));
    let last = copper.points.last().expect("a table");
    check(
        "copper over frequency",
        source,
        last.resistance / report.resistance,
        exact.at(last.frequency).re,
        Bound::Relative(1e-9),
    );
    let chart = coilbreak::report::coil::copper::chart(report).expect("a picture");
    let size = coilbreak::report::chart::Size::default();
    let svg = coilbreak::report::plots::svg(&chart, size).expect("it can be drawn");
    for piece in ["ladder fitted up to", "resistance", "frequency"] {
        assert!(svg.contains(piece), "no `{piece}`");
    }
}

fn copper_at(celsius: f64) -> f64 {
    COPPER * copper_ratio(celsius + 273.15, TWENTY)
}

#[test]
fn a_ring_above_the_ladders_reach_raises_a_caution() {
    let cautions = |share: f64| {
        let impedance = of_law("dowell");
        let frequency = share * 100.0 * impedance.corner();
        let out = outcome(&from_text(
            &format!(
                "{CORE}
elements:
  drive: {{kind: current_source, nodes: [ground, a], current: {{sine: {{amplitude: 0.5 A, frequency: {frequency:e} Hz}}}}}}
  coil: {{kind: coil, nodes: [a, ground], {COIL}, skin_and_proximity: dowell, self_capacitance: 0 F}}
analysis: {{steady_state: {{period: {:e} s}}}}
",
                1.0 / frequency
            ),
            &[],
        ));
        let words = out.cautions.iter();
        words
            .filter(|caution| caution.word == "beyond-the-ladder")
            .count()
    };
    assert_eq!([cautions(0.5), cautions(2.0)], [0, 1]);
}
