//! Guards: the face of the program. Exit codes, one JSON object with the fixed names, standard input, overrides, no
//! colour in a pipe, quiet ends, files whole or not at all.

use crate::binary::{call, call_with_input, caught, command, folder, text};
use serde_json::Value;
use std::path::Path;

const DIODE: &str = "netlists/relay_diode.yaml";
const BARE: &str = "netlists/relay_bare.yaml";

/// Coils on a table: no source, no ground, no analysis.
const COILS: &str = "\
materials:
  iron: {initial_permeability: 3000, saturation: 1.5 T}
cores:
  core: {shape: effective, length: 60 mm, area: 50 mm², gap: 0.15 mm, material: iron}
elements:
  k1: {kind: coil, nodes: [a, b], core: core, turns: 4000, resistance: 400 Ω, self_capacitance: 80 pF}
  k2: {kind: coil, nodes: [c, d], core: core, turns: 100, resistance: 4 Ω, self_capacitance: 0 F}
";

fn keys(value: &Value) -> Vec<&str> {
    let object = value
        .as_object()
        .unwrap_or_else(|| panic!("no object: {value}"));
    object.keys().map(String::as_str).collect()
}

#[test]
fn exit_codes_say_how_it_ended() {
    for (arguments, code) in [
        (vec!["run", DIODE], 0),
        (vec!["check", DIODE], 0),
        (vec!["coil", DIODE], 0),
        (vec!["run", BARE], 1),
        (vec!["run", "tests/netlists/faulty/unit_missing.yaml"], 2),
        (
            vec!["check", "tests/netlists/faulty/loop_with_inductor.yaml"],
            2,
        ),
        (vec!["run", "tests/netlists/odd/positive_feedback.yaml"], 3),
        (vec!["run", "no/such/file.yaml"], 4),
        (vec!["run", "netlists"], 4),
        (vec!["run", DIODE, "--out", "netlists/relay_diode.yaml"], 4),
        (
            vec!["run", DIODE, "--out", "netlists/relay_diode.yaml/below"],
            4,
        ),
        (vec![], 2),
        (vec!["rn", DIODE], 2),
        (vec!["run"], 2),
        (vec!["run", DIODE, "--jsn"], 2),
        (vec!["run", DIODE, "--set"], 2),
    ] {
        let called = call(&arguments);
        assert_eq!(called.code, Some(code), "{arguments:?}: {}", called.err);
        // An end that is not a result says why, and prints no half result.
        if code >= 2 {
            assert!(
                called.out.is_empty() && !called.err.is_empty(),
                "{arguments:?}"
            );
        }
    }
}

#[test]
fn the_answer_comes_first() {
    let called = call(&["run", BARE]);
    let first = called.out.lines().next().unwrap_or("");
    for piece in [
        "Sluice relay K1 without a suppressor",
        "driver_voltage",
        "60 V",
        "margin",
        "DOES NOT HOLD",
    ] {
        assert!(first.contains(piece), "{first}");
    }
    let called = call(&["run", DIODE]);
    assert!(called.out.lines().next().unwrap_or("").contains("holds"));
}

