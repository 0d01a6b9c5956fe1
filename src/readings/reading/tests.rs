//! Readings as they are written, and what is said of wrong ones.

use super::*;
use crate::diag::{Sink, Sources};
use crate::netlist::{Reader, read_document};
use crate::signals::{EventLog, Piece};

const TOP: &[Key] = &[KEY];

/// Reads `readings:` of a text; the readings with the nominal values, and the messages as `line: headline | label`.
fn read(text: &str) -> (Vec<Reading>, Values, Vec<String>) {
    let (mut sources, sink) = (Sources::new(), Sink::new());
    let document =
        read_document("test.yaml", text.as_bytes(), &mut sources, &sink).expect("a document");
    let reader = Reader::new(&sink);
    let top = Fields::new(&document.root, "", TOP, &reader);
    let readings = read_readings(&top);
    top.finish();
    let messages = sink.sorted().into_iter().map(|diagnostic| {
        let (span, label) = diagnostic.labels.first().cloned().unwrap_or_default();
        let help = diagnostic.help.join("; ");
        format!(
            "{}: {} | {} `{}` | {help}",
            sources.place(span).line,
            diagnostic.headline,
            label,
            sources.slice(span)
        )
    });
    let messages = messages.collect();
    let values = reader.parameters.borrow().nominal();
    (readings, values, messages)
}

#[test]
fn the_example_of_the_design_is_read() {
    let (readings, values, messages) = read(
        "readings:
  kick: {signal: voltage at drive, take: highest, from: k1_driver opens}
  release: {signal: winding current of k1_coil, take: time_until, falls_to: 8 mA, from: 20 ms, to: 0.1 s}
  start: {signal: current through k1_coil, take: value_at, at: k1_driver opens 2}
",
    );
    assert_eq!(messages, Vec::<String>::new());
    let names: Vec<&str> = readings
        .iter()
        .map(|reading| reading.name.text.as_str())
        .collect();
    assert_eq!(names, ["kick", "release", "start"]);
    assert_eq!(readings[0].result(), units::VOLTAGE);
    assert_eq!(readings[1].result(), units::TIME);
    let mut taking = readings[1].start(&values);
    taking.feed(
        &Piece::sampled(0.0, 0.1, |t| 0.06 - t),
        &EventLog::default(),
    );
    let (value, time) = taking.finish().value_and_time();
    assert!(
        (value.expect("it falls") - 0.032).abs() < 1e-15
            && (time.expect("when") - 0.052).abs() < 1e-15
    );
    let events: Vec<String> = readings[2]
        .events()
        .filter_map(|at| Some(at.event()?.0.to_string()))
        .collect();
    assert_eq!(events, ["k1_driver opens 2", "k1_driver opens 2"]);
}

#[test]
fn a_level_and_a_time_are_parameters_with_paths() {
    let (mut sources, sink) = (Sources::new(), Sink::new());
    let text =
        "readings: {r: {signal: voltage at a, take: time_above, level: 5 V ± 10 %, from: 2 ms}}";
    let document = read_document("t", text.as_bytes(), &mut sources, &sink).expect("a document");
    let reader = Reader::new(&sink);
    let readings = read_readings(&Fields::new(&document.root, "", TOP, &reader));
    let parameters = reader.parameters.borrow();
    let level = parameters.find("readings.r.level").expect("a path");
    assert_eq!(
        (parameters.get(level).nominal, parameters.get(level).spread),
        (5.0, (4.5, 5.5))
    );
    assert!(parameters.find("readings.r.from").is_some());
    let mut values = parameters.nominal();
    values.set(level, 1.0);
    let mut taking = readings[0].start(&values);
    taking.feed(&Piece::constant(0.0, 0.5, 3.0), &EventLog::default());
    assert!(
        taking
            .finish()
            .value_and_time()
            .0
            .is_some_and(|time| (time - 0.498).abs() < 1e-15)
    );
}

/// Each fault with its line, its text and what would be right.
#[test]
fn wrong_readings_are_told_what_is_wrong() {
    let cases = [
        (
            "signal: voltage on a, take: mean",
            "`voltage on a` is not a signal | did you mean `voltage at a`? `on` | `voltage at a`",
        ),
        (
            "signal: voltage at a, take: average",
            "take is one of highest",
        ),
        ("take: mean", "`signal`"),
        ("signal: voltage at a", "`take`"),
        (
            "signal: voltage at a, take: mean, level: 5 V",
            "`take: mean` does not use `level` | it uses `from`, `to` `5 V` | ",
        ),
        (
            "signal: voltage at a, take: time_above",
            "`take: time_above` needs `level` | `level` is missing `time_above` | for instance `level: 5 V`",
        ),
        (
            "signal: voltage at a, take: value_at, from: 1 s, at: 2 s",
            "`take: value_at` does not use `from`",
        ),
        (
            "signal: voltage at a, take: time_until",
            "`take: time_until` needs `falls_to` or `rises_to`",
        ),
        (
            "signal: voltage at a, take: time_until, falls_to: 1 V, rises_to: 2 V",
            "`take: time_until` takes one of `rises_to` and `falls_to`, got both",
        ),
        (
            "signal: voltage at a, take: time_until, falls_to: 8 mA",
            "falls_to takes V, got 8 mA, a current",
        ),
        (
            "signal: voltage at a, take: mean, from: k1 open",
            "`k1 open` is not an instant | did you mean `k1 opens`? `open` | `k1 opens`",
        ),
        (
            "signal: voltage at a, take: mean, from: 20",
            "from takes s, got 20 without a unit",
        ),
        (
            "signal: voltage at a, take: mean, from: -2 ms",
            "from must be zero or more, got -2 ms",
        ),
        (
            "signal: voltage at a, take: mean, from: 2 ms, to: 1 ms",
            "the window ends before it begins",
        ),
        (
            "signal: voltage at a, take: mean, until: 1 ms",
            "`until` is no key of `readings.r`",
        ),
        ("signal: [a], take: mean", "signal takes a text, got a list"),
        (
            "signal: voltage at a, take: mean, from: [1 ms]",
            "from takes s, got a list",
        ),
    ];
    for (reading, wanted) in cases {
        let (readings, _, messages) = read(&format!("\nreadings:\n  r: {{{reading}}}\n"));
        assert_eq!(messages.len(), 1, "{reading}: {messages:?}");
        assert!(
            messages[0].starts_with("3: ") && messages[0].contains(wanted),
            "{reading}: {}",
            messages[0]
        );
        assert!(
            readings.is_empty() || wanted.contains("no key"),
            "{reading}"
        );
    }
}

#[test]
fn at_rest_every_reading_takes_the_signal_itself() {
    let (readings, _, _) = read(
        "readings: {r: {signal: voltage at a, take: time_until, falls_to: 1 V, from: s opens}}",
    );
    let mut taking = readings[0].start_at_rest();
    taking.feed(&Piece::instant(0.0, 4.5), &EventLog::default());
    let outcome = taking.finish();
    assert_eq!(
        (outcome.value_and_time().0, outcome.kind),
        (Some(4.5), units::VOLTAGE)
    );
}
