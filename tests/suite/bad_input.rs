//! Guards: a faulty netlist gets every one of its errors told, with place and remedy, exit code 2 and no panic.
//!
//! The files in `tests/netlists/faulty` carry the expected message as a comment above its line.

use crate::binary::{call, call_with_input, folder, netlists_in, text};
use coilbreak::diag::{Paint, draw_all};
use coilbreak::netlist::{Input, expected};
use coilbreak::run::{ReadError, read};
use std::path::Path;

#[test]
fn every_faulty_netlist_gets_exactly_its_messages() {
    let files = netlists_in("tests/netlists/faulty");
    assert!(files.len() >= 90, "only {} files", files.len());
    for path in &files {
        let text = std::fs::read_to_string(path).expect("a faulty netlist is text");
        let Err(ReadError::Wrong(failure)) = read(&Input::File(path.clone()), &[]) else {
            panic!("{} was taken as sound, or as unreadable", path.display());
        };
        let differences = expected::mismatches(&text, &failure.diagnostics, &failure.sources);
        assert!(
            differences.is_empty(),
            "{}:\n{}",
            path.display(),
            differences.join("\n")
        );
    }
}

#[test]
fn the_program_ends_with_2_and_points_at_the_place() {
    for path in netlists_in("tests/netlists/faulty") {
        let name = path.display();
        let called = call(&["run", text(&path)]);
        assert_eq!(called.code, Some(2), "{name}: {}", called.err);
        assert!(called.out.is_empty(), "{name}: {}", called.out);
        assert!(
            called.err.contains(&format!("--> {name}:")),
            "{name}: {}",
            called.err
        );
    }
}

#[test]
fn as_json_every_message_has_its_fields() {
    for path in netlists_in("tests/netlists/faulty") {
        let called = call(&["check", text(&path), "--json"]);
        assert_eq!(called.code, Some(2), "{}", path.display());
        assert!(called.err.is_empty(), "{}", called.err);
        told_as_json(&called.json(), text(&path));
    }
}

/// `{diagnostics: [...]}` with the fields of the contract, and at least one message with its place in the file.
fn told_as_json(json: &serde_json::Value, file: &str) {
    assert_eq!(json.as_object().map(serde_json::Map::len), Some(1));
    let told = json["diagnostics"].as_array().expect("a list of messages");
    assert!(!told.is_empty());
    for message in told {
        let fields: Vec<&str> = message
            .as_object()
            .expect("a message is an object")
            .keys()
            .map(String::as_str)
            .collect();
        assert_eq!(
            fields,
            [
                "word", "severity", "file", "line", "column", "headline", "help"
            ]
        );
    }
    let placed = told.iter().any(|message| {
        message["severity"] == "error"
            && message["file"] == file
            && message["line"].as_u64() >= Some(1)
            && message["column"].as_u64() >= Some(1)
    });
    assert!(placed, "{json}");
}

/// Five faults of different kinds in one file, and each is told: none hides another.
#[test]
fn all_errors_of_a_file_come_in_one_go() {
    let called = call(&["run", "tests/netlists/faulty/five_errors.yaml", "--json"]);
    let json = called.json();
    let words: Vec<&str> = json["diagnostics"]
        .as_array()
        .expect("a list of messages")
        .iter()
        .filter_map(|message| message["word"].as_str())
        .collect();
    assert_eq!(
        words,
        [
            "wrong-dimension",
            "missing-key",
            "unknown-name",
            "unknown-kind",
            "unknown-signal"
        ]
    );
}

const SOUND: &str = "elements:\n  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}\n  \
                     load: {kind: resistor, nodes: [rail, ground], resistance: 10 Ω}\n";

