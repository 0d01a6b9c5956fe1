//! Guards: an operating point is found where one exists, be it one of several, be the laws ever so steep; and where none
//! exists the message names the elements involved. Source of every exact value: the formula beside it.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use coilbreak::analysis::Failure;
use coilbreak::run::run;
use std::ops::ControlFlow;

/// k T/q at 25 °C [V].
const SLOPE: f64 = 1.380649e-23 / 1.602176634e-19 * 298.15;

fn refusal(netlist: &str) -> (String, String) {
    match run(&from_text(netlist, &[]), &mut |_, _| {
        ControlFlow::Continue(())
    }) {
        Err(Failure::Stopped { headline, help, .. }) => (headline, help),
        other => panic!("{:?}", other.map(|outcome| outcome.readings)),
    }
}

/// Two switches that hold each other open, each across a node on 1 kΩ from 5 V.
fn latch(first: &str, second: &str) -> String {
    let pair = |own: &str, other: &str, word: &str| {
        format!(
            "  r{own}: {{kind: resistor, nodes: [p, {own}], resistance: 1 kΩ}}
  k{own}: {{kind: switch, nodes: [{own}, ground], closed_resistance: 1 Ω, open_resistance: 10 MΩ, transition: 1 µs,
       initially: {word}, watches: {{signal: voltage at {other}, closes_above: 3 V, opens_below: 2 V}}}}
"
        )
    };
    format!(
        "elements:
  s: {{kind: voltage_source, nodes: [p, ground], voltage: 5 V}}
{}{}analysis: operating_point
readings:
  a: {{signal: voltage at a, take: final}}
  b: {{signal: voltage at b, take: final}}
",
        pair("a", "b", first),
        pair("b", "a", second)
    )
}

#[test]
fn a_latch_rests_in_one_of_its_two_states_however_its_switches_begin() {
    let low = 5.0 / 1001.0;
    let high = 5.0 * 10e6 / 10.001e6;
    for (first, second) in [
        ("open", "closed"),
        ("closed", "open"),
        ("open", "open"),
        ("closed", "closed"),
    ] {
        let out = outcome(&from_text(&latch(first, second), &[]));
        let (a, b) = (value(&out, "a"), value(&out, "b"));
        // Where they begin apart they stay as they are; else one of them is the quicker.
        let expected = match (first, second) {
            ("open", "closed") => (high, low),
            ("closed", "open") => (low, high),
            _ if a < b => (low, high),
            _ => (high, low),
        };
        for (found, exact) in [(a, expected.0), (b, expected.1)] {
            check(
                "node of a latch at rest",
                "voltage divider",
                found,
                exact,
                Bound::Relative(1e-8),
            );
        }
    }
}

#[test]
fn switches_in_a_ring_of_three_inversions_have_no_rest_and_all_are_named() {
    let inverter = |own: &str, before: &str| {
        format!(
            "  r{own}: {{kind: resistor, nodes: [p, {own}], resistance: 1 kΩ}}
  k{own}: {{kind: switch, nodes: [{own}, ground], closed_resistance: 1 Ω, open_resistance: 10 MΩ, transition: 1 µs,
       initially: open, watches: {{signal: voltage at {before}, closes_above: 3 V, opens_below: 2 V}}}}
"
        )
    };
    let (headline, _) = refusal(&format!(
        "elements:
  s: {{kind: voltage_source, nodes: [p, ground], voltage: 5 V}}
{}{}{}analysis: operating_point
readings: {{a: {{signal: voltage at a, take: final}}}}
",
        inverter("a", "c"),
        inverter("b", "a"),
        inverter("c", "b")
    ));
    for name in ["`ka`", "`kb`", "`kc`"] {
        assert!(headline.contains(name), "{headline}");
    }
}

