//! Whole texts read: right ones give their tree, wrong ones their messages, hostile ones neither panic nor stall.

use super::*;
use crate::diag::{Diagnostic, Paint, Sink, Sources, draw_all};
use std::time::Instant;

/// Reads a text and returns what came of it.
fn read(bytes: &[u8]) -> (Option<Document>, Vec<Diagnostic>, Sources) {
    let mut sources = Sources::new();
    let sink = Sink::new();
    let document = read_document("relay.yaml", bytes, &mut sources, &sink);
    (document, sink.sorted(), sources)
}

#[track_caller]
fn tree(text: &str) -> Document {
    let (document, diagnostics, sources) = read(text.as_bytes());
    assert!(
        diagnostics.is_empty(),
        "{}",
        draw_all(&diagnostics, &sources, Paint::Plain)
    );
    document.expect("a text without messages has a tree")
}

/// The one message about a text that must have no tree.
#[track_caller]
fn refusal(bytes: &[u8]) -> Diagnostic {
    let started = Instant::now();
    let (document, diagnostics, sources) = read(bytes);
    assert!(
        started.elapsed().as_secs_f64() < 5.0,
        "took {:?}",
        started.elapsed()
    );
    assert!(document.is_none());
    assert_eq!(diagnostics.len(), 1);
    let drawn = draw_all(&diagnostics, &sources, Paint::Plain);
    assert!(drawn.len() < 2000, "{} bytes drawn", drawn.len());
    diagnostics.into_iter().next().expect("there is one")
}

#[test]
fn every_value_is_text_as_written_with_its_place() {
    let text =
        "title: no\nelements:\n  k1: {turns: 4000, at: [1e-4, on, \"a b\"]}  # end\nlast: 'x'\n";
    let document = tree(text);
    assert_eq!(document.root.get("title").and_then(Node::text), Some("no"));
    let at = document.at("elements.k1.at").expect("it is there");
    let items: Vec<&str> = at.items().iter().filter_map(Node::text).collect();
    assert_eq!(items, ["1e-4", "on", "a b"]);
    let slice = |node: &Node| &text[node.span.start..node.span.end];
    assert_eq!(slice(&at.items()[0]), "1e-4");
    assert_eq!(slice(&at.items()[2]), "\"a b\"");
    assert_eq!(slice(at), "[1e-4, on, \"a b\"]");
    let k1 = document.at("elements.k1").expect("it is there");
    assert_eq!(slice(k1), "{turns: 4000, at: [1e-4, on, \"a b\"]}");
    assert_eq!(&text[k1.head.start..k1.head.end], "k1");
    assert_eq!(
        slice(document.at("elements").expect("it is there")),
        "k1: {turns: 4000, at: [1e-4, on, \"a b\"]}"
    );
    assert_eq!(slice(document.at("last").expect("it is there")), "'x'");
}

#[test]
fn places_are_right_behind_letters_of_several_bytes() {
    let text = format!(
        "title: {} Ω\nladder:\n  gap: 50 mm² ± 3 %   # µ\n",
        "größe ".repeat(40)
    );
    let document = tree(&text);
    let gap = document.at("ladder.gap").expect("it is there");
    assert_eq!(&text[gap.span.start..gap.span.end], "50 mm² ± 3 %");
}

#[test]
fn a_byte_order_mark_and_windows_line_ends_are_taken() {
    let document = tree("\u{feff}title: x\r\ngap: 5 mm\r\nempty:\r\n");
    assert_eq!(document.root.get("gap").and_then(Node::text), Some("5 mm"));
    assert!(document.root.get("empty").is_some_and(Node::is_empty));
}

