//! Guards: `size` finds what the closed form gives, its worst corners can be run again, its netlist reproduces its
//! figures, and its JSON and exit codes are those of the contract.

use crate::binary::{call, call_with_input};
use crate::netlists::{from_file, from_text, outcome, value};
use crate::record::{Bound, check};
use coilbreak::sizing::{Candidate, Comparison, size};
use coilbreak::studies::{Side, Spread};
use serde_json::Value;
use std::collections::BTreeMap;

const RELAY: &str = "netlists/relay_diode.yaml";

fn sized(netlist: &coilbreak::run::Netlist) -> Comparison {
    size(netlist, &mut |_, _| std::ops::ControlFlow::Continue(()))
        .unwrap_or_else(|failure| panic!("{failure:?}"))
}

fn candidate<'a>(comparison: &'a Comparison, word: &str) -> &'a Candidate {
    let mut all = comparison.candidates.iter();
    all.find(|candidate| candidate.suppressor.word == word)
        .unwrap_or_else(|| panic!("no candidate {word}"))
}

/// The figures of a shipped part, as numbers without their SI prefixes.
type Part = BTreeMap<String, f64>;

fn parts(file: &str) -> BTreeMap<String, Part> {
    let text: serde_yaml::Value = serde_yaml::from_str(file).expect("a parts file is YAML");
    let number = |written: &serde_yaml::Value| {
        let text = match written {
            serde_yaml::Value::String(text) => text.clone(),
            serde_yaml::Value::Number(number) => number.to_string(),
            _ => return None,
        };
        let mut words = text.split(' ');
        let figure: f64 = words.next()?.parse().ok()?;
        let prefix = words.next().unwrap_or("").chars().next().unwrap_or(' ');
        let tens = match prefix {
            'f' => 1e-15,
            'p' => 1e-12,
            'n' => 1e-9,
            'µ' => 1e-6,
            'm' => 1e-3,
            _ => 1.0,
        };
        Some(figure * tens)
    };
    let entry = |(name, keys): (&serde_yaml::Value, &serde_yaml::Value)| {
        let keys = keys.as_mapping()?.iter();
        let figures =
            keys.filter_map(|(key, value)| Some((key.as_str()?.to_owned(), number(value)?)));
        Some((name.as_str()?.to_owned(), figures.collect()))
    };
    let all = text["parts"].as_mapping().expect("it has parts");
    all.iter().filter_map(entry).collect()
}

/// k T/q at 25 °C.
const THERMAL: f64 = 1.380_649e-23 * 298.15 / 1.602_176_634e-19;

/// Reverse voltage of a zener that carries a current, its breakdown `high` times the nominal one: the law of the
/// design, i = (s/Rb) ln(1 + exp((v - Vb)/s)), solved for v.
fn zener_voltage(part: &Part, high: f64, current: f64) -> f64 {
    let slope = part["breakdown_resistance"];
    let knee = high * part["breakdown_voltage"] - slope * part["breakdown_current"];
    knee + THERMAL * (current * slope / THERMAL).exp_m1().ln() + current * part["series_resistance"]
}

/// Forward voltage of a diode: i = Is (exp(v/(n k T/q)) - 1) behind its series resistance.
fn diode_voltage(part: &Part, current: f64) -> f64 {
    let slope = part["ideality_factor"] * THERMAL;
    slope * (current / part["saturation_current"]).ln_1p() + current * part["series_resistance"]
}

/// A linear coil on a driver that may see so much: 15 mA, which the smallest zeners of all voltages stand.
fn linear_coil(supply: f64, inductance: f64, limit: f64, tried: &str) -> String {
    format!(
        "elements:
  supply: {{kind: voltage_source, nodes: [rail, ground], voltage: {supply} V ± 10 %}}
  coil: {{kind: inductor, nodes: [rail, drive], inductance: {inductance} H, series_resistance: {} Ω}}
  stray: {{kind: capacitor, nodes: [rail, drive], capacitance: 20 pF}}
  driver: {{kind: switch, nodes: [drive, ground], closed_resistance: 1 mΩ, open_resistance: 100 MΩ, transition: 1 µs,
           initially: closed, ratings: {{voltage: {limit} V}}}}
sizing: {{coil: coil, switch: driver, operating_rate: 60 /h, release: {{current: 3 mA}}, margin: 20 %, try: [{tried}]}}
",
        supply / 0.015
    )
}