/// A current that rises, falls and rises again with the voltage at `v`: v/(1 kΩ) less three times the current of a diode
/// behind 1 kΩ that follows v, plus six times that of another whose cathode stands at 1 V.
fn tunnel(supply: f64) -> String {
    format!(
        "elements:
  s: {{kind: voltage_source, nodes: [p, ground], voltage: {supply} V}}
  load: {{kind: resistor, nodes: [p, v], resistance: 2 kΩ}}
  rise: {{kind: resistor, nodes: [v, ground], resistance: 1 kΩ}}
  copy: {{kind: dependent_voltage_source, nodes: [c, ground], follows: voltage at v, gain: 1}}
  r1: {{kind: resistor, nodes: [c, e], resistance: 1 kΩ}}
  d1: {{kind: diode, anode: e, cathode: ground, saturation_current: 1 fA, ideality_factor: 1}}
  fall: {{kind: dependent_current_source, nodes: [ground, v], follows: current through d1, gain: 3}}
  r2: {{kind: resistor, nodes: [c, g], resistance: 1 kΩ}}
  d2: {{kind: diode, anode: g, cathode: k, saturation_current: 1 fA, ideality_factor: 1}}
  step: {{kind: voltage_source, nodes: [k, ground], voltage: 1 V}}
  again: {{kind: dependent_current_source, nodes: [v, ground], follows: current through d2, gain: 6}}
analysis: operating_point
readings: {{v: {{signal: voltage at v, take: final}}}}
"
    )
}

/// Current of a junction (1 fA, n = 1) behind a resistance at a voltage, by bisection on its own voltage.
fn behind(resistance: f64, voltage: f64) -> f64 {
    let (mut low, mut high) = (f64::min(voltage, 0.0), f64::max(voltage, 0.0));
    let law = |v: f64| 1e-15 * (v / SLOPE).exp_m1();
    for _ in 0..80 {
        let middle = 0.5 * (low + high);
        if law(middle) > (voltage - middle) / resistance {
            high = middle;
        } else {
            low = middle;
        }
    }
    law(low)
}

#[test]
fn a_law_that_falls_and_rises_rests_where_it_meets_its_load_line() {
    let mut several = 0;
    for step in 0..=40 {
        let supply = 0.1 * f64::from(step);
        let excess = |v: f64| {
            v / 1e3 - 3.0 * behind(1e3, v) + 6.0 * behind(1e3, v - 1.0) - (supply - v) / 2e3
        };
        // All places where the law meets the line, by their change of sign.
        let grid: Vec<f64> = (0..=400).map(|k| -1.0 + 2e-2 * f64::from(k)).collect();
        let mut places = Vec::new();
        for pair in grid.windows(2) {
            let (mut low, mut high) = (pair[0], pair[1]);
            let rises = excess(high) > 0.0;
            if (excess(low) > 0.0) == rises {
                continue;
            }
            for _ in 0..60 {
                let middle = 0.5 * (low + high);
                if (excess(middle) > 0.0) == rises {
                    high = middle;
                } else {
                    low = middle;
                }
            }
            places.push(low);
        }
        several += usize::from(places.len() > 1);
        let found = value(&outcome(&from_text(&tunnel(supply), &[])), "v");
        let nearest = places
            .iter()
            .copied()
            .min_by(|a, b| (a - found).abs().total_cmp(&(b - found).abs()))
            .expect("the law meets every line");
        check(
            "rest of a law that falls and rises",
            "the same law on its load line, by bisection",
            found,
            nearest,
            Bound::Absolute(1e-6),
        );
    }
    assert!(several >= 5, "{several} load lines with several rests");
}

/// Lambert's W of exp(y): w + ln w = y.
fn lambert_of_exp(y: f64) -> f64 {
    let mut w = if y > 1.0 { y - y.ln() } else { y.exp() };
    for _ in 0..50 {
        w *= (1.0 + y - w.ln()) / (1.0 + w);
    }
    w
}

