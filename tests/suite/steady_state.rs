//! Periodic steady states: against a general-purpose solver's, closed forms, and the ends of long runs; the work counted.

use crate::netlists::{from_file, from_text, outcome, time, value};
use crate::record::{Bound, check};
use coilbreak::run::Outcome;

const SETTLED: &str = "general-purpose solver marched 3251 periods at 1e-9 and by its own shooting; the converter of tests/netlists/peers/s.yaml with hand-written equations";

/// Unknowns at the period's start, from terminal readings: linkage, junction, snubber and output capacitor.
fn states(out: &Outcome) -> [(&'static str, f64, f64); 4] {
    let read = |name: &str| value(out, name);
    [
        ("linkage", read("lambda"), 0.000_296_279_931),
        (
            "junction",
            -read("vx") - 10e-3 * read("into_diode"),
            0.341_156_072,
        ),
        (
            "snubber",
            read("vx") - 5.0 * read("into_snubber"),
            -0.369_707_323,
        ),
        (
            "output",
            read("vo") - 15e-3 * read("into_output"),
            5.591_867_334,
        ),
    ]
}

#[test]
fn a_converter_that_takes_thousands_of_periods_to_settle_is_found_settled() {
    for (accuracy, bound) in [("1e-4", 1e-4), ("1e-6", 1e-6)] {
        let set = format!("analysis.steady_state.accuracy={accuracy}");
        let out = outcome(&from_file("tests/netlists/peers/s.yaml", &[&set]));
        for (_, reached, expected) in states(&out) {
            check(
                "case S: states",
                SETTLED,
                reached,
                expected,
                Bound::Relative(bound),
            );
        }
        check(
            "case S: mean of the output",
            SETTLED,
            value(&out, "vo_mean"),
            5.591_911_824_6,
            Bound::Relative(bound),
        );
        check(
            "case S: power in the diode",
            SETTLED,
            value(&out, "P_diode"),
            0.872_423_43,
            Bound::Relative(bound),
        );
        let found = out.steady.as_ref().expect("a periodic state was asked for");
        check(
            "case S: slowest multiplier",
            SETTLED,
            found.multiplier.unwrap(),
            0.995_626,
            Bound::Relative(2e-6),
        );
        let all = out.work.expect("it ran").counted;
        let spent = |counted: &coilbreak::dae::Statistics| counted.factorizations + counted.solves;
        // The period that is read is a plain one at the same tolerances.
        let plain = spent(&all) - spent(&found.counted);
        let own = spent(&found.counted) - spent(&found.varied);
        let ratios = [own, spent(&found.counted)].map(|work| work as f64 / plain as f64);
        println!(
            "case S at {accuracy}: {} periods, work {own} + {} over {plain}: {ratios:.1?}",
            found.periods,
            spent(&found.varied)
        );
        assert!(ratios[0] <= 12.0 && ratios[1] <= 25.0, "{ratios:?}");
    }
}

#[test]
fn a_circuit_that_sets_its_own_period_has_that_of_the_closed_form() {
    // 1 uF behind 10 kohm at 10 V; at 6 V a switch of 100 ohm discharges it until 3 V.
    let text = "elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 10 V}
  charge: {kind: resistor, nodes: [rail, cap], resistance: 10 kΩ}
  store: {kind: capacitor, nodes: [cap, ground], capacitance: 1 µF}
  spill: {kind: switch, nodes: [cap, ground], closed_resistance: 100 Ω, open_resistance: 1 GΩ, transition: 0 s,
          watches: {signal: voltage at cap, closes_above: 6 V, opens_below: 3 V}}
analysis:
  steady_state: {period: unknown, near: NEAR, accuracy: 1e-6}
readings:
  mean: {signal: voltage at cap, take: mean}
  highest: {signal: voltage at cap, take: highest}
  ripple: {signal: voltage at cap, take: ripple}
";
    let branch = |conductance: f64| {
        let whole = 1e-4 + conductance;
        (10.0 * 1e-4 / whole, 1e-6 / whole)
    };
    let ((up, slow), (down, fast)) = (branch(1e-9), branch(1e-2));
    let (rise, fall) = (
        slow * ((up - 3.0) / (up - 6.0)).ln(),
        fast * ((6.0 - down) / (3.0 - down)).ln(),
    );
    // Charge balance: the mean over a stretch is its end value less tau times the change over its length.
    let mean = (up * rise - 3.0 * slow + down * fall + 3.0 * fast) / (rise + fall);
    for near in ["5 ms", "6.2 ms"] {
        let out = outcome(&from_text(&text.replace("NEAR", near), &[]));
        let found = out.steady.as_ref().expect("a periodic state was asked for");
        let source = "closed form of two exponentials";
        check(
            "relaxation: period",
            source,
            found.period,
            rise + fall,
            Bound::Relative(1e-6),
        );
        check(
            "relaxation: mean",
            source,
            value(&out, "mean"),
            mean,
            Bound::Relative(1e-6),
        );
        check(
            "relaxation: ripple",
            source,
            value(&out, "ripple"),
            3.0,
            Bound::Relative(1e-5),
        );
        assert_eq!(out.duration, found.period);
    }
}

#[test]
fn a_coil_on_alternating_voltage_starts_without_a_transient() {
    // i = I sin(w t - phi), I = V/|Z|: at the start, at the end and in its crest.
    let text = "elements:
  mains: {kind: voltage_source, nodes: [live, ground], voltage: {sine: {amplitude: 34 V, frequency: 50 Hz, phase: 40 deg}}}
  winding: {kind: inductor, nodes: [live, ground], inductance: 3 H, series_resistance: 20 Ω}
analysis:
  transient: {duration: 55 ms, start: steady_state, accuracy: 1e-6}
readings:
  start: {signal: current through winding, take: value_at, at: 0 s}
  later: {signal: current through winding, take: value_at, at: 33 ms}
  crest: {signal: current through winding, take: highest, from: 20 ms}
";
    let out = outcome(&from_text(text, &[]));
    let omega = std::f64::consts::TAU * 50.0;
    let (size, lag) = (
        34.0 / 20.0_f64.hypot(omega * 3.0),
        (omega * 3.0).atan2(20.0),
    );
    let at = |t: f64| size * (omega * t + 40.0_f64.to_radians() - lag).sin();
    let source = "phasor of a resistance and an inductance";
    for (name, expected) in [("start", at(0.0)), ("later", at(0.033)), ("crest", size)] {
        check(
            "coil on alternating voltage: current",
            source,
            value(&out, name),
            expected,
            Bound::Relative(1e-5),
        );
    }
    assert_eq!(out.analysis, "transient");
}

#[test]
fn what_happens_once_waits_until_the_run_begins() {
    let out = outcome(&from_file("netlists/contactor_ac.yaml", &[]));
    assert!(value(&out, "kick") > 50.0, "the contact opens in the run");
    let set = ["elements.k2_contact.opens_at=[1 s]"];
    let periodic = outcome(&from_file("netlists/contactor_ac.yaml", &set));
    let held = value(&periodic, "crest_before");
    let source = "the same run without an opening";
    check(
        "contactor: crest before it opens",
        source,
        value(&out, "crest_before"),
        held,
        Bound::Relative(1e-4),
    );
}

#[test]
fn the_periodic_state_is_where_a_long_run_ends() {
    let periodic = outcome(&from_file("netlists/buck_ripple.yaml", &[]));
    let long = [
        "analysis.transient.duration=8 ms",
        "readings.output.from=7.9 ms",
        "readings.ripple.from=7.9 ms",
        "readings.coil_peak.from=7.9 ms",
        "analysis.transient.record_from=7.9 ms",
    ];
    let run = outcome(&from_file("netlists/buck_telemetry.yaml", &long));
    for name in ["output", "ripple", "coil_peak"] {
        let source = "800 periods marched from near the periodic state";
        check(
            "supply: periodic state",
            source,
            value(&periodic, name),
            value(&run, name),
            Bound::Relative(3e-4),
        );
    }
    assert!(time(&periodic, "coil_peak") < 10e-6);
}

#[test]
fn a_converter_whose_inductor_runs_dry_is_found_too() {
    let dry = "elements.load.resistance=60 Ω";
    let periodic = outcome(&from_file("netlists/buck_ripple.yaml", &[dry]));
    assert!(
        periodic
            .steady
            .as_ref()
            .is_some_and(|found| found.converged && found.settled)
    );
    let long = [
        dry,
        "analysis.transient.duration=40 ms",
        "readings.output.from=39.9 ms",
        "readings.ripple.from=39.9 ms",
        "readings.coil_peak.from=39.9 ms",
        "analysis.transient.record_from=39.9 ms",
    ];
    let run = outcome(&from_file("netlists/buck_telemetry.yaml", &long));
    for name in ["output", "coil_peak"] {
        let source = "4000 periods marched";
        check(
            "supply run dry: periodic state",
            source,
            value(&periodic, name),
            value(&run, name),
            Bound::Relative(1e-3),
        );
    }
}