/// V (1 + 10 %) + Vd + Vz(1 + 5 %) at the highest current against the limit less 20 %: 32 sets of supply, inductance
/// and limit.
#[test]
fn the_zener_is_the_one_that_the_closed_form_gives() {
    let zeners = parts(include_str!("../../netlists/parts/zeners.yaml"));
    let diodes = parts(include_str!("../../netlists/parts/diodes.yaml"));
    let source = "V + Vd(I0) + Vz(I0) from the junction laws, parts files of the program";
    let mut sets = 0;
    for (supply, limits) in [
        (5.0, [30.0, 40.0, 47.0, 60.0, 75.0, 80.0, 90.0, 100.0]),
        (12.0, [40.0, 50.0, 55.0, 65.0, 70.0, 85.0, 95.0, 110.0]),
        (24.0, [55.0, 60.0, 70.0, 77.0, 84.0, 96.0, 105.0, 120.0]),
        (36.0, [70.0, 75.0, 88.0, 98.0, 104.0, 113.0, 125.0, 150.0]),
    ] {
        for (k, limit) in limits.into_iter().enumerate() {
            let inductance = [0.02, 0.5, 3.0][k % 3];
            let netlist = from_text(&linear_coil(supply, inductance, limit, "diode_zener"), &[]);
            let comparison = sized(&netlist);
            let found = candidate(&comparison, "diode_zener");
            assert!(found.holds(), "{supply} V against {limit} V");
            let names: Vec<String> = found.fitted.iter().map(|f| f.filling.shown()).collect();
            let current = 1.1 * 0.015;
            let diode = &diodes[&names[0]];
            let highest = |zener: &Part| {
                1.1 * supply + diode_voltage(diode, current) + zener_voltage(zener, 1.05, current)
            };
            let same_size = |name: &&String| name.ends_with(&names[1][names[1].len() - 4..]);
            let wanted = zeners
                .iter()
                .filter(|(name, zener)| same_size(name) && highest(zener) <= 0.8 * limit)
                .max_by(|a, b| a.1["breakdown_voltage"].total_cmp(&b.1["breakdown_voltage"]))
                .unwrap_or_else(|| panic!("no zener for {supply} V against {limit} V"));
            assert_eq!(
                &names[1], wanted.0,
                "{supply} V against {limit} V, {inductance} H"
            );
            // The voltage itself: the stray capacitance and the opening's microsecond take nothing visible of it.
            let checks = found.checks.iter();
            let number = checks
                .take_while(|check| check.name != "driver.voltage")
                .count();
            let study = found.study.as_ref().expect("it holds, so it was simulated");
            let reached = study.verdict(number).value.expect("a voltage has a peak");
            check(
                "clamped voltage",
                source,
                reached,
                highest(wanted.1),
                Bound::Relative(2e-3),
            );
            sets += 1;
        }
    }
    assert!(sets >= 30);
}

/// The margin at the worst corner that is told is the one that a run with these very values gives.
#[test]
fn a_worst_corner_can_be_run_again() {
    let comparison = sized(&from_file(RELAY, &[]));
    for word in ["diode", "diode_zener", "suppressor_diode_across_switch"] {
        let found = candidate(&comparison, word);
        let study = found.study.as_ref().expect("it was simulated");
        let (document, _) = comparison.document(found);
        let number = found
            .checks
            .iter()
            .position(|check| check.name == "driver_voltage");
        let number = number.expect("the netlist has this limit");
        let corner = study.worst.corner(number);
        let values: Vec<String> = found
            .spreads
            .iter()
            .zip(corner)
            .map(|(spread, side)| written(spread, *side))
            .collect();
        let values: Vec<&str> = values.iter().map(String::as_str).collect();
        let out = outcome(&from_text(&document.to_yaml(), &values));
        let limit = out
            .limits
            .iter()
            .find(|limit| limit.name == "driver_voltage");
        let again = limit
            .and_then(|limit| limit.verdict.value)
            .expect("it is judged");
        let told = study.verdict(number).value.expect("it is judged");
        assert!(
            (again / told - 1.0).abs() < 1e-3,
            "{word}: {again} for {told}"
        );
        for (spread, side) in found.spreads.iter().zip(corner) {
            assert!(
                *side != Side::Nominal,
                "{word}: {} is not at an end",
                spread.path
            );
        }
    }
}