#[test]
fn a_diode_behind_any_resistance_on_any_supply_draws_what_the_closed_form_says() {
    // i = (s/R) W((Is R/s) exp((V + Is R)/s)) - Is. Banwell and Jayakumar, Electronics Letters 36 (2000) 291 (from memory).
    for saturation in [1e-15_f64, 1e-9, 1e-5] {
        for resistance in [1e-3, 1.0, 1e4, 1e9] {
            for supply in [0.1, 1.0, 24.0, 1e4] {
                let y = (saturation * resistance / SLOPE).ln()
                    + (supply + saturation * resistance) / SLOPE;
                let exact = SLOPE / resistance * lambert_of_exp(y) - saturation;
                // Above 1 GA the program follows the tangent.
                if exact > 1e8 {
                    continue;
                }
                let out = outcome(&from_text(
                    &format!(
                        "elements:
  s: {{kind: voltage_source, nodes: [a, ground], voltage: {supply:e} V}}
  r: {{kind: resistor, nodes: [a, b], resistance: {resistance:e} Ω}}
  d: {{kind: diode, anode: b, cathode: ground, saturation_current: {saturation:e} A, ideality_factor: 1}}
analysis: operating_point
readings: {{i: {{signal: current through d, take: final}}}}
"
                    ),
                    &[],
                ));
                check(
                    "diode behind a resistance",
                    "closed form with Lambert's W",
                    value(&out, "i"),
                    exact,
                    Bound::Relative(1e-5),
                );
            }
        }
    }
}

#[test]
fn a_string_of_sixty_junctions_and_a_chain_of_gain_one_million_rest_where_they_must() {
    // Every junction carries 1 mA: s ln(1 mA/Is + 1) each.
    let mut text = String::from(
        "elements:\n  s: {kind: current_source, nodes: [ground, n0], current: 1 mA}\n",
    );
    for k in 0..60 {
        let next = if k == 59 {
            "ground".to_owned()
        } else {
            format!("n{}", k + 1)
        };
        text += &format!(
            "  d{k}: {{kind: diode, anode: n{k}, cathode: {next}, saturation_current: 1 fA, ideality_factor: 1}}\n"
        );
    }
    text += "analysis: operating_point\nreadings: {top: {signal: voltage at n0, take: final}}\n";
    check(
        "string of junctions",
        "the junction's law, sixty times",
        value(&outcome(&from_text(&text, &[])), "top"),
        60.0 * SLOPE * (1e-3_f64 / 1e-15).ln_1p(),
        Bound::Relative(1e-8),
    );
    // An inverting amplifier of gain A with a junction from its input back to its output takes the logarithm:
    // the input stands at -out/A, (V - in)/R = Is exp((in - out)/s), solved by substitution.
    let (gain, volts, ohms, saturation) = (1e6, 10.0, 1e4, 1e-14_f64);
    let mut exact = -0.6_f64;
    for _ in 0..50 {
        let input = -exact / gain;
        exact = input - SLOPE * ((volts - input) / ohms / saturation).ln_1p();
    }
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, in], resistance: 10 kΩ}
  d: {kind: diode, anode: in, cathode: out, saturation_current: 10 fA, ideality_factor: 1}
  amplifier: {kind: dependent_voltage_source, nodes: [ground, out], follows: voltage at in, gain: 1e6}
analysis: operating_point
readings: {out: {signal: voltage at out, take: final}}
",
        &[],
    ));
    check(
        "logarithmic amplifier",
        "the junction's law by substitution",
        value(&out, "out"),
        exact,
        Bound::Relative(1e-7),
    );
}

#[test]
fn where_there_is_no_operating_point_the_elements_involved_are_named() {
    let (headline, help) = refusal(
        "elements:
  push: {kind: current_source, nodes: [ground, a], current: 10 mA}
  block: {kind: diode, anode: ground, cathode: a, saturation_current: 1 nA, ideality_factor: 1.8}
analysis: operating_point
readings: {a: {signal: voltage at a, take: final}}
",
    );
    assert!(headline.contains("node `a`"), "{headline}");
    assert!(help.contains("`push`, `block`"), "{help}");
    let (headline, help) = refusal(
        "elements:
  s: {kind: voltage_source, nodes: [a, b], voltage: 1 V}
  r: {kind: resistor, nodes: [a, ground], resistance: 1 kΩ}
  echo: {kind: dependent_voltage_source, nodes: [b, ground], follows: voltage at a, gain: 1}
analysis: operating_point
readings: {a: {signal: voltage at a, take: final}}
",
    );
    assert!(headline.contains("do not determine"), "{headline}");
    assert!(help.contains("`s`") && help.contains("`echo`"), "{help}");
}