#[test]
fn run_prints_one_object_with_the_fixed_names() {
    let called = call(&["run", DIODE, "--json"]);
    assert!(called.err.is_empty(), "{}", called.err);
    let json = called.json();
    assert_eq!(
        keys(&json),
        [
            "title",
            "analysis",
            "readings",
            "limits",
            "ratings",
            "ledger",
            "estimated_core_loss",
            "coils",
            "steady_state",
            "cautions",
            "defaults",
            "sensitivities"
        ]
    );
    assert_eq!(
        keys(&json["analysis"]),
        [
            "kind",
            "duration",
            "accepted_steps",
            "rejected_steps",
            "newton_iterations",
            "reached",
            "interrupted"
        ]
    );
    assert_eq!(json["analysis"]["kind"], "transient");
    assert_eq!(json["analysis"]["duration"], 0.12);
    assert_eq!(
        keys(&json["readings"]["kick"]),
        ["value", "unit", "time", "error", "time_error"]
    );
    assert_eq!(json["readings"]["kick"]["unit"], "V");
    assert_eq!(keys(&json["limits"]), ["driver_voltage", "release_time"]);
    let limit = &json["limits"]["driver_voltage"];
    assert_eq!(keys(limit), ["value", "bound", "margin", "asked", "holds"]);
    // margin = (bound - value)/|bound|, a fraction.
    let number = |name: &str| limit[name].as_f64().expect("a number");
    let margin = (number("bound") - number("value")) / number("bound").abs();
    assert!((number("margin") - margin).abs() < 1e-12 && number("asked") == 0.2);
    assert_eq!(limit["holds"], true);
    assert_eq!(
        keys(&json["ratings"]["k1_driver"]["voltage"]),
        ["peak", "rated", "used", "time", "error"]
    );
    assert_eq!(keys(&json["ledger"]), ["elements", "imbalance"]);
    assert_eq!(
        keys(&json["ledger"]["elements"]["k1_coil"]),
        ["absorbed", "dissipated", "stored"]
    );
    assert!(json["steady_state"].is_null());
    check_coil(&json["coils"]["k1_coil"]);
    assert!(json["cautions"].is_array() && json["defaults"].is_array());
}

fn check_coil(coil: &Value) {
    assert_eq!(
        keys(coil),
        [
            "turns",
            "inductance_at_zero",
            "current_at_70_percent",
            "resistance",
            "time_constant",
            "operating_current",
            "stored_energy",
            "path",
            "mean_turn",
            "window_area",
            "fringing",
            "gaps",
            "moving_gap",
            "peak_flux_density",
            "curve",
            "copper"
        ]
    );
    assert_eq!(
        keys(&coil["path"]),
        ["length", "area", "smallest_area", "volume"]
    );
    assert_eq!(
        keys(&coil["fringing"]),
        ["rule", "factor", "band", "source"]
    );
    let curve = coil["curve"].as_array().expect("a list of points");
    assert_eq!(
        keys(&curve[0]),
        ["current", "flux_linkage", "inductance", "flux_density"]
    );
}

#[test]
fn check_prints_coils_and_every_default() {
    let called = call(&["check", DIODE]);
    for piece in [
        "sound, 4 elements",
        "k1_coil",
        "elements.catch.built_in_potential",
        "0.7 V",
    ] {
        assert!(called.out.contains(piece), "{}", called.out);
    }
    let json = call(&["check", DIODE, "--json"]).json();
    check_coil(&json["coils"]["k1_coil"]);
    let defaults = json["defaults"].as_array().expect("a list");
    assert!(
        defaults
            .iter()
            .any(|used| used["path"] == "elements.catch.band_gap" && used["value"] == "1.12 V")
    );
}

#[test]
fn what_goes_wrong_is_one_object_too() {
    for (arguments, code) in [
        (
            vec!["run", "tests/netlists/faulty/unit_missing.yaml", "--json"],
            2,
        ),
        (
            vec!["run", "tests/netlists/odd/positive_feedback.yaml", "--json"],
            3,
        ),
        (vec!["run", "no/such/file.yaml", "--json"], 4),
        (
            vec![
                "run",
                DIODE,
                "--json",
                "--out",
                "netlists/relay_diode.yaml/below",
            ],
            4,
        ),
        (vec!["coil", DIODE, "k2", "--json"], 2),
        (vec!["rn", "--json"], 2),
        (vec!["run", "--json"], 2),
    ] {
        let called = call(&arguments);
        assert_eq!(called.code, Some(code), "{arguments:?}");
        assert!(called.err.is_empty(), "{arguments:?}: {}", called.err);
        let json = called.json();
        assert_eq!(keys(&json), ["diagnostics"], "{arguments:?}");
        assert_eq!(
            keys(&json["diagnostics"][0]),
            [
                "word", "severity", "file", "line", "column", "headline", "help"
            ]
        );
        assert_eq!(json["diagnostics"][0]["severity"], "error");
    }
}