fn written(spread: &Spread, side: Side) -> String {
    format!(
        "{}={:e} {}",
        spread.path,
        spread.at(side),
        spread.kind.symbol
    )
}

/// Peak voltage, release time and energy of a candidate against the same netlist run by itself.
#[test]
fn a_candidates_netlist_gives_its_figures() {
    let comparison = sized(&from_file("netlists/relay_bare.yaml", &[]));
    for found in comparison
        .candidates
        .iter()
        .filter(|found| found.study.is_some())
    {
        let word = found.suppressor.word;
        let (document, _) = comparison.document(found);
        let out = outcome(&from_text(&document.to_yaml(), &[]));
        let nominal = found.study.as_ref().expect("filtered").nominal();
        let near = |a: f64, b: f64, bound: f64| (a - b).abs() <= bound * b.abs();
        let peak = value(&out, "sizing_peak_voltage");
        assert!(near(peak, nominal.peak_voltage, 2e-3), "{word}: {peak} V");
        let release = value(&out, "sizing_release");
        // A ringing current may be above its level last on either side.
        let other = out
            .reading("sizing_release_negative")
            .and_then(|reading| reading.value);
        let release = release.max(other.unwrap_or(0.0));
        let told = nominal.release.expect("it lets go");
        assert!(
            near(release, told, 2e-2),
            "{word}: {release} s for {told} s"
        );
        let added = found.fitted.iter().map(|fitted| {
            let account = out
                .accounts
                .iter()
                .find(|(name, _)| *name == fitted.element);
            account.expect("it is in the netlist").1.dissipated
        });
        let energy: f64 = added.sum();
        assert!(
            (energy - nominal.energy).abs() <= 5e-3 * nominal.energy + 1e-9,
            "{word}: {energy} J"
        );
    }
}

fn keys(value: &Value) -> Vec<&str> {
    let object = value
        .as_object()
        .unwrap_or_else(|| panic!("no object: {value}"));
    object.keys().map(String::as_str).collect()
}

#[test]
fn the_json_has_the_fields_of_the_contract_and_is_the_same_each_time() {
    let called = call(&["size", RELAY, "--json"]);
    assert_eq!(called.code, Some(0), "{}", called.err);
    let json = called.json();
    for key in ["candidates", "recommended", "front", "command"] {
        assert!(keys(&json).contains(&key), "{key}");
    }
    assert_eq!(json["command"], format!("coilbreak size {RELAY}"));
    let candidates = json["candidates"].as_array().expect("a list");
    let words: Vec<&str> = candidates
        .iter()
        .filter_map(|c| c["suppressor"].as_str())
        .collect();
    assert_eq!(
        words,
        [
            "none",
            "diode",
            "diode_resistor",
            "diode_zener",
            "suppressor_diode_across_coil",
            "suppressor_diode_across_switch",
            "rc_across_switch"
        ]
    );
    for candidate in candidates {
        for key in [
            "suppressor",
            "parts",
            "peak_voltage",
            "release_time",
            "energy_per_operation",
            "stress",
            "limits",
            "set_by",
            "holds",
            "why",
        ] {
            assert!(keys(candidate).contains(&key), "{key}");
        }
        for (name, limit) in candidate["limits"].as_object().expect("an object") {
            for key in ["value", "nominal_margin", "margin", "corner", "holds"] {
                assert!(keys(limit).contains(&key), "{name}.{key}");
            }
            let (nominal, worst) = (limit["nominal_margin"].as_f64(), limit["margin"].as_f64());
            assert!(worst <= nominal, "{name}: {limit}");
        }
        for (name, stress) in candidate["stress"].as_object().expect("an object") {
            for (rating, stress) in stress.as_object().expect("an object") {
                for key in ["peak", "average", "rated", "used"] {
                    assert!(keys(stress).contains(&key), "{name}.{rating}.{key}");
                }
            }
        }
    }
    let recommended = json["recommended"].as_str().expect("one holds");
    let chosen = candidates
        .iter()
        .find(|c| c["suppressor"] == recommended)
        .expect("it is listed");
    assert_eq!(chosen["holds"], true);
    assert!(chosen["set_by"]["part"].is_string() && chosen["set_by"]["rating"].is_string());
    // The front: nothing on it is beaten by anything, everything off it is.
    let front: Vec<&str> = json["front"]
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    let figures = |c: &Value| Some((c["release_time"].as_f64()?, c["peak_voltage"].as_f64()?));
    for one in candidates {
        let Some((time, voltage)) = figures(one) else {
            continue;
        };
        let beaten = candidates
            .iter()
            .filter_map(figures)
            .any(|(t, v)| t <= time && v <= voltage && (t < time || v < voltage));
        assert_eq!(
            front.contains(&one["suppressor"].as_str().expect("a word")),
            !beaten
        );
    }
    assert_eq!(call(&["size", RELAY, "--json"]).out, called.out);
}