#[test]
fn texts_that_are_no_netlist_are_refused_by_name() {
    let cases: &[(&[u8], &str)] = &[
        (b"", "empty-file"),
        (b"\xef\xbb\xbf", "empty-file"),
        (b"   \n\n", "empty-file"),
        (b"# a comment\n", "empty-file"),
        (b"\x00\x01\x02\x03", "not-text"),
        (b"title: a\x00b\n", "not-text"),
        (b"\x7fELF\x02\x01\x01\x00", "not-text"),
        (b"\x89PNG\r\n\x1a\n", "not-text"),
        (b"title: \xff\xfe\n", "not-text"),
        (b"\xff\xfet\x00i\x00", "not-text"),
        (b"title: x\n---\ntitle: y\n", "several-documents"),
        (b"a: &x [1]\nb: *x\n", "anchor"),
        (b"b: *x\n", "alias"),
        (b"a: !!int 4\n", "tag"),
        (b"a: !mine {b: c}\n", "tag"),
        (b"- a\n- b\n", "wrong-type"),
        (b"just text\n", "wrong-type"),
        (b"a:\n\tb: 1\n", "tab-indentation"),
        (b"a:\n  b: 1\n\tc: 2\n", "tab-indentation"),
        (b"a: b: c\n", "yaml-syntax"),
        (b"a: [1, 2\n", "yaml-syntax"),
        (b"a: {b: 1\nc: 2\n", "yaml-syntax"),
        (b"a: \"open\n", "yaml-syntax"),
        (b"a: 1\n b: 2\n", "yaml-syntax"),
        (b"a: 1\nb 2\n", "yaml-syntax"),
        (b"a: %5\n", "yaml-syntax"),
        (b"a: @x\n", "yaml-syntax"),
        (b"}", "yaml-syntax"),
        (b"? [a]\n: b\n", "wrong-key"),
    ];
    for (bytes, word) in cases {
        assert_eq!(
            diagnostics_word(bytes),
            *word,
            "{}",
            String::from_utf8_lossy(bytes)
        );
    }
}

fn diagnostics_word(bytes: &[u8]) -> &'static str {
    read(bytes)
        .1
        .first()
        .map_or("nothing", |diagnostic| diagnostic.word)
}

