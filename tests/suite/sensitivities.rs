//! Guards: the derivatives that `run --sensitivity` gives are those of the readings. Against closed forms, and against
//! central differences of runs with the value a little larger and a little smaller, on every shipped netlist.

use crate::binary::{call, netlists_in};
use crate::netlists::{from_file, from_text};
use crate::record::{Bound, check};
use coilbreak::run::{Netlist, Outcome, Request, parameter, perform};
use std::ops::ControlFlow;

const SOURCE: &str = "closed form, elementary circuit theory";
const DIFFERENCES: &str = "central differences of runs at another value, extrapolated";

fn performed(netlist: &Netlist, request: &Request) -> Outcome {
    perform(netlist, request, &mut |_, _, _| ControlFlow::Continue(()))
        .unwrap_or_else(|failure| panic!("{}: {failure:?}", netlist.title))
}

fn differentiated(netlist: &mut Netlist, paths: &[&str]) -> Outcome {
    let value = |path: &&str| {
        parameter(netlist, path).unwrap_or_else(|diagnostic| panic!("{path}: {diagnostic:?}"))
    };
    let request = Request {
        sensitivity: paths.iter().map(value).collect(),
        ..Request::default()
    };
    performed(netlist, &request)
}

/// The derivative of a reading by a path.
fn derivative(outcome: &Outcome, reading: &str, path: &str) -> f64 {
    let found = outcome.sensitivities.iter();
    let mut found = found.filter(|one| one.reading == reading && one.path == path);
    let one = found.next().expect("it was asked for");
    one.value
        .unwrap_or_else(|| panic!("{reading} by {path}: {:?}", one.remark))
}

/// The first readings by name with their values.
fn values(outcome: &Outcome) -> Vec<f64> {
    outcome
        .readings
        .iter()
        .map(|reading| reading.value.unwrap_or(f64::NAN))
        .collect()
}

/// Error of a derivative.
const BOUND: f64 = 1e-4;
/// Noise of a run as a share of a reading, over its accuracy: what remains of it in a difference has nothing to do with
/// the derivative.
const NOISE: f64 = 2.0;
/// A coil on the smooth curve that rings through zero field: there the law's slope has a corner, and derivatives by what
/// changes the ring's pace lose an order with every passing. Of an energy that is a small rest of many rings
const OF_RINGS: f64 = 5e-3;
/// is left for these.
const RINGS: &[(&str, &[&str])] = &[(
    "driver_energy",
    &[
        "elements.k1_coil.self_capacitance",
        "cores.k1_core.gap",
        "materials.relay_iron.saturation",
    ],
)];

/// Differences of all readings over `2 share` of a value.
fn difference(netlist: &mut Netlist, path: &str, share: f64) -> Vec<f64> {
    let value = netlist
        .circuit
        .parameters
        .find(path)
        .expect("it was found before");
    let at = netlist.circuit.values()[value];
    let mut side = |factor: f64| {
        let set = netlist.circuit.set(&[(value, at * factor)]);
        assert!(set.is_ok(), "{path}");
        values(&performed(netlist, &Request::default()))
    };
    let (more, less) = (side(1.0 + share), side(1.0 - share));
    side(1.0);
    let pairs = more.iter().zip(&less);
    pairs
        .map(|(more, less)| (more - less) / (2.0 * share * at))
        .collect()
}

/// One derivative beside the one expected.
struct Row {
    words: String,
    found: f64,
    expected: f64,
    allowed: f64,
}

/// Every reading's derivatives by some paths beside differences.
fn compared(shipped: &Shipped) -> Vec<Row> {
    let file = format!("netlists/{}.yaml", shipped.name);
    let accuracy = format!("analysis.transient.accuracy={:e}", shipped.accuracy);
    let mut overrides = vec![accuracy.as_str()];
    overrides.extend(shipped.overrides);
    let paths = shipped.paths;
    let mut netlist = from_file(&file, &overrides);
    let outcome = differentiated(&mut netlist, paths);
    let mut rows = Vec::new();
    for path in paths {
        let whole = difference(&mut netlist, path, shipped.by);
        let half = difference(&mut netlist, path, 0.5 * shipped.by);
        let parameters = &netlist.circuit.parameters;
        let value = parameters.find(path).expect("it was found before");
        let at = netlist.circuit.values()[value].abs();
        for (k, reading) in outcome.readings.iter().enumerate() {
            let found = derivative(&outcome, &reading.name, path);
            let expected = (4.0 * half[k] - whole[k]) / 3.0;
            let ring = RINGS.iter().any(|(name, paths)| {
                *name == reading.name && paths.contains(path) && shipped.name == "relay_bare"
            });
            let bound = if ring { OF_RINGS } else { BOUND };
            let noise = NOISE * shipped.accuracy;
            let size = reading.value.expect("it has a value").abs();
            rows.push(Row {
                words: format!("{file}: {} by {path}", reading.name),
                found,
                expected,
                allowed: bound * expected.abs() + noise * size / (shipped.by * at),
            });
        }
    }
    rows
}

