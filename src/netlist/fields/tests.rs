//! Typed reading: values, paths, parts behind, defaults, and every message with its place.

use super::*;
use crate::diag::{Sink, Sources};
use crate::netlist::expected::differences;
use crate::netlist::{Document, read_document};
use crate::units::{ANY, CURRENT, RATIO, RESISTANCE, TEMPERATURE, TIME, VOLTAGE};

const CLAMPING: &[Key] = &[
    Key::required(
        "voltage",
        Takes::Quantity(VOLTAGE),
        "the voltage at that current",
    ),
    Key::optional(
        "current",
        Takes::Quantity(CURRENT),
        "the current of the point",
    ),
];
const SWITCH: &[Key] = &[
    Key::required("nodes", Takes::Names(2), "its two terminals"),
    Key::required(
        "closed_resistance",
        Takes::Quantity(RESISTANCE),
        "resistance when closed",
    ),
    Key::optional(
        "open_resistance",
        Takes::Quantity(RESISTANCE),
        "resistance when open",
    ),
    Key::default(
        "threshold",
        Takes::Quantity(VOLTAGE),
        "0.7 V",
        "where it begins",
    ),
    Key::default(
        "initially",
        Takes::Word(&["open", "closed"]),
        "open",
        "how it starts",
    ),
    Key::optional("opens_at", Takes::List(TIME), "instants of opening"),
    Key::optional(
        "forward",
        Takes::Pairs(CURRENT, VOLTAGE),
        "points of the curve",
    ),
    Key::optional(
        "clamping",
        Takes::Map(CLAMPING),
        "a point of the clamping curve",
    ),
    Key::optional("sections", Takes::Count, "number of sections"),
    Key::optional("share", Takes::Quantity(RATIO), "a share"),
    Key::optional("gain", Takes::Quantity(ANY), "a gain"),
    Key::optional("warm", Takes::Quantity(TEMPERATURE), "a temperature"),
    Key::optional("core", Takes::Name("core"), "its core"),
    Key::optional("follows", Takes::Phrase, "what it follows"),
];
const COMMON: &[Key] = &[
    Key::required("kind", Takes::Text, "what it is"),
    Key::optional("part", Takes::Name("part"), "the part that supplies keys"),
    Key::optional("label", Takes::Text, "a designation"),
];
const TOP: &[Key] = &[
    Key::optional("title", Takes::Text, "a title"),
    Key::optional("parts", Takes::Other("parts by name"), "parts"),
    Key::required("elements", Takes::Other("elements by name"), "the elements"),
];

fn read_all(fields: &Fields<'_>) {
    fields.names("nodes");
    fields.positive("closed_resistance");
    fields.non_negative("open_resistance");
    fields.value("threshold");
    fields.word("initially");
    fields.list("opens_at");
    fields.pairs("forward");
    if let Some(clamping) = fields.map("clamping") {
        clamping.value("voltage");
        clamping.value("current");
        clamping.finish();
    }
    fields.count("sections");
    fields.checked("share", "between 0 and 1", |share| {
        share.low >= 0.0 && share.high <= 1.0
    });
    fields.value("gain");
    fields.value("warm");
    fields.name("core");
    fields.text("follows");
    fields.text("kind");
    fields.text("label");
    fields.finish();
}

#[track_caller]
fn as_expected(text: &str) {
    let differences = differences(text, |document, reader| {
        let top = Fields::new(&document.root, "", TOP, reader);
        for element in top.entries("elements") {
            let fields = Fields::new(element.node, element.path, SWITCH, reader).also(COMMON);
            read_all(&fields);
        }
        top.finish();
    });
    assert!(differences.is_empty(), "{}", differences.join("\n"));
}

#[test]
fn a_right_element_gives_no_message() {
    as_expected(
        "
elements:
  k1:
    kind: switch
    nodes: [drive, ground]
    closed_resistance: 0.1 Ω ± 10 %
    open_resistance: 0 Ω
    initially: closed
    opens_at: [20 ms, 40 ms]
    forward: [[10 mA, 0.75 V], [1 A, 1.0 V]]
    clamping: {voltage: 40 V, current: 1 A}
    sections: 12
    share: 50 %
    gain: 0.1 Ω
    warm: 25 °C ± 5 K
    core: k1_core
    follows: voltage at drive
    label: \"K1: <main>\"
",
    );
}

