//! The netlist tool reaches what general-purpose solvers reach on hand-written equations of the same circuits.
//!
//! Laws: mu0 = 4e-7 pi; core B = mu0 H + Js H/(|H| + Ha), H length + B gap/mu0 = N i; switch with ln G linear in time
//! during a transition; diode Is (exp(v/(n k T/q)) - 1) at 300.15 K behind its series resistance, constant capacitance.

use crate::netlists::{from_file, from_text, outcome, time, value};
use crate::record::{Bound, check};
use coilbreak::run::Outcome;

const SOURCE: &str = "general-purpose solver at 1e-12, tests/data/peer_reference.json";

fn reference(case: &str, quantity: &str) -> f64 {
    let text = include_str!("../data/peer_reference.json");
    let json: serde_json::Value = serde_json::from_str(text).expect("the stored reference is JSON");
    json["cases"][case][quantity]
        .as_f64()
        .unwrap_or_else(|| panic!("{case} has no {quantity}"))
}

/// Every quantity of a relay case, as (name, reached, scale that its error is relative to).
fn relay(case: &str, out: &Outcome) -> Vec<(&'static str, f64, f64)> {
    let off = 0.02;
    let own = |name: &str| reference(case, name);
    let opening = own("i_at_opening");
    let mut all = vec![
        ("v_peak", value(out, "v_peak"), own("v_peak")),
        (
            "i_25ms",
            value(out, "i_25ms"),
            if case == "R2" { opening } else { own("i_25ms") },
        ),
        ("t_10pct", value(out, "t_10pct") - off, own("t_10pct")),
        ("i_at_opening", value(out, "i_at_opening"), opening),
        (
            "E_winding",
            400.0 * value(out, "i_rms").powi(2) * 0.04,
            own("E_winding"),
        ),
        ("E_switch", value(out, "E_switch"), own("E_switch")),
    ];
    if case == "R1" {
        // The ledger's own loss law, which leaves the capacitor's current out; before the opening the diode blocks
        // 24 V with its saturation current of 1 nA for 20 ms.
        let blocking = 1e-9 * 24.0 * 20e-3;
        let (_, account) = out
            .accounts
            .iter()
            .find(|(name, _)| name == "catch")
            .expect("the diode has an account");
        all.push(("E_diode", account.dissipated - blocking, own("E_diode")));
    } else {
        // R1's maximum is flat: its instant says nothing about accuracy.
        all.push(("t_peak", time(out, "v_peak") - off, own("t_peak")));
    }
    if case == "R3" {
        all.push((
            "E_snubber",
            470.0 * value(out, "snubber_rms").powi(2) * 0.04,
            own("E_snubber"),
        ));
    }
    all
}

fn worst(quantities: &[(&'static str, f64, f64)], case: &str) -> f64 {
    quantities
        .iter()
        .map(|(name, reached, scale)| ((reached - reference(case, name)) / scale).abs())
        .fold(0.0, f64::max)
}

const RELAYS: [(&str, &str); 3] = [("R1", "r1"), ("R2", "r2"), ("R3", "r3")];

#[test]
fn the_relay_cases_meet_the_reference_at_default_accuracy() {
    for (case, file) in RELAYS {
        let out = outcome(&from_file(
            &format!("tests/netlists/peers/{file}.yaml"),
            &[],
        ));
        for (name, reached, scale) in relay(case, &out) {
            let expected = reference(case, name);
            check(
                "relay turn-off against a general-purpose solver",
                SOURCE,
                (reached - expected) / scale,
                0.0,
                Bound::Absolute(1e-3),
            );
        }
        assert!(
            out.ledger.imbalance < 1e-3,
            "{case}: {:e}",
            out.ledger.imbalance
        );
    }
}

#[test]
fn the_buck_meets_the_reference_at_default_accuracy() {
    let out = outcome(&from_file("tests/netlists/peers/b.yaml", &[]));
    for name in ["vo_mean", "vo_ripple_pp", "i_L_peak", "P_diode", "E_diode"] {
        check(
            "buck converter against a general-purpose solver",
            SOURCE,
            value(&out, name),
            reference("B", name),
            Bound::Relative(1e-3),
        );
    }
    assert!(out.ledger.imbalance < 1e-3, "{:e}", out.ledger.imbalance);
}

/// The netlist of case R1 with what the diode's energy after the opening is made of.
fn with_the_diodes_energy(file: &str) -> String {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join(file);
    let text = std::fs::read_to_string(path).expect("the netlist is there");
    text + "  absorbed: {signal: power in catch, take: integral, from: driver opens}
  left: {signal: voltage across catch, take: final}
"
}

#[test]
fn the_bucks_error_falls_with_the_accuracy() {
    let mut last = f64::INFINITY;
    for accuracy in [1e-2, 1e-3, 1e-4, 1e-5, 1e-6] {
        let set = format!("analysis.transient.accuracy={accuracy:e}");
        let out = outcome(&from_file("tests/netlists/peers/b.yaml", &[&set]));
        let mut most = 0.0_f64;
        for name in ["vo_mean", "vo_ripple_pp", "i_L_peak", "P_diode", "E_diode"] {
            let (found, expected) = (value(&out, name), reference("B", name));
            check(
                "buck converter against a general-purpose solver",
                SOURCE,
                found,
                expected,
                Bound::Relative(10.0 * accuracy),
            );
            most = most.max((found / expected - 1.0).abs());
        }
        // Once it is a tenth of what was asked it may stay there.
        assert!(
            most < last.max(0.1 * accuracy),
            "{accuracy:e}: {most:e} after {last:e}"
        );
        last = most;
    }
}

#[test]
fn the_error_falls_with_the_accuracy() {
    for (case, file) in RELAYS {
        let errors: Vec<f64> = ["1e-3", "1e-5", "1e-6"]
            .iter()
            .map(|accuracy| {
                let set = format!("analysis.transient.accuracy={accuracy}");
                let file = format!("tests/netlists/peers/{file}.yaml");
                let netlist = if case == "R1" {
                    from_text(&with_the_diodes_energy(&file), &[&set])
                } else {
                    from_file(&file, &[&set])
                };
                let out = outcome(&netlist);
                let mut quantities = relay(case, &out);
                for (name, reached, _) in &mut quantities {
                    if *name == "E_diode" {
                        // What the diode absorbs after the opening, with what its capacitance of 20 pF held at -24 V
                        // and less what it holds in the end.
                        let held = |volts: f64| 0.5 * 20e-12 * volts * volts;
                        *reached = value(&out, "absorbed") + held(24.0) - held(value(&out, "left"));
                    }
                }
                worst(&quantities, case)
            })
            .collect();
        assert!(
            errors[1] < 0.1 * errors[0] && errors[2] < errors[1],
            "{case}: {errors:?}"
        );
        assert!(errors[2] < 1e-5, "{case}: {errors:?}");
    }
}
