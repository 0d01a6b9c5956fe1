//! Every form of phrase there and back, and what is said of others.

use super::*;

/// Each pattern with names put in is read as itself, printed as itself, and has its own kind.
#[test]
fn every_form_round_trips() {
    for form in PHRASES {
        for (element, terminal) in [
            ("k1_coil", "k1_coil.first"),
            ("t1.primary", "t1.primary.first"),
        ] {
            let text = form.pattern.replace("ELEMENT.TERMINAL", terminal);
            let text = text.replace("ELEMENT", element).replace("COIL", element);
            let text = text
                .replace("NODE", "drive")
                .replace("RELAY", "k1")
                .replace("from A to B", "from a-1 to ground");
            let phrase = Phrase::parse(&format!("  {}\t", text.replace(' ', "  "))).expect(&text);
            assert_eq!(phrase.to_string(), text);
            assert_eq!(phrase.kind(), form.kind, "{text}");
        }
    }
}

#[test]
fn names_are_taken_apart() {
    let phrase = Phrase::parse("current into t1.primary.second").expect("a phrase");
    assert_eq!(
        phrase,
        Phrase::CurrentInto(Owner::parse("t1.primary"), "second".into())
    );
    assert_eq!(
        phrase.owner().and_then(|owner| owner.winding.as_deref()),
        Some("primary")
    );
    let phrase = Phrase::parse("voltage from to to at").expect("words of phrases may be names");
    assert_eq!(phrase.nodes().collect::<Vec<_>>(), ["to", "at"]);
}

/// What people write instead, and what they meant.
#[test]
fn the_nearest_phrase_is_suggested_and_the_fault_underlined() {
    for (text, fault, meant) in [
        ("voltage on drive", "on", "voltage at drive"),
        ("voltage drive", "voltage drive", "voltage at drive"),
        ("volatge at drive", "volatge", "voltage at drive"),
        ("Voltage at drive", "Voltage", "voltage at drive"),
        ("voltage over k1_coil", "over", "voltage at k1_coil"),
        ("voltage between a and b", "between", "voltage from a to b"),
        ("current in k1_coil", "in", "current through k1_coil"),
        ("current into k1_coil", "into", "current through k1_coil"),
        (
            "current into k1_coil.first.second.third",
            "k1_coil.first.second.third",
            "current into ELEMENT.TERMINAL",
        ),
        (
            "winding curent of k1_coil",
            "curent",
            "winding current of k1_coil",
        ),
        (
            "flux desity in k1_coil",
            "desity",
            "flux density in k1_coil",
        ),
        ("flux density of k1_coil", "of", "flux density in k1_coil"),
        (
            "the temperature of k1_coil",
            "the",
            "temperature of k1_coil",
        ),
        ("saturation of 2coil", "2coil", "saturation of COIL"),
        ("power of catch", "of", "power in catch"),
        ("voltage at", "voltage at", "voltage at NODE"),
        ("drive", "drive", "voltage at drive"),
    ] {
        let error = Phrase::parse(text).expect_err(text);
        assert_eq!(error.help, format!("`{meant}`"), "{text}");
        assert_eq!(&text[error.range], fault, "{text}");
        assert_eq!(error.headline, format!("`{text}` is not a signal"));
    }
}

#[test]
fn what_is_far_from_every_phrase_gets_the_list() {
    for text in [
        "",
        "   ",
        "?",
        "sum of all things that were ever here",
        "12 V",
    ] {
        let error = Phrase::parse(text).expect_err(text);
        assert_eq!(
            (error.word, error.help.as_str()),
            ("unknown-signal", FAMILY.help),
            "{text}"
        );
        assert!(text.get(error.range).is_some());
    }
}
