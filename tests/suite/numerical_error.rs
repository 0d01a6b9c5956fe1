//! Guards: the numerical error that `run --verify` states for a reading is the error that the reading has. Source of
//! every exact value: the formula beside it, elementary circuit theory.

use crate::netlists::from_text;
use coilbreak::run::{Outcome, Request, perform};
use std::f64::consts::PI;
use std::ops::ControlFlow;

/// Accuracies that are tried.
const ACCURACIES: [&str; 9] = [
    "1e-2", "3e-3", "1e-3", "1e-4", "3e-5", "1e-5", "1e-6", "1e-7", "1e-8",
];
/// A value's true error over the stated one at most: two runs that err alike say too little.
const VALUES: f64 = 2.0;
/// The same of the instant of a peak, which moves as a whole with a rounding of its top.
const INSTANTS: f64 = 10.0;
/// Share of all figures whose true error is within the stated one.
const WITHIN: f64 = 0.9;

fn verified(netlist: &str, accuracy: &str) -> Outcome {
    let accuracy = format!("analysis.transient.accuracy={accuracy}");
    let request = Request {
        verify: true,
        ..Request::default()
    };
    let netlist = from_text(netlist, &[&accuracy]);
    perform(&netlist, &request, &mut |_, _, _| ControlFlow::Continue(()))
        .unwrap_or_else(|failure| panic!("{failure:?}"))
}

/// A reading's exact value, and its exact instant where it has one.
struct Exact {
    reading: &'static str,
    value: f64,
    time: Option<f64>,
}

fn exact(reading: &'static str, value: f64) -> Exact {
    Exact {
        reading,
        value,
        time: None,
    }
}

fn passing(reading: &'static str, time: f64) -> Exact {
    Exact {
        time: Some(time),
        ..exact(reading, time)
    }
}

fn peak(reading: &'static str, value: f64, time: f64) -> Exact {
    Exact {
        time: Some(time),
        ..exact(reading, value)
    }
}

fn the_stated_error_bounds_the_true_one(netlist: &str, exact: &[Exact]) {
    let (mut within, mut all) = (0_usize, 0_usize);
    for accuracy in ACCURACIES {
        let outcome = verified(netlist, accuracy);
        for Exact {
            reading,
            value,
            time,
        } in exact
        {
            let found = outcome.reading(reading).expect("the reading is there");
            let mut judge = |found: Option<f64>, stated: Option<f64>, exact: f64, most: f64| {
                let (found, stated) = found.zip(stated).expect("it was found and verified");
                let share = (found - exact).abs() / stated;
                assert!(
                    share < most,
                    "{reading} at {accuracy}: {found:e} ± {stated:e} for {exact:e}"
                );
                all += 1;
                within += usize::from(share <= 1.0);
                // A stated error far above the accuracy asked would say nothing.
                let asked: f64 = accuracy.parse().expect("a number");
                assert!(
                    stated <= 30.0 * asked.powf(0.75) * exact.abs(),
                    "{reading} at {accuracy}: ± {stated:e} of {exact:e}"
                );
            };
            judge(found.value, found.error, *value, VALUES);
            if let Some(time) = time {
                judge(found.time, found.time_error, *time, INSTANTS);
            }
        }
    }
    let share = within as f64 / all as f64;
    assert!(share >= WITHIN, "{within} of {all} within the stated error");
}

#[test]
fn of_a_capacitor_that_charges() {
    // v = V (1 - exp(-t/RC)); i = V/R exp(-t/RC)
    let (tau, end): (f64, f64) = (1e-3, 5e-3);
    let rest = (-end / tau).exp();
    the_stated_error_bounds_the_true_one(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 1 µF}
analysis: {transient: {duration: 5 ms, start: zero}}
readings:
  at: {signal: voltage at b, take: value_at, at: 1 ms}
  end: {signal: current through r, take: final}
  half: {signal: voltage at b, take: first_time, rises_to: 5 V}
  mean: {signal: voltage at b, take: mean}
  rms: {signal: current through r, take: rms}
  heat: {signal: energy in r, take: final}
  above: {signal: voltage at b, take: time_above, level: 9 V}
",
        &[
            exact("at", 10.0 * (1.0 - (-1.0f64).exp())),
            exact("end", 0.01 * rest),
            passing("half", tau * 2.0f64.ln()),
            exact("mean", 10.0 * (1.0 - tau / end * (1.0 - rest))),
            exact("rms", 0.01 * (0.5 * tau / end * (1.0 - rest * rest)).sqrt()),
            exact("heat", 0.5 * 1e-6 * 100.0 * (1.0 - rest * rest)),
            exact("above", end - tau * 10.0f64.ln()),
        ],
    );
}

