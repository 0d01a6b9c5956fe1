//! Pictures of messages, read by a person before they were kept.

use super::*;

/// A message about the first occurrence of `marked` in `text`, drawn without colour.
fn picture(text: &str, marked: &str, label: &str) -> String {
    let mut sources = Sources::new();
    let file = sources.add("supply.yaml", text);
    let start = text.find(marked).expect("the test marks text that it has");
    let span = Span {
        file,
        start,
        end: start + marked.len(),
    };
    let diagnostic =
        Diagnostic::error("wrong-dimension", "gap takes m, got 0.32 mF, a capacitance")
            .at(span, label);
    draw(&diagnostic, &sources, Paint::Plain)
}

#[test]
fn a_message_shows_the_line_and_points_at_the_exact_text() {
    let mut sources = Sources::new();
    let text = format!("{}      gap: 0.32 mF\n", "# line\n".repeat(17));
    let file = sources.add("supply.yaml", text.clone());
    let start = text.find("0.32").unwrap();
    let span = Span {
        file,
        start,
        end: start + 7,
    };
    let diagnostic =
        Diagnostic::error("wrong-dimension", "gap takes m, got 0.32 mF, a capacitance")
            .at(span, "a length is written in m, mm, µm")
            .help("gap: 0.32 mm");
    assert_eq!(
        draw(&diagnostic, &sources, Paint::Plain),
        "\
error[wrong-dimension]: gap takes m, got 0.32 mF, a capacitance
  --> supply.yaml:18:12
   |
18 |       gap: 0.32 mF
   |            ^^^^^^^ a length is written in m, mm, µm
   = help: gap: 0.32 mm
"
    );
}

/// The line and its carets, without headline and place.
fn excerpt(text: &str, marked: &str) -> String {
    let picture = picture(text, marked, "here");
    let lines: Vec<&str> = picture.lines().skip(3).collect();
    lines.join("\n")
}

#[test]
fn tabs_wide_letters_and_control_characters_keep_the_carets_in_place() {
    assert_eq!(
        excerpt("\tgap:\t0.32 mF\t# tab", "0.32 mF"),
        " 1 |  gap: 0.32 mF # tab\n   |       ^^^^^^^ here"
    );
    assert_eq!(
        excerpt("название: 繼電器 0.32 mF µ", "0.32 mF"),
        " 1 | название: 繼電器 0.32 mF µ\n   |                  ^^^^^^^ here"
    );
    assert_eq!(
        excerpt("a: \u{202e}0.32 mF\u{7}", "0.32 mF"),
        " 1 | a: \u{fffd}0.32 mF\u{fffd}\n   |     ^^^^^^^ here"
    );
}

#[test]
fn of_a_long_line_only_the_surroundings_are_shown() {
    let text = format!("x: {}0.32 mF{}", "ab ".repeat(300), " yz".repeat(300));
    assert_eq!(
        excerpt(&text, "0.32 mF"),
        [
            " 1 | … ab ab ab ab ab ab ab ab ab ab ab 0.32 mF yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz yz …",
            "   |                                    ^^^^^^^ here",
        ]
        .join("\n")
    );
    let text = format!("x: {}", "µ".repeat(5_000_000));
    let picture = picture(&text, &text[3..], "all of it");
    assert!(picture.chars().count() < 500, "{}", picture.chars().count());
}

#[test]
fn a_text_of_several_lines_is_marked_on_its_first() {
    assert_eq!(
        excerpt("a: |\n  0.32\n  mF\nb: 1", "0.32\n  mF"),
        " 2 |   0.32\n   |   ^^^^ here"
    );
    assert_eq!(excerpt("a:\n", "\n"), " 1 | a:\n   |   ^ here");
    assert_eq!(excerpt("", ""), " 1 |\n   | ^ here");
}

#[test]
fn several_places_are_shown_in_turn_and_other_files_by_name() {
    let mut sources = Sources::new();
    let a = sources.add("a.yaml", "x: 1\ny: 2\nx: 3\n");
    let b = sources.add("b.yaml", "q: 1\n");
    let point = |file, start| Span {
        file,
        start,
        end: start + 1,
    };
    let diagnostic = Diagnostic::error("duplicate-key", "`x` is written twice")
        .at(point(a, 10), "a second time")
        .at(point(a, 0), "first here")
        .at(point(a, 3), "its value")
        .at(point(b, 0), "brought here")
        .help("remove one of them\nor rename it")
        .help("or ask a friend");
    assert_eq!(
        draw(&diagnostic, &sources, Paint::Plain),
        "\
error[duplicate-key]: `x` is written twice
  --> a.yaml:3:1
   |
 3 | x: 3
   | ^ a second time
  ... a.yaml:1:1
   |
 1 | x: 1
   | - first here
   |    - its value
  --> b.yaml:1:1
   |
 1 | q: 1
   | - brought here
   = help: remove one of them
           or rename it
   = help: or ask a friend
"
    );
}

#[test]
fn a_message_without_a_place_is_its_headline() {
    let note = Diagnostic::note("more-messages", "12 more");
    assert_eq!(
        draw(&note, &Sources::new(), Paint::Plain),
        "note[more-messages]: 12 more\n"
    );
}

#[test]
fn colour_changes_nothing_but_the_escapes() {
    let mut sources = Sources::new();
    let file = sources.add("a.yaml", "x: 1\n");
    let diagnostic = Diagnostic::caution("thin-model", "look here")
        .at(
            Span {
                file,
                start: 3,
                end: 4,
            },
            "one",
        )
        .help("two");
    let coloured = draw(&diagnostic, &sources, Paint::Colour);
    let mut plain = String::new();
    let mut rest = coloured.as_str();
    while let Some((before, after)) = rest.split_once("\u{1b}[") {
        plain += before;
        rest = after.split_once('m').expect("an escape ends with m").1;
    }
    plain += rest;
    assert!(coloured.contains("\u{1b}[1;33m"));
    assert_eq!(plain, draw(&diagnostic, &sources, Paint::Plain));
}