/// Asserts that every derivative lies within its bound of the one expected; all that do not are told.
fn all_within(rows: &[Row]) {
    for row in rows {
        let off = (row.found - row.expected).abs();
        if off > row.allowed {
            eprintln!(
                "{}: {:e} for {:e}, off by {:.1e} of it, allowed {:.1e}",
                row.words,
                row.found,
                row.expected,
                off / row.expected.abs(),
                row.allowed / row.expected.abs()
            );
        }
    }
    for row in rows {
        let bound = Bound::Absolute(row.allowed);
        check("sensitivities", DIFFERENCES, row.found, row.expected, bound);
    }
}

/// What is moved in a shipped netlist, and how.
struct Shipped {
    name: &'static str,
    accuracy: f64,
    /// Share by which values are moved for a difference; half of it serves to extrapolate to none.
    by: f64,
    overrides: &'static [&'static str],
    paths: &'static [&'static str],
}

/// Supply, coil, core, suppressor, switch.
const SHIPPED: &[Shipped] = &[
    Shipped {
        name: "relay_bare",
        accuracy: 1e-8,
        by: 1e-3,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "elements.k1_coil.resistance",
            "elements.k1_coil.self_capacitance",
            "cores.k1_core.gap",
            "materials.relay_iron.saturation",
            "elements.k1_driver.transition",
        ],
    },
    Shipped {
        name: "relay_diode",
        accuracy: 1e-8,
        by: 1e-3,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "elements.k1_coil.resistance",
            "cores.k1_core.gap",
            "parts.board_diode.series_resistance",
            "elements.k1_driver.closed_resistance",
            "ambient",
        ],
    },
    Shipped {
        name: "relay_diode_zener",
        accuracy: 1e-5,
        by: 1e-2,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "elements.k1_coil.resistance",
            "cores.k1_core.area",
        ],
    },
    Shipped {
        name: "relay_rc_snubber",
        accuracy: 1e-8,
        // A steepness is one order noisier than the waveform.
        by: 3e-3,
        overrides: &[],
        paths: &["elements.supply.voltage", "elements.k1_coil.resistance"],
    },
    Shipped {
        name: "relay_solid_core",
        accuracy: 1e-8,
        by: 1e-3,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "elements.k1_coil.resistance",
            "materials.relay_iron.resistivity",
            "cores.k1_core.gap",
        ],
    },
    // Supply, slug, its material, clamp.
    Shipped {
        name: "valve_slug",
        accuracy: 1e-8,
        by: 1e-3,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "cores.valve.core_length",
            "materials.soft_iron.saturation",
            "elements.clamp.breakdown_voltage",
        ],
    },
    Shipped {
        name: "valve_on_cable",
        accuracy: 1e-8,
        by: 1e-3,
        overrides: &[],
        paths: &[
            "elements.supply.voltage",
            "elements.lead.length",
            "elements.lead.inductance",
            "elements.y1_coil.resistance",
        ],
    },
    // The temperature moves the copper's resistance and its ladder together. The last passage of 0.5 V grazes a crest: its
    // derivative holds for less than a difference needs.
    Shipped {
        name: "flow_meter_coil",
        accuracy: 1e-8,
        by: 1e-4,
        overrides: &["readings.quiet.falls_to=5 V"],
        paths: &[
            "elements.supply.voltage",
            "elements.cable.capacitance",
            "elements.field.wire.diameter",
            "ambient",
        ],
    },
    Shipped {
        name: "relay_armature",
        accuracy: 1e-7,
        by: 1e-3,
        overrides: &[],
        paths: &["elements.supply.voltage", "parts.k1.armature.preload"],
    },
    Shipped {
        name: "coils_on_ac",
        accuracy: 1e-7,
        by: 1e-3,
        overrides: &[],
        paths: &["elements.mains.series_resistance", "parts.coil.resistance"],
    },
    // One period: its crests differ from those of the next by less than a difference moves them.
    Shipped {
        name: "buck_telemetry",
        accuracy: 1e-6,
        by: 1e-3,
        overrides: &[
            "analysis.transient.duration=98 µs",
            "readings.output.from=90 µs",
            "readings.ripple.from=91 µs",
            "readings.coil_ripple.from=90 µs",
            "readings.coil_peak.from=90 µs",
            "readings.saturated.from=90 µs",
        ],
        paths: &[
            "elements.supply.voltage",
            "elements.load.resistance",
            "elements.c_out.capacitance",
            "cores.l1_core.gap",
            "elements.chop.square.duty",
        ],
    },
];