#[test]
fn of_a_circuit_that_rings() {
    // v = V (1 - exp(-a t) (cos w t + a/w sin w t)), i = C dv/dt = V/(w L) exp(-a t) sin w t
    let (inductance, capacitance, resistance): (f64, f64, f64) = (1e-3, 100e-9, 20.0);
    let a = resistance / (2.0 * inductance);
    let w: f64 = (1.0 / (inductance * capacitance) - a * a).sqrt();
    let v = |t: f64| 1.0 - (-a * t).exp() * ((w * t).cos() + a / w * (w * t).sin());
    let i = |t: f64| (-a * t).exp() * (w * t).sin() / (w * inductance);
    let first = (PI - (w / a).atan()) / w;
    let crest = (a.recip() * w).atan() / w;
    // Every second passing of the final value is a fall.
    let falls = (0..).map(|k| first + f64::from(2 * k + 1) * PI / w);
    let last = falls.take_while(|&t| t < 300e-6).last();
    the_stated_error_bounds_the_true_one(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 1 V}
  l: {kind: inductor, nodes: [a, b], inductance: 1 mH, series_resistance: 20 Ω}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 100 nF}
analysis: {transient: {duration: 400 µs, start: zero}}
readings:
  peak: {signal: voltage at b, take: highest}
  trough: {signal: voltage at b, take: lowest, from: 40 µs}
  at: {signal: voltage at b, take: value_at, at: 200 µs}
  first: {signal: voltage at b, take: first_time, rises_to: 1 V}
  last: {signal: voltage at b, take: last_time, falls_to: 1 V, to: 300 µs}
  current: {signal: current through l, take: highest}
  steepest: {signal: voltage at b, take: fastest_change}
  charge: {signal: current through l, take: integral}
",
        &[
            peak("peak", v(PI / w), PI / w),
            peak("trough", v(2.0 * PI / w), 2.0 * PI / w),
            exact("at", v(200e-6)),
            passing("first", first),
            passing("last", last.expect("it rings below 300 µs")),
            peak("current", i(crest), crest),
            exact("steepest", i(crest) / capacitance),
            exact("charge", capacitance * v(400e-6)),
        ],
    );
}

/// A capacitor that charges to within the last digits of a limit.
const CLOSE: &str = "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 1 µF}
analysis: {transient: {duration: 1 ms, start: zero}}
readings: {end: {signal: voltage at b, take: final}}
limits:
  close: {reading: end, at_most: 6.3212055883 V}
  far: {reading: end, at_most: 7 V}
";

#[test]
fn a_limit_within_the_error_is_cautioned() {
    let outcome = verified(CLOSE, "1e-3");
    let cautions: Vec<&str> = outcome
        .cautions
        .iter()
        .filter(|caution| caution.word == "within-the-error")
        .map(|caution| caution.headline.as_str())
        .collect();
    assert_eq!(cautions.len(), 1, "{cautions:?}");
    assert!(cautions[0].contains("`close`"), "{cautions:?}");
}

#[test]
fn without_verification_no_error_is_stated() {
    let outcome = crate::netlists::outcome(&from_text(CLOSE, &[]));
    assert!(
        outcome
            .readings
            .iter()
            .all(|reading| reading.error.is_none())
    );
}

#[test]
fn a_repetition_that_is_stopped_leaves_the_outcome_and_says_so() {
    let request = Request {
        verify: true,
        ..Request::default()
    };
    let outcome = perform(
        &from_text(CLOSE, &[]),
        &request,
        &mut |stage, _, _| match stage {
            coilbreak::run::Stage::Verification => ControlFlow::Break(()),
            _ => ControlFlow::Continue(()),
        },
    )
    .unwrap_or_else(|failure| panic!("{failure:?}"));
    assert!(!outcome.interrupted());
    let reading = outcome.reading("end").expect("the reading is there");
    assert!(reading.value.is_some() && reading.error.is_none());
    assert!(
        outcome
            .cautions
            .iter()
            .any(|caution| caution.word == "not-verified")
    );
}
