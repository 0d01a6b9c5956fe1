//! Netlists with files beside them, in temporary folders.

use super::*;
use crate::diag::{Paint, draw_all};
use crate::netlist::expected::mismatches;
use std::fs;

/// A folder with the files of a case, and its netlist.
fn folder(files: &[(&str, &str)]) -> (tempfile::TempDir, Input) {
    let folder = tempfile::tempdir().expect("a test may make a folder");
    for (name, text) in files {
        let path = folder.path().join(name);
        fs::create_dir_all(path.parent().expect("it has a folder"))
            .expect("a test may make a folder");
        fs::write(path, text).expect("a test may write there");
    }
    let input = Input::File(folder.path().join("relay.yaml"));
    (folder, input)
}

/// The messages of a case, drawn, with the temporary folder's name left out.
fn messages(files: &[(&str, &str)]) -> (String, bool) {
    let (folder, input) = folder(files);
    let (diagnostics, sources, unreadable) = match load(&input, &[]) {
        Ok(loaded) => (loaded.sink.sorted(), loaded.sources, false),
        Err(error) => {
            let unreadable = matches!(error, LoadError::Unreadable(_));
            let failure = match error {
                LoadError::Unreadable(failure) | LoadError::Wrong(failure) => failure,
            };
            (failure.diagnostics, failure.sources, unreadable)
        }
    };
    let drawn = draw_all(&diagnostics, &sources, Paint::Plain);
    (
        drawn.replace(&format!("{}/", folder.path().display()), ""),
        unreadable,
    )
}

#[test]
fn materials_cores_and_parts_are_brought_in_and_own_ones_stay() {
    let (_folder, input) = folder(&[
        (
            "relay.yaml",
            "bring: [parts/diodes.yaml, iron.yaml]\nparts:\n  own: {kind: zener}\n",
        ),
        (
            "parts/diodes.yaml",
            "parts:\n  board: {kind: diode, series_resistance: 1 Ω}\n",
        ),
        (
            "iron.yaml",
            "materials:\n  iron: {saturation: 1.5 T}\ncores: {}\n",
        ),
    ]);
    let loaded =
        load(&input, &["parts.board.series_resistance=2 Ω".into()]).expect("it has a tree");
    assert!(!loaded.sink.has_errors(), "{:?}", loaded.sink.sorted());
    let text = |path| loaded.document.at(path).and_then(Node::text);
    assert_eq!(text("parts.own.kind"), Some("zener"));
    assert_eq!(text("parts.board.kind"), Some("diode"));
    assert_eq!(text("parts.board.series_resistance"), Some("2 Ω"));
    assert_eq!(text("materials.iron.saturation"), Some("1.5 T"));
    let span = loaded
        .document
        .at("parts.board.kind")
        .expect("it is there")
        .span;
    assert!(loaded.sources.name(span.file).ends_with("diodes.yaml"));
}

#[test]
fn a_name_brought_twice_points_to_both_files() {
    let (drawn, unreadable) = messages(&[
        ("relay.yaml", "bring: [a.yaml, b.yaml]\n"),
        ("a.yaml", "parts:\n  x: {kind: diode}\n"),
        ("b.yaml", "parts:\n  y: {kind: diode}\n  x: {kind: zener}\n"),
    ]);
    assert!(!unreadable);
    assert_eq!(
        drawn,
        "\
error[duplicate-key]: `x` is in parts twice
  --> b.yaml:3:3
   |
 3 |   x: {kind: zener}
   |   ^ brought from here
  --> a.yaml:2:3
   |
 2 |   x: {kind: diode}
   |   - first here
   = help: rename one of them
"
    );
}

