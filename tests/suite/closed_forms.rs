//! Circuits with a solution on paper: RL, RC, RLC, a clamped coil. Source of every expected value: the formula beside
//! it, elementary circuit theory.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};

const SOURCE: &str = "closed form, elementary circuit theory";

#[test]
fn a_capacitor_charges_through_a_resistor() {
    // v = V (1 - exp(-t/RC))
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 1 µF}
analysis: {transient: {duration: 5 ms, start: zero, accuracy: 1e-6}}
readings:
  one: {signal: voltage at b, take: value_at, at: 1 ms}
  two: {signal: current through r, take: value_at, at: 2 ms}
  half: {signal: voltage at b, take: first_time, rises_to: 5 V}
  heat: {signal: energy in r, take: final}
",
        &[],
    ));
    let charge = |t: f64| 10.0 * (1.0 - (-t / 1e-3).exp());
    check(
        "RC charging",
        SOURCE,
        value(&out, "one"),
        charge(1e-3),
        Bound::Relative(1e-6),
    );
    check(
        "RC charging",
        SOURCE,
        value(&out, "two"),
        0.01 * (-2.0f64).exp(),
        Bound::Relative(1e-5),
    );
    check(
        "RC charging",
        SOURCE,
        value(&out, "half"),
        1e-3 * 2f64.ln(),
        Bound::Relative(1e-5),
    );
    let heat = 0.5 * 1e-6 * 100.0 * (1.0 - (-10.0f64).exp());
    check(
        "RC charging",
        SOURCE,
        value(&out, "heat"),
        heat,
        Bound::Relative(1e-5),
    );
}

#[test]
fn a_current_builds_up_in_an_inductor() {
    // i = V/R (1 - exp(-t R/L))
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 24 V}
  l: {kind: inductor, nodes: [a, ground], inductance: 2 H, series_resistance: 400 Ω}
analysis: {transient: {duration: 20 ms, start: zero, accuracy: 1e-6}}
readings:
  five: {signal: current through l, take: value_at, at: 5 ms}
  mean: {signal: current through l, take: mean, to: 10 ms}
",
        &[],
    ));
    let (tau, last) = (5e-3, 0.06);
    check(
        "RL build-up",
        SOURCE,
        value(&out, "five"),
        last * (1.0 - (-1.0f64).exp()),
        Bound::Relative(1e-6),
    );
    let mean = last * (1.0 - tau / 10e-3 * (1.0 - (-2.0f64).exp()));
    check(
        "RL build-up",
        SOURCE,
        value(&out, "mean"),
        mean,
        Bound::Relative(1e-6),
    );
}

#[test]
fn a_series_circuit_rings() {
    // Underdamped step response: v = V (1 - exp(-a t) (cos w t + a/w sin w t)), a = R/2L, w = sqrt(1/LC - a^2)
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 1 V}
  l: {kind: inductor, nodes: [a, b], inductance: 1 mH, series_resistance: 20 Ω}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 100 nF}
analysis: {transient: {duration: 1 ms, start: zero, accuracy: 1e-6}}
readings:
  peak: {signal: voltage at b, take: highest}
  when: {signal: voltage at b, take: value_at, at: 200 µs}
",
        &[],
    ));
    let (a, w0) = (20.0 / 2e-3, 1.0 / (1e-3f64 * 100e-9).sqrt());
    let w = (w0 * w0 - a * a).sqrt();
    let v = |t: f64| 1.0 - (-a * t).exp() * ((w * t).cos() + a / w * (w * t).sin());
    let top = std::f64::consts::PI / w;
    check(
        "RLC ringing",
        SOURCE,
        value(&out, "peak"),
        v(top),
        Bound::Relative(2e-6),
    );
    check(
        "RLC ringing",
        SOURCE,
        out.reading("peak").and_then(|r| r.time).expect("a peak"),
        top,
        Bound::Relative(1e-3),
    );
    check(
        "RLC ringing",
        SOURCE,
        value(&out, "when"),
        v(200e-6),
        Bound::Absolute(2e-6),
    );
}