#[test]
fn syntax_faults_are_told_where_they_stand_and_how_to_mend_them() {
    let pictures = [
        (
            "a: [1, 2\n",
            "\
error[yaml-syntax]: a bracket is not closed, or a comma is missing before this
  --> relay.yaml:1:8
   |
 1 | a: [1, 2
   |        ^ `,` or `]` is expected before this
   |    - opened here
   = help: a text with `,`, `[`, `]`, `{` or `}` in it is put in quotes
",
        ),
        (
            "a:\n  b: 1\n\tc: 2\n",
            "\
error[tab-indentation]: a line is indented with a tab
  --> relay.yaml:3:1
   |
 3 |  c: 2
   | ^ a tab
   = help: indent with spaces; YAML takes no tabs there
",
        ),
        (
            "a: 1\nb 2\n",
            "\
error[yaml-syntax]: a line is neither `key: value` nor an item of a list
  --> relay.yaml:2:1
   |
 2 | b 2
   | ^^^ no `: ` in it
   = help: a colon and a blank stand between key and value; a text of several lines is indented
",
        ),
        (
            "label: coil: K1\n",
            "\
error[yaml-syntax]: a second `: ` stands in one line
  --> relay.yaml:1:12
   |
 1 | label: coil: K1
   |            ^ not a key before this
   = help: a text with `: ` in it is put in quotes; a mapping on one line has braces: `{key: value}`
",
        ),
    ];
    for (text, picture) in pictures {
        let (_, diagnostics, sources) = read(text.as_bytes());
        assert_eq!(draw_all(&diagnostics, &sources, Paint::Plain), picture);
    }
}

#[test]
fn deep_nesting_is_refused_without_deep_recursion() {
    for (open, word) in [
        ("[", "too-deep"),
        ("{a: ", "too-deep"),
        ("- ", "too-deep"),
        ("[{a: ", "too-deep"),
        ("? ", "too-deep"),
    ] {
        let text = format!("a:\n  {}", open.repeat(100_000));
        assert_eq!(refusal(text.as_bytes()).word, word, "{open}");
    }
    let mut text = String::new();
    for depth in 0..2000 {
        text += &format!("{}a:\n", " ".repeat(depth));
    }
    assert_eq!(refusal(text.as_bytes()).word, "too-deep");
    // One less than too deep is read, copied and written without trouble.
    let text = format!("{}x{}", "{a: ".repeat(64), "}".repeat(64));
    let document = tree(&text);
    assert_eq!(tree(&document.to_yaml()).to_yaml(), document.to_yaml());
}

#[test]
fn a_bomb_of_aliases_ends_at_its_first_anchor() {
    let mut text = String::from("a0: &a0 [x, x, x, x, x, x, x, x, x]\n");
    for k in 1..12 {
        let list = vec![format!("*a{}", k - 1); 9].join(", ");
        text += &format!("a{k}: &a{k} [{list}]\n");
    }
    let found = refusal(text.as_bytes());
    assert_eq!(found.word, "anchor");
    assert_eq!(found.span().map(|span| span.start), Some(4));
}

#[test]
fn texts_of_ten_megabytes_are_read_or_refused_quickly() {
    let long = "x".repeat(10_000_000);
    for text in [
        format!("title: {long}\n"),
        format!("title: '{long}'\n"),
        format!("# {long}\ntitle: x\n"),
        format!("title: {}\n", "µ".repeat(5_000_000)),
        format!("title: {}\n", "a ".repeat(5_000_000)),
    ] {
        let started = Instant::now();
        tree(&text);
        assert!(
            started.elapsed().as_secs_f64() < 5.0,
            "{:?} for {}",
            started.elapsed(),
            &text[..20]
        );
    }
    for text in [
        format!("{long}: 1\n"),
        long.clone(),
        format!("a: [{long}\n"),
        format!("a: \"{long}\n"),
        format!("a: {}\n", "[".repeat(10_000_000)),
        format!("a: {}\n", "]".repeat(10_000_000)),
        format!("a: b: {long}\n"),
        format!("\t{long}"),
    ] {
        refusal(text.as_bytes());
    }
    assert_eq!(refusal(&vec![b' '; (16 << 20) + 1]).word, "file-too-large");
}

#[test]
fn a_hundred_thousand_duplicate_keys_are_counted_quickly() {
    let started = Instant::now();
    let text = "a: 1\n".repeat(100_000);
    let (document, diagnostics, _) = read(text.as_bytes());
    assert!(document.is_some());
    assert_eq!(diagnostics.len(), 101);
    assert_eq!(
        diagnostics[100].headline,
        "99899 more messages are left out; mend these first"
    );
    let text: String = (0..100_000)
        .map(|k| format!("k{k}: {{nodes: [a, b], turns: 4}}\n"))
        .collect();
    tree(&text);
    assert!(
        started.elapsed().as_secs_f64() < 20.0,
        "{:?}",
        started.elapsed()
    );
}

#[test]
fn duplicate_keys_point_to_both_places() {
    let text = "elements:\n  k1: {turns: 1}\n  k2: {turns: 2}\n  k1: {turns: 3}\n";
    let (document, diagnostics, sources) = read(text.as_bytes());
    assert_eq!(
        document.and_then(|document| document
            .at("elements.k1.turns")
            .and_then(Node::text)
            .map(str::to_owned)),
        Some("1".to_owned())
    );
    assert_eq!(
        draw_all(&diagnostics, &sources, Paint::Plain),
        "\
error[duplicate-key]: `k1` is written twice
  --> relay.yaml:4:3
   |
 4 |   k1: {turns: 3}
   |   ^^ a second time
  ... relay.yaml:2:3
   |
 2 |   k1: {turns: 1}
   |   -- first here
   = help: remove one of them or rename it
"
    );
}

#[test]
fn torn_and_mutated_netlists_never_panic() {
    let text = "title: K1 µ\nbring: [parts/a.yaml]\nelements:\n  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V ± 10 %}\n  k1:\n    label: \"K1 \\u00b5\"\n    note: |\n      two\n      lines\n    list:\n      - 'a'\n      - {b: c}\n";
    let bytes = text.as_bytes();
    for end in 0..bytes.len() {
        read(&bytes[..end]);
    }
    // A fixed sequence (the multiplier of Park and Miller, from memory) replaces, drops and doubles bytes.
    let mut state: u64 = 7;
    let mut next = |below: usize| {
        state = state * 48_271 % 2_147_483_647;
        state as usize % below
    };
    let signs = b"[]{}:,-?&*!|>'\"%@`#\t\n \\\0\xc2\xff~=<";
    for _ in 0..20_000 {
        let mut torn = bytes.to_vec();
        for _ in 0..=next(4) {
            let at = next(torn.len());
            match next(3) {
                0 => torn[at] = signs[next(signs.len())],
                1 => drop(torn.remove(at)),
                _ => torn.insert(at, signs[next(signs.len())]),
            }
        }
        let (_, diagnostics, sources) = read(&torn);
        draw_all(&diagnostics, &sources, Paint::Plain);
    }
}

#[test]
fn the_example_of_the_design_is_read_without_a_message() {
    let text = "\
title: Sluice relay K1 on a low-side driver
ambient: 25 °C within -25 °C .. 70 °C
materials:
  relay_iron: {initial_permeability: 3000, saturation: 1.5 T}
parts:
  board_diode: {kind: diode, saturation_current: 1 nA, ideality_factor: 1.8, series_resistance: 0.2 Ω,
                junction_capacitance: 20 pF, ratings: {reverse_voltage: 200 V, current_mean: 1 A}}
elements:
  supply:    {kind: voltage_source, nodes: [rail, ground], voltage: 24 V ± 10 %}
  k1_driver: {kind: switch, nodes: [drive, ground], open_resistance: 10 MΩ,
              transition: 1 µs, initially: closed, opens_at: [20 ms], ratings: {voltage: 60 V}}
  catch:     {part: board_diode, anode: drive, cathode: rail}
readings:
  release: {signal: winding current of k1_coil, take: time_until, falls_to: 8 mA, from: k1_driver opens}
limits:
  driver_voltage: {reading: kick, at_most: 60 V, margin: 20 %}
sizing:
  operating_rate: 600 /h
";
    let document = tree(text);
    let text_at = |path| document.at(path).and_then(Node::text);
    assert_eq!(text_at("elements.supply.voltage"), Some("24 V ± 10 %"));
    assert_eq!(
        text_at("parts.board_diode.ratings.current_mean"),
        Some("1 A")
    );
    assert_eq!(text_at("readings.release.from"), Some("k1_driver opens"));
    assert_eq!(text_at("sizing.operating_rate"), Some("600 /h"));
}

#[test]
fn forty_thousand_elements_are_read_in_good_time() {
    const KEYS: &[Key] = &[
        Key::required("nodes", Takes::Names(2), "its terminals"),
        Key::required(
            "resistance",
            Takes::Quantity(crate::units::RESISTANCE),
            "its resistance",
        ),
        Key::default(
            "share",
            Takes::Quantity(crate::units::RATIO),
            "0.5",
            "a share",
        ),
    ];
    const TOP: &[Key] = &[Key::required(
        "elements",
        Takes::Other("elements"),
        "the elements",
    )];
    let mut text = String::from("elements:\n");
    for k in 0..40_000 {
        text += &format!(
            "  r{k}: {{nodes: [n{k}, n{}], resistance: 4.7 kΩ ± 1 %}}\n",
            k + 1
        );
    }
    let started = Instant::now();
    let document = tree(&text);
    let sink = Sink::new();
    let reader = Reader::new(&sink);
    for element in Fields::new(&document.root, "", TOP, &reader).entries("elements") {
        let fields = Fields::new(element.node, element.path, KEYS, &reader);
        assert!(fields.names("nodes").is_some() && fields.positive("resistance").is_some());
        fields.value("share");
        fields.finish();
    }
    assert_eq!(reader.parameters.borrow().iter().count(), 80_000);
    assert_eq!(reader.defaults.borrow().len(), 40_000);
    assert!(
        started.elapsed().as_secs_f64() < 10.0,
        "{:?}",
        started.elapsed()
    );
}