/// Texts that are too large or too odd to be kept as files: name, bytes, the word that must be told.
fn hostile() -> Vec<(&'static str, Vec<u8>, &'static str)> {
    let deep = |open: &str, close: &str| {
        format!(
            "elements: {}{}\n",
            open.repeat(200_000),
            close.repeat(200_000)
        )
        .into_bytes()
    };
    let steps: String = (0..3000)
        .map(|k| format!("{}a:\n", " ".repeat(k)))
        .collect();
    let mut bomb = String::from("a: &a [x, x, x, x, x, x, x, x, x]\n");
    for (name, before) in ('b'..='t').zip('a'..='s') {
        let nine = vec![format!("*{before}"); 9].join(", ");
        bomb += &format!("{name}: &{name} [{nine}]\n");
    }
    let utf16: Vec<u8> = "\u{feff}title: x\n"
        .encode_utf16()
        .flat_map(u16::to_le_bytes)
        .collect();
    let binary: Vec<u8> = (0..40).flat_map(|_| 0..=255_u8).collect();
    let mut latin = b"title: Spule f\xfcr K1\n".to_vec();
    latin.extend(SOUND.bytes());
    let wide = format!(
        "elements: {{r: {{nodes: [{}b]}}}}\n",
        "a, ".repeat(3_000_000)
    );
    let digits = SOUND.replace("10 Ω", &format!("1{} Ω", "0".repeat(1_000_000)));
    let many: String = (0..20_000)
        .map(|k| format!("  r{k}: {{kind: resitor, nodes: [a, ground], resistance: 1}}\n"))
        .collect();
    vec![
        ("empty", Vec::new(), "empty-file"),
        ("blank", b"\n\n   \n".to_vec(), "empty-file"),
        ("comment", b"# nothing\n".to_vec(), "empty-file"),
        ("scalar", b"hello\n".to_vec(), "wrong-type"),
        ("list", b"- a\n- b\n".to_vec(), "wrong-type"),
        ("binary", binary, "not-text"),
        ("zero byte", b"title: a\0b\n".to_vec(), "not-text"),
        ("sixteen bits", utf16, "not-text"),
        ("another encoding", latin, "not-text"),
        ("alias bomb", bomb.into_bytes(), "anchor"),
        ("brackets", deep("[", "]"), "too-deep"),
        ("braces", deep("{a: ", "}"), "too-deep"),
        ("open brackets", deep("[", ""), "too-deep"),
        ("indentation", steps.into_bytes(), "too-deep"),
        (
            "key of ten megabytes",
            [vec![b'x'; 10_000_000], b": 1\n".to_vec()].concat(),
            "yaml-syntax",
        ),
        ("line of nine megabytes", wide.into_bytes(), "missing-key"),
        ("number of a megabyte", digits.into_bytes(), "bad-number"),
        (
            "many errors",
            format!("elements:\n{many}").into_bytes(),
            "unknown-kind",
        ),
        (
            "second document",
            format!("{SOUND}---\n{SOUND}").into_bytes(),
            "several-documents",
        ),
        (
            "tag",
            b"!!python/object:os.system\nelements: 1\n".to_vec(),
            "tag",
        ),
        (
            "merge key",
            b"elements:\n  <<: {a: 1}\n".to_vec(),
            "bad-name",
        ),
    ]
}

#[test]
fn hostile_files_are_refused_with_a_place() {
    let folder = folder();
    for (name, bytes, word) in hostile() {
        let path = folder.path().join("hostile.yaml");
        std::fs::write(&path, &bytes).expect("the test's file can be written");
        let called = call(&["run", text(&path), "--json"]);
        assert_eq!(called.code, Some(2), "{name}: {}", called.err);
        let json = called.json();
        told_as_json(&json, text(&path));
        assert_eq!(json["diagnostics"][0]["word"], word, "{name}: {json}");
        let drawn = call(&["run", text(&path)]);
        assert_eq!(drawn.code, Some(2), "{name}");
        assert!(drawn.err.contains("--> "), "{name}: {}", drawn.err);
        // A message shows a piece of the line, however long that is.
        assert!(
            drawn.err.len() < 200_000,
            "{name}: {} bytes",
            drawn.err.len()
        );
    }
}

