//! Overrides and subtrees: what they change, and where their errors point.

use super::*;
use crate::diag::{Paint, draw_all};
use crate::netlist::{Fields, Key, Reader, Takes, read_document};
use crate::units::RESISTANCE;

const TEXT: &str = "elements:\n  catch: {part: board, at: [1 ms, 2 ms]}\n  load: {resistance: 4 Ω}\nparts:\n  board: {kind: diode}\n";

/// The document after an override, and the messages drawn.
fn after(assignment: &str) -> (Document, String) {
    let mut sources = Sources::new();
    let sink = Sink::new();
    let mut document =
        read_document("relay.yaml", TEXT.as_bytes(), &mut sources, &sink).expect("it has a tree");
    let done = document.set(assignment, &mut sources, &sink);
    assert_eq!(done, !sink.has_errors());
    (document, draw_all(&sink.sorted(), &sources, Paint::Plain))
}

#[test]
fn values_are_changed_and_added() {
    let cases = [
        (
            "elements.load.resistance=4.7 kΩ",
            "elements.load.resistance",
            "4.7 kΩ",
        ),
        (
            " elements.load.resistance = 4.7 kΩ ± 10 % ",
            "elements.load.resistance",
            "4.7 kΩ ± 10 %",
        ),
        (
            "elements.catch.series_resistance=-5 Ω",
            "elements.catch.series_resistance",
            "-5 Ω",
        ),
        ("elements.catch.at.1=7 ms", "elements.catch.at.1", "7 ms"),
        ("elements.catch.at=[3 ms]", "elements.catch.at.0", "3 ms"),
        (
            "elements.catch.ratings.voltage=60 V",
            "elements.catch.ratings.voltage",
            "60 V",
        ),
        (
            "elements.extra={kind: resistor}",
            "elements.extra.kind",
            "resistor",
        ),
        ("title=K1 = on", "title", "K1 = on"),
    ];
    for (assignment, path, value) in cases {
        let (document, drawn) = after(assignment);
        assert_eq!(
            document.at(path).and_then(Node::text),
            Some(value),
            "{assignment}: {drawn}"
        );
    }
}

#[test]
fn paths_that_lead_nowhere_are_refused_with_the_nearest() {
    let deep = format!("elements.load.{}x=1", "x.".repeat(100_000));
    let cases = [
        (
            "elements.cach.series_resistance=1 Ω",
            "did you mean `catch` for `cach`?",
        ),
        (
            "elemnts.catch.x=1",
            "did you mean `elements` for `elemnts`?",
        ),
        ("elements.qqqqqq.x=1", "`qqqqqq` is not there"),
        ("elements.catch.at.9=1 ms", "the list has 2 items"),
        ("elements.catch.at.x.y=1 ms", "the list has 2 items"),
        (
            "elements.load.resistance.low=1 Ω",
            "there is no mapping above `low`",
        ),
        ("elements.load.resistance", "an override is PATH=VALUE"),
        ("=5", "an override is PATH=VALUE"),
        ("a=", "an override is PATH=VALUE"),
        ("elements.load.resistance=[1, 2", "is not closed"),
        ("elements.load.resistance=&a 5", "anchors"),
        ("elements.load.resistance=a\0b", "control character"),
        ("elements..x=1", "`` is not there"),
        (&*deep, "more than 64 words deep"),
    ];
    for (assignment, piece) in cases {
        let (document, drawn) = after(assignment);
        assert!(drawn.contains(piece), "{assignment}:\n{drawn}");
        assert!(drawn.contains("--> --set:1:"), "{assignment}:\n{drawn}");
        assert_eq!(
            document.to_yaml(),
            after("elements.load.resistance=4 Ω").0.to_yaml()
        );
    }
}

#[test]
fn later_errors_point_into_the_override() {
    const KEYS: &[Key] = &[Key::optional(
        "resistance",
        Takes::Quantity(RESISTANCE),
        "its resistance",
    )];
    let mut sources = Sources::new();
    let sink = Sink::new();
    let mut document =
        read_document("relay.yaml", TEXT.as_bytes(), &mut sources, &sink).expect("it has a tree");
    document.set("elements.load.resistance=47 nF", &mut sources, &sink);
    document.set("elements.load.resistence=4 Ω", &mut sources, &sink);
    let reader = Reader::new(&sink);
    let fields = Fields::new(
        document.at("elements.load").expect("it is there"),
        "elements.load",
        KEYS,
        &reader,
    );
    fields.value("resistance");
    fields.finish();
    assert_eq!(
        draw_all(&sink.sorted(), &sources, Paint::Plain),
        "\
error[wrong-dimension]: resistance takes Ω, got 47 nF, a capacitance
  --> --set:1:26
   |
 1 | elements.load.resistance=47 nF
   |                          ^^^^^ a resistance is written in mΩ, Ω, kΩ, MΩ

error[unknown-key]: `resistence` is no key of `elements.load`
  --> --set:1:1
   |
 1 | elements.load.resistence=4 Ω
   | ^^^^^^^^^^^^^^^^^^^^^^^^ did you mean `resistance`, which is written already?
"
    );
}

#[test]
fn the_program_puts_subtrees_in_and_takes_them_out() {
    let mut sources = Sources::new();
    let sink = Sink::new();
    let mut document =
        read_document("relay.yaml", TEXT.as_bytes(), &mut sources, &sink).expect("it has a tree");
    let zener = read_fragment(
        "candidate",
        "{kind: zener, anode: a, cathode: b}",
        &mut sources,
        &sink,
    )
    .expect("it has a tree");
    let taken = document.remove("elements.catch").expect("it was there");
    assert_eq!(taken.get("part").and_then(Node::text), Some("board"));
    assert!(document.remove("elements.catch").is_none());
    document.insert("elements.catch", zener.clone());
    document.insert(
        "analysis.transient.duration",
        read_fragment("candidate", "5 ms", &mut sources, &sink).expect("it has a tree"),
    );
    assert_eq!(
        document.at("elements.catch.kind").and_then(Node::text),
        Some("zener")
    );
    assert_eq!(
        document
            .at("analysis.transient.duration")
            .and_then(Node::text),
        Some("5 ms")
    );
    let point = taken.span;
    assert_eq!(
        zener.placed_at(point).get("kind").map(|node| node.span),
        Some(point)
    );
    assert!(!sink.has_errors());
}