#[test]
fn every_fault_has_its_message_at_its_line() {
    as_expected(
        "
elements:
  # error[missing-key]: elements.a needs `closed_resistance`, resistance when closed
  a: {kind: switch, nodes: [x, y]}
  # error[unknown-key]: did you mean `closed_resistance`?
  b: {kind: switch, nodes: [x, y], closed_resistence: 1 Ω}
  # error[unknown-key]: `colour` is no key of `elements.c`
  c: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, colour: red}
  # error[wrong-dimension]: closed_resistance takes Ω, got 47 nF, a capacitance
  d: {kind: switch, nodes: [x, y], closed_resistance: 47 nF}
  # error[out-of-range]: closed_resistance must be above zero, got -4 Ω
  e: {kind: switch, nodes: [x, y], closed_resistance: -4 Ω}
  # error[out-of-range]: from -5 Ω to 15 Ω
  f: {kind: switch, nodes: [x, y], closed_resistance: 5 Ω ± 200 %}
  # error[wrong-length]: nodes takes 2 names, got 3
  g: {kind: switch, nodes: [x, y, z], closed_resistance: 1 Ω}
  # error[wrong-type]: nodes: [x]
  h: {kind: switch, nodes: x, closed_resistance: 1 Ω}
  # error[bad-name]: nodes takes a name, got 2y
  i: {kind: switch, nodes: [x, 2y], closed_resistance: 1 Ω}
  # error[wrong-type]: nodes takes names, got a list
  j: {kind: switch, nodes: [x, [y]], closed_resistance: 1 Ω}
  # error[unknown-word]: did you mean `closed`?
  k: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, initially: close}
  # error[wrong-type]: opens_at: [20 ms]
  l: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, opens_at: 20 ms}
  # error[wrong-dimension]: opens_at takes s, got 3 V, a voltage
  m: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, opens_at: [20 ms, 3 V]}
  # error[wrong-length]: a pair is [x, y]
  n: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, forward: [[1 A, 1 V], [2 A]]}
  # error[unknown-key]: did you mean `voltage`?
  o: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, clamping: {volts: 5 V}}
  # error[wrong-type]: clamping takes a mapping of keys, got a text
  # error[missing-key]: elements.p.clamping needs `voltage`
  p: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, clamping: 5 V}
  # error[bad-number]: sections takes a whole number from 1, got 2.5
  q: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, sections: 2.5}
  # error[out-of-range]: share must be between 0 and 1, got 1.2
  r: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, share: 120 %}
  # error[bad-spread]: per cent of a temperature
  s: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, warm: 25 °C ± 10 %}
  # error[wrong-type]: closed_resistance takes Ω, got nothing
  t: {kind: switch, nodes: [x, y], closed_resistance: }
  # error[wrong-type]: closed_resistance takes Ω, got a list
  u: {kind: switch, nodes: [x, y], closed_resistance: [1 Ω]}
  # error[bad-number]: closed_resistance must be finite, got NaN Ω
  v: {kind: switch, nodes: [x, y], closed_resistance: NaN Ω}
  # error[bad-name]: core takes a name, got my core
  w: {kind: switch, nodes: [x, y], closed_resistance: 1 Ω, core: my core}
  # error[bad-name]: elements takes a name, got 1x
  1x: {kind: switch}
  # error[wrong-type]: y takes a mapping of keys, got a text
  # error[missing-key]: elements.y needs `nodes`
  # error[missing-key]: elements.y needs `closed_resistance`
  # error[missing-key]: elements.y needs `kind`
  y: switch
  # error[unknown-key]: a blank belongs behind the colon
  z: {kind:switch, nodes: [x, y], closed_resistance: 1 Ω}
# error[unknown-key]: did you mean `title`?
titel: x
",
    );
    as_expected("# error[missing-key]: the netlist needs `elements`\ntitle: x\n");
    as_expected(
        "# error[wrong-type]: elements takes a mapping of names, got a list\nelements: [a]\n",
    );
}