#[test]
fn of_every_shipped_netlist_are_those_of_differences() {
    for path in netlists_in("netlists") {
        let name = path.file_stem().and_then(|name| name.to_str());
        let text = std::fs::read_to_string(&path).expect("a netlist is text");
        // How a periodic state moves with a parameter is not computed: asked for, it is refused.
        if !text.contains("transient:") || text.contains("start: steady_state") {
            continue;
        }
        // The highest crest of a shower of sparks jumps from one spark to another: it has no difference to compare.
        if text.contains("arc: {") {
            continue;
        }
        assert!(
            SHIPPED.iter().any(|shipped| Some(shipped.name) == name),
            "{} is not looked at",
            path.display()
        );
    }
    all_within(&SHIPPED.iter().flat_map(compared).collect::<Vec<Row>>());
}

#[test]
fn of_a_capacitor_that_charges_are_those_of_the_formula() {
    // v = V (1 - exp(-t/RC)), differentiated by V, R and C, and t = RC ln(V/(V - level)) by the same and the level.
    let mut netlist = from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 1 µF, initial_voltage: 1 V}
analysis: {transient: {duration: 5 ms, start: zero, accuracy: 1e-8}}
readings:
  at: {signal: voltage at b, take: value_at, at: 1 ms}
  half: {signal: voltage at b, take: first_time, rises_to: 5 V}
  mean: {signal: voltage at b, take: mean}
  heat: {signal: energy in r, take: final}
  first: {signal: current through r, take: highest}
",
        &[],
    );
    let paths = [
        "elements.s.voltage",
        "elements.r.resistance",
        "elements.c.capacitance",
        "elements.c.initial_voltage",
        "readings.half.rises_to",
        "readings.at.at",
        "analysis.transient.duration",
        "analysis.transient.accuracy",
    ];
    let outcome = differentiated(&mut netlist, &paths);
    let (v, r, c, v0, level, t, end) = (10.0f64, 1e3, 1e-6, 1.0, 5.0, 1e-3, 5e-3);
    let tau = r * c;
    let rest = |t: f64| (-t / tau).exp();
    let by_tau = -(v - v0) * rest(t) * t / tau / tau;
    let passing = ((v - v0) / (v - level)).ln();
    let late = rest(2.0 * end);
    // Mean v - (v - v0) tau/T (1 - exp(-T/tau)); heat C (v - v0)^2/2 (1 - exp(-2 T/tau)).
    let mean_by_end = (v - v0) * (tau / end / end * (1.0 - rest(end)) - rest(end) / end);
    let heat_by_end = (v - v0).powi(2) / r * late;
    for (reading, path, expected) in [
        ("at", paths[0], 1.0 - rest(t)),
        ("at", paths[1], by_tau * c),
        ("at", paths[2], by_tau * r),
        ("at", paths[3], rest(t)),
        ("at", paths[4], 0.0),
        ("at", paths[5], (v - v0) / tau * rest(t)),
        ("at", paths[6], 0.0),
        ("at", paths[7], 0.0),
        ("half", paths[0], tau / (v - v0) - tau / (v - level)),
        ("half", paths[1], c * passing),
        ("half", paths[2], r * passing),
        ("half", paths[3], -tau / (v - v0)),
        ("half", paths[4], tau / (v - level)),
        ("half", paths[5], 0.0),
        ("mean", paths[6], mean_by_end),
        ("mean", paths[0], 1.0 - tau / end * (1.0 - rest(end))),
        ("heat", paths[0], c * (v - v0) * (1.0 - late)),
        ("heat", paths[6], heat_by_end),
        ("first", paths[1], -(v - v0) / r / r),
    ] {
        check(
            "sensitivities",
            SOURCE,
            derivative(&outcome, reading, path),
            expected,
            Bound::Absolute(2e-6 * expected.abs() + 1e-12),
        );
    }
}