#[test]
fn only_files_below_the_folder_are_brought() {
    let cases = [
        ("../x.yaml", "does not lie in or below"),
        ("a/../../x.yaml", "does not lie in or below"),
        ("/etc/passwd", "does not lie in or below"),
        ("[x]", "names of files, got a list"),
        ("''", "names of files, got nothing"),
        ("'a\\b.yaml'", "does not lie in or below"),
    ];
    for (name, piece) in cases {
        let (drawn, unreadable) = messages(&[("relay.yaml", &format!("bring: [{name}]\n"))]);
        assert!(
            drawn.contains(piece) && drawn.contains("relay.yaml:1:"),
            "{drawn}"
        );
        assert!(!unreadable);
    }
    let (drawn, _) = messages(&[("relay.yaml", "bring: parts.yaml\n")]);
    assert!(drawn.contains("help: bring: [parts.yaml]"), "{drawn}");
    let (drawn, _) = messages(&[
        ("relay.yaml", "bring: [a.yaml, ./a.yaml]\n"),
        ("a.yaml", "parts: {}\n"),
    ]);
    assert!(drawn.contains("is brought twice"), "{drawn}");
}

#[cfg(unix)]
#[test]
fn a_link_out_of_the_folder_is_refused() {
    let outside = tempfile::tempdir().expect("a test may make a folder");
    fs::write(outside.path().join("x.yaml"), "parts: {}\n").expect("a test may write there");
    let (folder, input) = folder(&[("relay.yaml", "bring: [link.yaml]\n")]);
    std::os::unix::fs::symlink(
        outside.path().join("x.yaml"),
        folder.path().join("link.yaml"),
    )
    .expect("a test may link");
    let loaded = load(&input, &[]).expect("the netlist itself has a tree");
    assert!(loaded.sink.sorted()[0].headline.contains("leads out of"));
}

#[test]
fn a_brought_file_brings_nothing_else_in() {
    let text = "# error[bad-bring]: a brought file has materials, cores, parts, got `elements`\nelements: {}\n# error[bad-bring]: got `bring`\nbring: [relay.yaml]\n";
    let (_folder, input) = folder(&[("relay.yaml", "bring: [a.yaml]\n"), ("a.yaml", text)]);
    let loaded = load(&input, &[]).expect("the netlist itself has a tree");
    let differences = mismatches(text, &loaded.sink.sorted(), &loaded.sources);
    assert!(differences.is_empty(), "{}", differences.join("\n"));
}

#[test]
fn files_that_cannot_be_read_are_told_apart_from_wrong_ones() {
    let (drawn, unreadable) = messages(&[("relay.yaml", "bring: [missing.yaml]\n")]);
    assert!(
        unreadable
            && drawn.contains("relay.yaml:1:9")
            && drawn.contains("missing.yaml could not be read"),
        "{drawn}"
    );
    let (drawn, unreadable) = messages(&[]);
    assert!(
        unreadable && drawn.contains("relay.yaml could not be read"),
        "{drawn}"
    );
    let (drawn, unreadable) = messages(&[("relay.yaml/x", "")]);
    assert!(unreadable && drawn.contains("could not be read"), "{drawn}");
    let (drawn, unreadable) = messages(&[("relay.yaml", "a: [\n")]);
    assert!(!unreadable && drawn.contains("is not closed"), "{drawn}");
    let (drawn, unreadable) =
        messages(&[("relay.yaml", "bring: [a.yaml]\n"), ("a.yaml", "a: [\n")]);
    assert!(!unreadable && drawn.contains("--> a.yaml:1:"), "{drawn}");
}

#[test]
fn a_text_without_a_folder_brings_nothing() {
    let input = Input::Text {
        name: "-".into(),
        bytes: b"bring: [a.yaml]\n".to_vec(),
        folder: None,
    };
    let loaded = load(&input, &[]).expect("it has a tree");
    assert!(
        loaded.sink.sorted()[0]
            .headline
            .contains("a netlist without a folder cannot bring a.yaml")
    );
}

#[test]
fn an_override_may_bring_another_file_and_change_what_it_holds() {
    let (_folder, input) = folder(&[
        ("relay.yaml", "bring: [missing.yaml]\n"),
        ("a.yaml", "parts:\n  x: {kind: diode}\n"),
    ]);
    let overrides = ["parts.x.kind=zener".to_owned(), "bring=[a.yaml]".to_owned()];
    let loaded = load(&input, &overrides).expect("it has a tree");
    assert!(!loaded.sink.has_errors(), "{:?}", loaded.sink.sorted());
    assert_eq!(
        loaded.document.at("parts.x.kind").and_then(Node::text),
        Some("zener")
    );
}