#[test]
fn messages_point_at_the_exact_text_even_inside_quotes() {
    let text = "elements:\n  a: {kind: s, nodes: [x, y], closed_resistance: \"4 Ω ± 3 F\"}\n";
    let mut sources = Sources::new();
    let sink = Sink::new();
    let document =
        read_document("relay.yaml", text.as_bytes(), &mut sources, &sink).expect("it has a tree");
    let reader = Reader::new(&sink);
    let node = document.at("elements.a").expect("it is there");
    assert!(
        Fields::new(node, "elements.a", SWITCH, &reader)
            .value("closed_resistance")
            .is_none()
    );
    let span = sink.sorted()[0].span().expect("it has a place");
    assert_eq!(sources.slice(span), "3 F");
}

fn document(text: &str) -> Document {
    let sink = Sink::new();
    let document = read_document("relay.yaml", text.as_bytes(), &mut Sources::new(), &sink);
    assert!(!sink.has_errors());
    document.expect("a text without messages has a tree")
}

#[test]
fn parameters_have_paths_and_parts_stand_behind() {
    let document = document(
        "
parts:
  board: {kind: switch, closed_resistance: 1 Ω ± 10 %, open_resistance: 1 MΩ, clamping: {voltage: 40 V, current: 1 A}}
elements:
  a: {part: board, nodes: [x, y], open_resistance: 2 MΩ, opens_at: [1 ms, 3 ms], clamping: {current: 2 A}}
  b: {part: board, nodes: [x, y]}
",
    );
    let sink = Sink::new();
    let reader = Reader::new(&sink);
    let part = document.at("parts.board").expect("it is there");
    for name in ["a", "b"] {
        let path = format!("elements.{name}");
        let node = document.at(&path).expect("it is there");
        let fields = Fields::new(node, path, SWITCH, &reader)
            .also(COMMON)
            .behind(part, "parts.board");
        read_all(&fields);
    }
    assert!(!sink.has_errors(), "{:?}", sink.sorted());
    let parameters = reader.parameters.borrow();
    let paths: Vec<&str> = parameters
        .iter()
        .map(|(_, entry)| entry.path.as_str())
        .collect();
    assert_eq!(
        paths,
        [
            "parts.board.closed_resistance",
            "elements.a.open_resistance",
            "elements.a.threshold",
            "elements.a.opens_at.0",
            "elements.a.opens_at.1",
            "parts.board.clamping.voltage",
            "elements.a.clamping.current",
            "parts.board.open_resistance",
            "elements.b.threshold",
            "parts.board.clamping.current",
        ]
    );
    let shared = parameters.get(
        parameters
            .find("parts.board.closed_resistance")
            .expect("it is there"),
    );
    assert_eq!((shared.nominal, shared.spread), (1.0, (0.9, 1.1)));
    let threshold = parameters.get(
        parameters
            .find("elements.b.threshold")
            .expect("it is there"),
    );
    assert_eq!((threshold.nominal, threshold.span), (0.7, None));
    let defaults: Vec<(String, String)> = reader
        .defaults
        .borrow()
        .iter()
        .map(|used| (used.path.clone(), used.text.clone()))
        .collect();
    let used = |path: &str, text: &str| (path.to_owned(), text.to_owned());
    assert_eq!(
        defaults,
        [
            used("elements.a.threshold", "0.7 V"),
            used("elements.a.initially", "open"),
            used("elements.b.threshold", "0.7 V"),
            used("elements.b.initially", "open"),
        ]
    );
}

#[test]
fn an_unknown_key_of_a_part_is_reported_once() {
    let document = document(
        "parts:\n  board: {kind: switch, closed_resistance: 1 Ω, colour: red}\na: {nodes: [x, y]}\nb: {nodes: [x, y]}\n",
    );
    let sink = Sink::new();
    let reader = Reader::new(&sink);
    let part = document.at("parts.board").expect("it is there");
    for name in ["a", "b"] {
        let node = document.at(name).expect("it is there");
        Fields::new(node, name, SWITCH, &reader)
            .also(COMMON)
            .behind(part, "parts.board")
            .finish();
    }
    let found = sink.sorted();
    assert_eq!(found.len(), 1);
    assert_eq!(found[0].headline, "`colour` is no key of `parts.board`");
}