#[test]
fn a_dash_reads_standard_input() {
    let netlist =
        std::fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join(DIODE)).expect("it is shipped");
    let (piped, read) = (
        call_with_input(&["run", "-", "--json"], &netlist),
        call(&["run", DIODE, "--json"]),
    );
    assert_eq!(piped.code, Some(0), "{}", piped.err);
    assert_eq!(piped.out, read.out);
    let wrong = call_with_input(&["run", "-"], b"elements:\n  r: {kind: resistor}\n");
    assert_eq!(wrong.code, Some(2));
    assert!(
        wrong.err.contains("--> standard input:2:3"),
        "{}",
        wrong.err
    );
    // A text without a folder brings nothing.
    let brings = call_with_input(&["run", "-"], b"bring: [parts.yaml]\nelements: {}\n");
    assert_eq!(brings.code, Some(2), "{}", brings.err);
    assert!(brings.err.contains("bring"), "{}", brings.err);
}

#[test]
fn an_override_changes_the_result_and_adds_keys() {
    let kick = |overrides: &[&str]| {
        let mut arguments = vec!["run", BARE, "--json"];
        for assignment in overrides {
            arguments.extend(["--set", assignment]);
        }
        let json = call(&arguments).json();
        json["readings"]["kick"]["value"]
            .as_f64()
            .expect("the kick has a value")
    };
    let (plain, larger) = (kick(&[]), kick(&["elements.k1_coil.self_capacitance=8 nF"]));
    // A hundred times the capacitance takes the same energy at about a tenth of the voltage.
    assert!(
        plain > 1e4 && (0.08..0.13).contains(&(larger / plain)),
        "{plain} {larger}"
    );
    let broken_down = kick(&[
        "elements.k1_driver.breakdown_voltage=75 V",
        "elements.k1_driver.breakdown_resistance=2 Ω",
    ]);
    assert!((75.0..76.0).contains(&broken_down), "{broken_down}");
}

#[test]
fn a_pipe_gets_no_colour_and_no_progress() {
    for arguments in [
        vec!["run", DIODE],
        vec!["run", BARE],
        vec!["coil", DIODE],
        vec!["check", DIODE],
        vec!["run", "tests/netlists/faulty/five_errors.yaml"],
        vec!["--help"],
        vec!["rn"],
    ] {
        let called = call(&arguments);
        for output in [&called.out, &called.err] {
            assert!(
                !output.contains('\u{1b}') && !output.contains('\r'),
                "{arguments:?}: {output}"
            );
        }
    }
}

/// A reader that goes away ends the program without a word: `coilbreak coil ... | head -1`.
#[test]
fn a_closed_pipe_is_quiet() {
    for arguments in [
        vec!["coil", DIODE, "--json"],
        vec!["run", DIODE],
        vec!["--help"],
    ] {
        let mut child = command(&arguments).spawn().expect("the program starts");
        drop(child.stdout.take());
        let output = child.wait_with_output().expect("it ends");
        let told = String::from_utf8_lossy(&output.stderr);
        assert!(
            !told.contains("panicked") && !told.contains("pipe"),
            "{arguments:?}: {told}"
        );
        assert_ne!(output.status.code(), Some(101), "{arguments:?}");
    }
}

#[test]
fn help_is_printed_where_it_is_asked_for() {
    for arguments in [
        vec!["--help"],
        vec!["run", "--help"],
        vec!["coil", "-h"],
        vec!["--version"],
    ] {
        let called = call(&arguments);
        assert_eq!(called.code, Some(0), "{arguments:?}");
        assert!(
            !called.out.is_empty() && called.err.is_empty(),
            "{arguments:?}"
        );
    }
    let help = call(&["--help"]).out;
    for word in ["check", "coil", "run", "size"] {
        assert!(help.contains(word), "{help}");
    }
    let run = call(&["run", "--help"]).out;
    for word in ["--set", "--json", "--out", "standard input"] {
        assert!(run.contains(word), "{run}");
    }
}