#[test]
fn of_an_ideal_edge_and_a_watched_switch_are_those_of_the_formula() {
    // The switch closes at t0 = -RC ln(1 - 5/V) when b has risen to 5 V, and then puts V/2 on the load d at once.
    let mut netlist = from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  r: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  c: {kind: capacitor, nodes: [b, ground], capacitance: 1 µF}
  k: {kind: switch, nodes: [a, d], closed_resistance: 1 kΩ, open_resistance: 1 GΩ, transition: 0 s, initially: open,
      watches: {signal: voltage at b, closes_above: 5 V, opens_below: 1 V}}
  load: {kind: resistor, nodes: [d, ground], resistance: 1 kΩ}
analysis: {transient: {duration: 2 ms, start: zero, accuracy: 1e-8}}
readings:
  closes: {signal: voltage at d, take: first_time, rises_to: 2 V}
  sum:    {signal: voltage at d, take: integral}
  after:  {signal: voltage at b, take: value_at, at: k closes}
  long:   {signal: voltage at d, take: time_above, level: 2 V}
",
        &[],
    );
    let paths = ["elements.r.resistance", "elements.k.watches.closes_above"];
    let outcome = differentiated(&mut netlist, &paths);
    let by = [1e-6 * 2.0f64.ln(), 1e-3 / 5.0];
    for (path, by) in paths.iter().zip(by) {
        // The voltage at b rises by 5 kV/s as it passes 5 V, and does so before and after the edge: what moves the edge does
        // not move the voltage there. Before the edge a millionth of the voltage is on the load.
        let rise = 5e3;
        for (reading, expected, allowed) in [
            ("closes", by, 1e-6 * by),
            ("sum", -5.0 * by, 5e-6 * 5.0 * by),
            (
                "after",
                if *path == paths[1] { 1.0 } else { 0.0 },
                BOUND * rise * by,
            ),
            ("long", -by, 1e-6 * by),
        ] {
            check(
                "sensitivities",
                SOURCE,
                derivative(&outcome, reading, path),
                expected,
                Bound::Absolute(allowed),
            );
        }
    }
}

#[test]
fn of_a_circuit_at_rest_are_those_of_the_formula() {
    // v = V b/(a + b)
    let mut netlist = from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: 10 V}
  a: {kind: resistor, nodes: [a, b], resistance: 1 kΩ}
  b: {kind: resistor, nodes: [b, ground], resistance: 3 kΩ}
analysis: operating_point
readings: {v: {signal: voltage at b, take: final}}
",
        &[],
    );
    let paths = [
        "elements.s.voltage",
        "elements.a.resistance",
        "elements.b.resistance",
    ];
    let outcome = differentiated(&mut netlist, &paths);
    let expected = [0.75, -10.0 * 3e3 / 16e6, 10.0 * 1e3 / 16e6];
    for (path, expected) in paths.iter().zip(expected) {
        let found = derivative(&outcome, "v", path);
        check(
            "sensitivities",
            SOURCE,
            found,
            expected,
            Bound::Relative(1e-7),
        );
    }
}

#[test]
fn a_tie_of_two_peaks_has_no_derivative_and_says_so() {
    // 1 V and then -1 V, with nothing in series: a little more or less there lifts one magnitude above the other.
    let mut netlist = from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: {steps: {at: [[0 s, 1 V], [1 ms, -1 V]], edge: 1 µs}}}
  o: {kind: voltage_source, nodes: [b, a], voltage: 0 V}
  r: {kind: resistor, nodes: [b, ground], resistance: 1 kΩ}
analysis: {transient: {duration: 2 ms}}
readings:
  peak: {signal: voltage at b, take: peak}
  high: {signal: voltage at b, take: highest}
",
        &[],
    );
    let path = "elements.o.voltage";
    let outcome = differentiated(&mut netlist, &[path]);
    let found = |reading: &str| {
        let found = outcome.sensitivities.iter();
        let mut found = found.filter(|one| one.reading == reading);
        found.next().expect("it was asked for").clone()
    };
    let (peak, high) = (found("peak"), found("high"));
    assert!(peak.value.is_none() && peak.remark.is_some(), "{peak:?}");
    let high = high.value.expect("there is one highest crest");
    check("sensitivities", SOURCE, high, 1.0, Bound::Absolute(1e-5));
}

#[test]
fn the_command_prints_a_table_and_json_and_refuses_what_is_not_there() {
    let path = "elements.k1_coil.resistance";
    let file = "netlists/relay_diode.yaml";
    let called = call(&[
        "run",
        file,
        "--sensitivity",
        path,
        "elements.supply.voltage",
    ]);
    assert_eq!(called.code, Some(0), "{}", called.err);
    for piece in ["Sensitivities", path, "elements.supply.voltage", "+1 %"] {
        assert!(called.out.contains(piece), "{}", called.out);
    }
    let json = call(&["run", file, "--json", "--sensitivity", path]).json();
    let one = &json["sensitivities"]["release"][path];
    assert_eq!(one["unit"], "s/Ω");
    assert!(one["value"].as_f64().is_some_and(|value| value < 0.0));
    assert!(call(&["run", file, "--json"]).json()["sensitivities"].is_null());

    let called = call(&["run", file, "--sensitivity", "elements.k1_coil.resistence"]);
    assert_eq!(called.code, Some(2));
    assert!(called.err.contains("error[unknown-path]"), "{}", called.err);
    assert!(
        called
            .err
            .contains("did you mean `elements.k1_coil.resistance`?")
    );
    let json = call(&["run", file, "--json", "--sensitivity", "nothing"]).json();
    assert_eq!(json["diagnostics"][0]["word"], "unknown-path");
    assert_eq!(json["diagnostics"][0]["file"], "--sensitivity");
}