#[test]
fn a_byte_order_mark_and_line_ends_of_any_kind_are_no_fault() {
    for text in [format!("\u{feff}{SOUND}"), SOUND.replace('\n', "\r\n")] {
        let called = call_with_input(&["run", "-"], text.as_bytes());
        assert_eq!(called.code, Some(0), "{}", called.err);
    }
}

#[test]
fn wrong_overrides_are_told_in_their_own_text() {
    let netlist = "netlists/relay_diode.yaml";
    for (assignment, word, piece) in [
        (
            "elements.catch.series_resistance",
            "bad-override",
            "PATH=VALUE",
        ),
        ("=5", "bad-override", "PATH=VALUE"),
        ("title=", "bad-override", "PATH=VALUE"),
        (
            "elements.cach.series_resistance=1 Ω",
            "unknown-path",
            "`catch`",
        ),
        ("a..b=1", "unknown-path", "`a` is not there"),
        (
            "elements.k1_driver.opens_at.3=4 ms",
            "unknown-path",
            "counted from 0",
        ),
        ("elements.k1_coil.trns=5", "unknown-key", "`turns`"),
        ("elements.k1_coil.turns=many", "bad-number", "many"),
        (
            "elements.k1_coil.resistance=4 F",
            "wrong-dimension",
            "a capacitance",
        ),
        (
            "elements.k1_driver.opens_at=[1 ms",
            "yaml-syntax",
            "opened here",
        ),
        ("elements=5", "wrong-type", "a mapping of names"),
    ] {
        let called = call(&["run", netlist, "--set", assignment]);
        assert_eq!(called.code, Some(2), "{assignment}: {}", called.err);
        for needed in [&format!("error[{word}]"), "--> --set:1:", piece] {
            assert!(called.err.contains(needed), "{assignment}: {}", called.err);
        }
    }
}

#[test]
fn what_is_brought_is_read_with_the_same_care() {
    let folder = folder();
    let write = |name: &str, text: &str| {
        std::fs::write(folder.path().join(name), text).expect("the test's file can be written");
    };
    write(
        "good.yaml",
        "parts:\n  r10: {kind: resistor, resistance: 10 Ω}\n",
    );
    write(
        "bad.yaml",
        "parts:\n  r10: {kind: resistor, resistance: 10 F}\n",
    );
    write("torn.yaml", "parts: [\n");
    write(
        "more.yaml",
        "elements:\n  r: {kind: resistor, nodes: [a, ground], resistance: 1 Ω}\n",
    );
    let outcome = |brought: &str| {
        let text = format!(
            "bring: [{brought}]\nelements:\n  \
             supply: {{kind: voltage_source, nodes: [rail, ground], voltage: 24 V}}\n  \
             load: {{part: r10, nodes: [rail, ground]}}\n"
        );
        let input = Input::Text {
            name: "netlist".into(),
            bytes: text.into_bytes(),
            folder: Some(folder.path().to_path_buf()),
        };
        match read(&input, &[]) {
            Ok(_) => "sound".to_owned(),
            Err(error) => {
                let failure = error.failure();
                draw_all(&failure.diagnostics, &failure.sources, Paint::Plain)
            }
        }
    };
    assert_eq!(outcome("good.yaml"), "sound");
    for (brought, piece) in [
        ("bad.yaml", "bad.yaml:2:37"),
        ("torn.yaml", "torn.yaml:"),
        ("more.yaml", "a brought file has materials, cores, parts"),
        ("nowhere.yaml", "nowhere.yaml could not be read"),
        ("../good.yaml", "below the netlist's folder"),
    ] {
        let told = outcome(brought);
        assert!(told.contains(piece), "{brought}: {told}");
    }
    let outside = Path::new("/etc/hostname").display().to_string();
    assert!(outcome(&outside).contains("below the netlist's folder"));
}