#[test]
fn coils_need_neither_source_nor_ground() {
    let called = call_with_input(&["coil", "-", "--json"], COILS.as_bytes());
    assert_eq!(called.code, Some(0), "{}", called.err);
    let json = called.json();
    assert_eq!(keys(&json), ["coils"]);
    assert_eq!(keys(&json["coils"]), ["k1", "k2"]);
    for name in ["k1", "k2"] {
        check_coil(&json["coils"][name]);
        // Nothing drives them.
        assert!(json["coils"][name]["operating_current"].is_null());
        assert!(json["coils"][name]["stored_energy"].is_null());
    }
    // On one core inductance goes with the square of the turns.
    let inductance = |name: &str| {
        json["coils"][name]["inductance_at_zero"]
            .as_f64()
            .expect("a number")
    };
    assert!((inductance("k1") / inductance("k2") / 1600.0 - 1.0).abs() < 1e-9);
    // The other commands still ask for a circuit.
    let check = call_with_input(&["check", "-"], COILS.as_bytes());
    assert!(
        check.code == Some(2) && check.err.contains("missing-ground"),
        "{}",
        check.err
    );
}

#[test]
fn coil_takes_a_name_and_leaves_a_picture() {
    let one = call_with_input(&["coil", "-", "k2", "--json"], COILS.as_bytes()).json();
    assert_eq!(keys(&one["coils"]), ["k2"]);
    let unknown = call_with_input(&["coil", "-", "k3"], COILS.as_bytes());
    assert_eq!(unknown.code, Some(2));
    assert!(
        unknown.err.contains("there is no coil `k3`"),
        "{}",
        unknown.err
    );
    let none = call_with_input(
        &["coil", "-"],
        b"elements:\n  r: {kind: resistor, nodes: [a, ground], resistance: 1 \xCE\xA9}\n",
    );
    assert!(
        none.code == Some(2) && none.err.contains("no coil"),
        "{}",
        none.err
    );
    let folder = folder();
    let called = call_with_input(
        &["coil", "-", "k1", "--out", text(folder.path())],
        COILS.as_bytes(),
    );
    assert_eq!(called.code, Some(0), "{}", called.err);
    assert_eq!(names(folder.path()), ["coil_k1.png", "coil_k1.svg"]);
}

/// The names in a folder, sorted.
fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(folder)
        .expect("the folder is there")
        .map(|entry| {
            entry
                .expect("an entry")
                .file_name()
                .to_string_lossy()
                .into_owned()
        })
        .collect();
    names.sort();
    names
}

#[test]
fn run_leaves_its_files_and_the_same_ones_each_time() {
    let folder = folder();
    let (first, second) = (folder.path().join("a/new/one"), folder.path().join("b"));
    let printed = call(&["run", DIODE, "--json", "--out", text(&first)]);
    assert_eq!(printed.code, Some(0), "{}", printed.err);
    call(&["run", DIODE, "--out", text(&second)]);
    let left = names(&first);
    for needed in [
        "kick.png",
        "kick.svg",
        "run.png",
        "flux.svg",
        "energy.svg",
        "waveforms.csv",
        "result.json",
    ] {
        assert!(left.iter().any(|name| name == needed), "{left:?}");
    }
    assert_eq!(left, names(&second), "nothing else is left over");
    for name in &left {
        let read = |folder: &Path| std::fs::read(folder.join(name)).expect("it was left");
        assert!(read(&first) == read(&second), "{name} differs");
    }
    let kept = std::fs::read_to_string(first.join("result.json")).expect("it was left");
    assert_eq!(kept.trim_end(), printed.out.trim_end());
    let heading = std::fs::read_to_string(first.join("waveforms.csv")).expect("it was left");
    assert!(
        heading.starts_with("time [s],voltage at drive [V]"),
        "{heading:.60}"
    );
}

