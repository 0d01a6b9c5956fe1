//! Guards: runs that take long. They can be interrupted and leave what was simulated, and their record stays small.

use crate::binary::{Called, call, command, folder, text};
use crate::netlists::{from_text, outcome};
use coilbreak::run::{Request, Stage, perform};
use std::ops::ControlFlow;

/// A coil and its stray capacitance that ring on for as long as `duration` says, without loss to speak of.
const RING: &str = "elements:
  s: {kind: current_source, nodes: [ground, a], current: {square: {low: 0 A, high: 1 mA, frequency: 20 kHz, duty: 50 %, edge: 1 µs}}}
  l: {kind: inductor, nodes: [a, ground], inductance: 1 mH, series_resistance: 10 Ω}
  c: {kind: capacitor, nodes: [a, ground], capacitance: 1 nF}
  k: {kind: switch, nodes: [a, ground], closed_resistance: 1 kΩ, open_resistance: 1 MΩ, transition: 1 µs,
      square: {frequency: 10 kHz, duty: 50 %}}
analysis: {transient: {duration: 10 s, accuracy: 1e-8, start: zero}}
readings:
  high: {signal: voltage at a, take: highest}
  late: {signal: voltage at a, take: highest, from: 9.9 s}
";

/// Starts the program on a netlist that takes minutes, interrupts it, and waits for its end.
#[cfg(unix)]
fn interrupted(arguments: &[&str], netlist: &str, after: std::time::Duration) -> Called {
    use std::process::{Command, Stdio};
    let files = folder();
    let path = files.path().join("long.yaml");
    std::fs::write(&path, netlist).expect("the folder can be written");
    let mut all = vec![arguments[0], text(&path)];
    all.extend(&arguments[1..]);
    let child = command(&all).spawn().expect("the program starts");
    std::thread::sleep(after);
    let number = child.id().to_string();
    let sent = Command::new("kill")
        .args(["-INT", &number])
        .stderr(Stdio::null())
        .status();
    assert!(sent.expect("a signal can be sent").success());
    let output = child.wait_with_output().expect("it ends");
    Called {
        code: output.status.code(),
        out: String::from_utf8(output.stdout).expect("the program writes UTF-8"),
        err: String::from_utf8(output.stderr).expect("the program writes UTF-8"),
    }
}

/// Interrupts a run once it is under way: on a busy machine the quick run before it takes longer.
#[cfg(unix)]
fn interrupted_on_its_way(arguments: &[&str], netlist: &str) -> Called {
    let mut wait = std::time::Duration::from_millis(1500);
    loop {
        let called = interrupted(arguments, netlist, wait);
        let early = called.out.contains("\"diagnostics\"") || called.err.contains("before there");
        if !early || wait.as_secs() > 60 {
            return called;
        }
        assert_eq!(called.code, Some(130));
        wait *= 2;
    }
}

#[cfg(unix)]
#[test]
fn an_interrupted_run_leaves_what_was_simulated_and_says_so() {
    let out = folder();
    let arguments = [
        "run",
        "--set",
        "analysis.transient.duration=300 ms",
        "--json",
        "--out",
        text(out.path()),
    ];
    let called = interrupted_on_its_way(&arguments, RING);
    assert_eq!(called.code, Some(130), "{}", called.err);
    let json = called.json();
    let analysis = &json["analysis"];
    assert_eq!(analysis["interrupted"], true);
    let reached = analysis["reached"].as_f64().expect("a number");
    assert!(reached > 0.0 && reached < 0.3, "{reached}");
    assert!(
        json["readings"]["high"]["value"]
            .as_f64()
            .expect("a number")
            > 0.0
    );
    assert!(json["readings"]["late"]["value"].is_null());
    // What lies in the folder is whole.
    let result = std::fs::read_to_string(out.path().join("result.json")).expect("it was written");
    assert_eq!(result, called.out);
    let table = std::fs::read_to_string(out.path().join("waveforms.csv")).expect("it was written");
    let columns = |line: &str| line.split(',').count();
    let mut lines = table.lines();
    let width = columns(lines.next().expect("headings"));
    let last = lines.last().expect("lines of numbers");
    assert_eq!(columns(last), width);
    let time: f64 = last
        .split(',')
        .next()
        .and_then(|t| t.parse().ok())
        .expect("a number");
    // The reader of the JSON may miss the last digit.
    assert!(
        (time - reached).abs() <= f64::EPSILON * reached,
        "{time} {reached}"
    );
    assert!(out.path().join("kick.svg").exists() || out.path().join("run.svg").exists());
}

