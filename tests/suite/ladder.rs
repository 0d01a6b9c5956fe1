//! A line of many sections gives what a sparse general-purpose solver gives, by the dense and by the sparse path.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use std::fmt::Write as _;

const SOURCE: &str =
    "sparse general-purpose solver at 1e-12, case L, tests/data/peer_reference.json";

/// Case L: n sections of 1 uH + 0.1 ohm in series and 1 nF with 10 Mohm across, 50 ohm at both ends.
fn ladder(sections: usize) -> String {
    let mut text = String::from(
        "elements:
  source: {kind: voltage_source, nodes: [n0, ground], voltage: {points: [[0 s, 0 V], [1 µs, 1 V]]}, series_resistance: 50 Ω}
",
    );
    for k in 1..=sections {
        let before = k - 1;
        let _ = writeln!(
            text,
            "  l{k}: {{kind: inductor, nodes: [n{before}, n{k}], inductance: 1 µH, series_resistance: 0.1 Ω}}
  c{k}: {{kind: capacitor, nodes: [n{k}, ground], capacitance: 1 nF, leakage_resistance: 10 MΩ}}"
        );
    }
    let _ = writeln!(
        text,
        "  end: {{kind: resistor, nodes: [n{sections}, ground], resistance: 50 Ω}}
analysis: {{transient: {{duration: 4 µs, start: zero}}}}
readings:
  v1_1us: {{signal: voltage at n1, take: value_at, at: 1 µs}}
  v1_4us: {{signal: voltage at n1, take: final}}
  v50_4us: {{signal: voltage at n50, take: final}}
  v100_4us: {{signal: voltage at n100, take: final}}
  i1_4us: {{signal: current through l1, take: final}}"
    );
    text
}

#[test]
fn a_ladder_of_a_hundred_sections_meets_the_reference() {
    let json: serde_json::Value = serde_json::from_str(include_str!("../data/peer_reference.json"))
        .expect("the stored reference is JSON");
    let out = outcome(&from_text(&ladder(100), &[]));
    for name in ["v1_1us", "v1_4us", "v50_4us", "v100_4us", "i1_4us"] {
        let expected = json["ladder"]["100"][name].as_f64().expect("a number");
        check(
            "ladder against a sparse solver",
            SOURCE,
            value(&out, name),
            expected,
            Bound::Relative(1e-3),
        );
    }
    assert!(out.ledger.imbalance < 1e-3, "{:e}", out.ledger.imbalance);
}