/// Where a file cannot take its place, the exit code says so and no piece of one is left.
#[test]
fn files_are_written_whole_or_not_at_all() {
    let folder = folder();
    let out = folder.path().join("out");
    std::fs::create_dir_all(out.join("kick.svg/in_the_way")).expect("the test's folder");
    let called = call(&["run", DIODE, "--out", text(&out)]);
    assert_eq!(called.code, Some(4), "{}", called.out);
    assert!(
        called.err.contains("kick.svg") && called.out.is_empty(),
        "{}{}",
        called.err,
        called.out
    );
    for name in names(&out) {
        let path = out.join(&name);
        if path.is_file() {
            let text = std::fs::read(&path).expect("it can be read");
            assert!(!text.is_empty(), "{name} is empty");
            assert!(
                ["result.json", "waveforms.csv"].contains(&name.as_str()),
                "{name} is a piece of something"
            );
        }
    }
    // A result that stands already is replaced whole.
    let again = folder.path().join("again");
    call(&["run", BARE, "--out", text(&again)]);
    call(&["run", DIODE, "--out", text(&again)]);
    let fresh = folder.path().join("fresh");
    call(&["run", DIODE, "--out", text(&fresh)]);
    let read = |folder: &Path| std::fs::read(folder.join("result.json")).expect("it was left");
    assert_eq!(read(&again), read(&fresh));
}

#[test]
fn no_colour_means_no_colour_whatever_the_terminal() {
    let mut plain = command(&["run", "tests/netlists/faulty/unit_missing.yaml"]);
    plain.env("NO_COLOR", "1").env("TERM", "xterm-256color");
    assert!(!caught(plain).err.contains('\u{1b}'));
}

const PAIR: &str = "
materials:
  ferrite: {initial_permeability: 2300, saturation: 0.45 T}
cores:
  pair: {shape: e_pair, width: 25 mm, height: 12.5 mm, depth: 7 mm, window_depth: 8.5 mm, window_width: 17.5 mm,
         leg_width: 7.5 mm, gap: [0.2 mm, 0.2 mm], spacer: 0.1 mm, material: ferrite}
elements:
  choke: {kind: coil, nodes: [a, b], core: pair, turns: 40, wire: {diameter: 0.5 mm}, self_capacitance: 10 pF}
";

#[test]
fn coil_tells_each_gap_and_the_rule_with_its_band_and_source() {
    let called = call_with_input(&["coil", "-"], PAIR.as_bytes());
    assert_eq!(called.code, Some(0), "{}", called.err);
    for piece in [
        "window 85.00 mm²",
        "gap in the centre leg of 300 µm at 52.50 mm²",
        "gap in the centre leg of 200 µm at 52.50 mm²",
        "gap in the outer legs of 100 µm at 52.50 mm²",
        "fringing by `muehlethaler`",
        "good to about 10 %",
        "J. Muehlethaler, J. W. Kolar, A. Ecklebe",
    ] {
        assert!(called.out.contains(piece), "{piece}: {}", called.out);
    }
    let json = call_with_input(&["coil", "-", "--json"], PAIR.as_bytes()).json();
    let choke = &json["coils"]["choke"];
    let gaps = choke["gaps"].as_array().expect("a list of gaps");
    assert_eq!(gaps.len(), 3);
    assert_eq!(keys(&gaps[0]), ["place", "length", "area", "factor"]);
    assert_eq!(choke["fringing"]["band"], 0.1);
    assert!(choke["moving_gap"].is_null());
    // The factor over all gaps is that of their reluctances: each at its own section.
    let of = |gap: &Value, name: &str| gap[name].as_f64().expect("a number");
    let straight: f64 = gaps
        .iter()
        .map(|gap| of(gap, "length") / of(gap, "area"))
        .sum();
    let fringed: f64 = gaps
        .iter()
        .map(|gap| of(gap, "length") / of(gap, "area") / of(gap, "factor"))
        .sum();
    assert!((of(&choke["fringing"], "factor") * fringed / straight - 1.0).abs() < 1e-12);
}