#[test]
fn a_linear_coil_is_clamped_by_a_breakdown() {
    // i = (I0 + Vc/Rt) exp(-t Rt/L) - Vc/Rt, Rt = R + Rb: the breakdown's slope resistance is part of the loop. Its
    // softness of 26 mV does not show as long as i Rb is well above it.
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}
  l: {kind: inductor, nodes: [rail, drive], inductance: 1.2 H, series_resistance: 640 Ω}
  k: {kind: switch, nodes: [drive, ground], closed_resistance: 1 µΩ, open_resistance: 1 TΩ, transition: 1 ns,
      initially: closed, opens_at: [1 ms]}
  z: {kind: suppressor_diode, nodes: [drive, rail], directions: both, breakdown_voltage: 100 V, breakdown_resistance: 100 Ω}
analysis: {transient: {duration: 1.35 ms, accuracy: 1e-6}}
readings:
  release: {signal: current through l, take: time_until, falls_to: 7.5 mA, from: k opens}
  kick: {signal: voltage at drive, take: highest}
",
        &[],
    ));
    let (i0, tau, clamp): (f64, f64, f64) = (24.0 / 640.0, 1.2 / 740.0, 100.0 / 740.0);
    let release = tau * ((i0 + clamp) / (0.0075 + clamp)).ln();
    check(
        "clamped linear coil",
        SOURCE,
        value(&out, "release"),
        release,
        Bound::Relative(1e-5),
    );
    check(
        "clamped linear coil",
        SOURCE,
        value(&out, "kick"),
        124.0 + 100.0 * i0,
        Bound::Relative(1e-5),
    );
}

#[test]
fn an_ideal_transformer_of_coupled_inductors_transforms() {
    // Coefficient 1 and a resistive load: the load sees V n2/n1, the primary draws magnetizing current besides.
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: {sine: {amplitude: 10 V, frequency: 1 kHz}}}
  r: {kind: resistor, nodes: [a, p], resistance: 1 mΩ}
  t:
    kind: coupled_inductors
    coefficient: 1
    windings:
      one: {nodes: [p, ground], inductance: 10 mH}
      two: {nodes: [q, ground], inductance: 40 mH}
  load: {kind: resistor, nodes: [q, ground], resistance: 100 Ω}
analysis: {transient: {duration: 5 ms, start: zero, accuracy: 1e-5}}
readings:
  out: {signal: voltage at q, take: peak, from: 2 ms}
",
        &[],
    ));
    check(
        "coupled inductors of coefficient 1",
        SOURCE,
        value(&out, "out"),
        20.0,
        Bound::Relative(2e-4),
    );
}

#[test]
fn a_capacitor_across_an_ideal_source_draws_what_its_edge_asks() {
    // i = C dv/dt on the edge alone, energy C v^2/2; the current is fixed by the source's slope (index 2).
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: {steps: {at: [[0 s, 0 V], [1 ms, 24 V]], edge: 1 µs}}}
  c: {kind: capacitor, nodes: [a, ground], capacitance: 1 µF}
analysis: {transient: {duration: 2 ms}}
readings:
  most: {signal: current through c, take: highest}
  least: {signal: current through c, take: lowest}
  energy: {signal: energy in c, take: final}
",
        &[],
    ));
    let subject = "capacitor across an ideal source";
    check(
        subject,
        SOURCE,
        value(&out, "most"),
        24.0,
        Bound::Relative(1e-4),
    );
    check(
        subject,
        SOURCE,
        value(&out, "least"),
        0.0,
        Bound::Absolute(1e-3),
    );
    check(
        subject,
        SOURCE,
        value(&out, "energy"),
        288e-6,
        Bound::Relative(1e-4),
    );
}