#[cfg(unix)]
#[test]
fn an_interrupted_run_says_so_first() {
    let arguments = ["run", "--set", "analysis.transient.duration=300 ms"];
    let called = interrupted_on_its_way(&arguments, RING);
    assert_eq!(called.code, Some(130), "{}", called.err);
    let first = called.out.lines().next().unwrap_or("");
    assert!(first.starts_with("Interrupted after"), "{first}");
    assert!(first.contains("of 300 ms"), "{first}");
}

#[cfg(unix)]
#[test]
fn an_interrupted_sizing_ends_with_a_message() {
    let netlist =
        std::fs::read_to_string("netlists/valve_on_cable.yaml").expect("a shipped netlist");
    let start = std::time::Duration::from_millis(700);
    for json in [false, true] {
        let arguments: &[&str] = if json { &["size", "--json"] } else { &["size"] };
        let called = interrupted(arguments, &netlist, start);
        assert_eq!(called.code, Some(130), "{}", called.err);
        if json {
            assert_eq!(called.json()["diagnostics"][0]["word"], "interrupted");
        } else {
            assert!(called.out.is_empty());
            assert!(called.err.contains("interrupted before there was a result"));
        }
    }
}

#[test]
fn a_watcher_stops_a_run_at_its_next_step() {
    let netlist = from_text(RING, &["analysis.transient.duration=10 ms"]);
    let outcome = perform(&netlist, &Request::default(), &mut |stage, time, _| {
        if stage == Stage::Run && time > 1e-3 {
            ControlFlow::Break(())
        } else {
            ControlFlow::Continue(())
        }
    })
    .unwrap_or_else(|failure| panic!("{failure:?}"));
    assert!(outcome.interrupted());
    assert!(
        (1e-3..1.1e-3).contains(&outcome.reached),
        "{}",
        outcome.reached
    );
}

#[test]
fn a_long_run_records_little_and_counts_every_edge() {
    let netlist = |duration: &str| from_text(RING, &["analysis.transient.accuracy=1e-2", duration]);
    let short = outcome(&netlist("analysis.transient.duration=100 ms"));
    let long = outcome(&netlist("analysis.transient.duration=200 ms"));
    let pieces = |outcome: &coilbreak::run::Outcome| -> Vec<usize> {
        outcome
            .traces
            .iter()
            .map(|trace| trace.pieces.len())
            .collect()
    };
    let steps = long.work.expect("a transient").counted.accepted;
    for (short, long) in pieces(&short).into_iter().zip(pieces(&long)) {
        assert!(
            (long as f64) < 1.05 * short as f64,
            "{long} pieces after {short}"
        );
        assert!(
            10 * long < 9 * steps as usize,
            "{long} pieces of {steps} steps"
        );
    }
}

#[test]
fn an_event_late_in_a_long_run_is_found() {
    let text = RING.replace("from: 9.9 s", "from: k opens 1500, to: k closes 1501");
    let netlist = from_text(
        &text,
        &[
            "analysis.transient.duration=160 ms",
            "analysis.transient.accuracy=1e-2",
        ],
    );
    let outcome = outcome(&netlist);
    let late = outcome.reading("late").expect("the reading is there");
    let time = late.time.expect("it was found");
    assert!((0.1499..0.1501).contains(&time), "{time}");
}

#[test]
fn progress_stays_off_what_is_no_terminal() {
    let called = call(&["run", "netlists/relay_diode.yaml"]);
    assert!(!called.err.contains('\r') && !called.out.contains('\x1b'));
}