#[test]
fn exit_codes_tell_whether_anything_holds() {
    let none = call(&[
        "size",
        RELAY,
        "--json",
        "--set",
        "limits.driver_voltage.at_most=30 V",
        "--set",
        "sizing.try=[none, diode_zener]",
    ]);
    assert_eq!(none.code, Some(1), "{}", none.err);
    let json = none.json();
    assert!(json["recommended"].is_null());
    for candidate in json["candidates"].as_array().expect("a list") {
        assert_eq!(candidate["holds"], false);
        let why = candidate["why"].as_str().expect("it says why");
        assert!(
            why.contains("driver_voltage is") && why.contains("margin"),
            "{why}"
        );
    }
    let unknown = call(&["size", RELAY, "--set", "sizing.try=[diode_zenner]"]);
    assert_eq!(unknown.code, Some(2));
    assert!(
        unknown.err.contains("did you mean `diode_zener`?"),
        "{}",
        unknown.err
    );
    let keep = call(&["size", RELAY, "--set", "sizing.keep=[cach]"]);
    assert_eq!(keep.code, Some(2));
    assert!(keep.err.contains("did you mean `catch`?"), "{}", keep.err);
    let nothing = call(&["size", "netlists/buck_telemetry.yaml"]);
    assert_eq!(nothing.code, Some(2));
    assert!(
        nothing.err.contains("does not say what to size"),
        "{}",
        nothing.err
    );
}

#[test]
fn a_bare_switch_that_nothing_bounds_is_not_recommended() {
    let text =
        linear_coil(24.0, 1.0, 60.0, "none, diode").replace(", ratings: {voltage: 60 V}", "");
    let called = call_with_input(&["size", "-", "--json"], text.as_bytes());
    let json = called.json();
    assert_eq!(json["recommended"], "diode", "{}", called.out);
    assert_eq!(json["candidates"][0]["holds"], false);
    let cautions = json["cautions"].to_string();
    assert!(cautions.contains("no-voltage-limit"), "{cautions}");
}

/// What is in the netlist already goes; what only looks so can be kept; limits that make no sense are named.
#[test]
fn what_is_taken_out_and_left_out_is_told() {
    let netlist = from_file(RELAY, &["readings.kick.from=19 ms", "sizing.try=[diode]"]);
    let comparison = sized(&netlist);
    let told = |word: &str| {
        let mut cautions = comparison.cautions.iter();
        cautions.any(|caution| caution.word == word)
    };
    assert!(told("taken-out") && told("limit-not-judged"));
    let found = candidate(&comparison, "diode");
    assert!(
        found
            .checks
            .iter()
            .all(|check| check.name != "driver_voltage")
    );
    assert!(
        found
            .checks
            .iter()
            .any(|check| check.name == "k1_driver.voltage")
    );
    let kept = sized(&from_file(
        RELAY,
        &["sizing.keep=[catch]", "sizing.try=[none]"],
    ));
    let bare = candidate(&kept, "none")
        .study
        .as_ref()
        .expect("it was simulated");
    assert!(bare.nominal().peak_voltage < 26.0);
}
