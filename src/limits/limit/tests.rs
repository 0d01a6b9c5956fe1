//! Limits as they are written, judged, and what is said of wrong ones.

use super::*;
use crate::diag::{Sink, Sources};
use crate::netlist::{Reader, read_document};
use crate::readings::{Taken, read_readings};
use crate::signals::{RATING_KEYS, read_ratings};

const TOP: &[Key] = &[
    readings::KEY,
    KEY,
    Key::optional(
        "ratings",
        Takes::Map(RATING_KEYS),
        "of the element k1_driver, for these tests",
    ),
];

const HEAD: &str = "ratings: {voltage: 60 V, breaking_current: 2 A}
readings:
  kick: {signal: voltage at drive, take: highest}
  release: {signal: winding current of k1, take: time_until, falls_to: 8 mA}
  broken: {signal: volts at drive, take: highest}
limits:
";

fn read(limits: &str) -> (Vec<Limit>, Values, Vec<String>) {
    let (mut sources, sink) = (Sources::new(), Sink::new());
    let text = format!("{HEAD}{limits}\n");
    let document =
        read_document("test.yaml", text.as_bytes(), &mut sources, &sink).expect("a document");
    let reader = Reader::new(&sink);
    let top = Fields::new(&document.root, "", TOP, &reader);
    let rated = top
        .map("ratings")
        .map(|fields| read_ratings(&fields))
        .unwrap_or_default();
    let readings = read_readings(&top);
    let limits = read_limits(
        &top,
        &readings,
        &[Ratings {
            element: "k1_driver".into(),
            rated,
        }],
    );
    top.finish();
    let messages = sink
        .sorted()
        .into_iter()
        .filter(|diagnostic| !diagnostic.headline.contains("volts at"));
    let messages = messages.map(|diagnostic| {
        let (span, label) = diagnostic.labels.first().cloned().unwrap_or_default();
        format!(
            "{}: {} | {label} `{}` | {}",
            sources.place(span).line,
            diagnostic.headline,
            sources.slice(span),
            diagnostic.help.join("; ")
        )
    });
    let messages = messages.collect();
    let values = reader.parameters.borrow().nominal();
    (limits, values, messages)
}

#[test]
fn limits_are_read_and_judged() {
    let (limits, values, messages) = read(
        "  v: {reading: kick, at_most: 60 V, margin: 20 %}
  t: {reading: release, at_least: 25 ms}
  r: {rating: k1_driver.voltage, margin: 0.1}",
    );
    assert_eq!(messages, Vec::<String>::new());
    let outcome = |value, kind| Outcome {
        taken: Some(Taken { value, time: None }),
        kind,
        remark: None,
    };
    let verdict = limits[0]
        .judge_reading(&outcome(51.0, units::VOLTAGE), &values)
        .expect("a verdict");
    assert_eq!(
        (verdict.bound, verdict.asked, verdict.holds),
        (60.0, 0.2, false)
    );
    assert!(
        verdict
            .margin
            .is_some_and(|margin| (margin - 0.15).abs() < 1e-15)
    );
    let verdict = limits[1]
        .judge_reading(&outcome(0.03, units::TIME), &values)
        .expect("a verdict");
    assert!(
        verdict.holds
            && verdict
                .margin
                .is_some_and(|margin| (margin - 0.2).abs() < 1e-12)
    );
    // At an operating point the reading is a current.
    let verdict = limits[1]
        .judge_reading(&outcome(0.06, units::CURRENT), &values)
        .expect("a verdict");
    assert_eq!((verdict.value, verdict.holds), (None, false));
    let used = RatingUse {
        peak: Some(48.0),
        rated: 60.0,
        used: Some(0.8),
        time: None,
        not_evaluated_yet: false,
    };
    let verdict = limits[2].judge_rating(&used, &values).expect("a verdict");
    assert!(
        verdict.holds
            && verdict
                .margin
                .is_some_and(|margin| (margin - 0.2).abs() < 1e-15)
    );
    assert!(
        limits[2]
            .judge_reading(&outcome(1.0, units::VOLTAGE), &values)
            .is_none()
    );
    assert!(limits[0].judge_rating(&used, &values).is_none());
}

/// Each fault on its line, with its text and what would be right.
#[test]
fn wrong_limits_are_told_what_is_wrong() {
    for (limit, wanted) in [
        (
            "reading: kik, at_most: 60 V",
            "there is no reading `kik` | did you mean `kick`? `kik`",
        ),
        (
            "reading: temperature, at_most: 60 V",
            "there is no reading `temperature` | unknown `temperature` | readings here: kick, release, broken",
        ),
        (
            "reading: kick, at_most: 60 A",
            "at_most takes V, got 60 A, a current",
        ),
        (
            "reading: release, at_most: 25",
            "at_most takes s, got 25 without a unit",
        ),
        (
            "reading: kick",
            "a limit on `kick` needs `at_most` or `at_least`",
        ),
        (
            "reading: kick, at_most: 60 V, at_least: 2 V",
            "a limit takes one of `at_most` and `at_least`, got both",
        ),
        ("at_most: 60 V", "a limit needs `reading` or `rating`"),
        (
            "reading: kick, rating: k1_driver.voltage, at_most: 1 V",
            "a limit takes a reading or a rating, got both",
        ),
        (
            "rating: k1_driver.voltage, at_most: 60 V",
            "a limit on a rating does not use `at_most`",
        ),
        (
            "rating: k1_driver.voltge",
            "there is no rating `k1_driver.voltge` | did you mean `k1_driver.voltage`?",
        ),
        (
            "rating: nothing",
            "there is no rating `nothing` | unknown `nothing` | ratings here: k1_driver.voltage, k1_driver.breaking_current",
        ),
        (
            "reading: kick, at_most: 60 V, margin: -10 %",
            "margin must be between 0 and 10, such as `20 %`, got",
        ),
        (
            "reading: kick, at_most: 60 V, margins: 10 %",
            "`margins` is no key of `limits.x`",
        ),
    ] {
        let (_, _, messages) = read(&format!("  x: {{{limit}}}"));
        assert_eq!(messages.len(), 1, "{limit}: {messages:?}");
        assert!(
            messages[0].starts_with("7: ") && messages[0].contains(wanted),
            "{limit}: {}",
            messages[0]
        );
    }
}

#[test]
fn a_limit_on_a_reading_that_is_wrong_itself_says_nothing_more() {
    let (limits, _, messages) = read("  x: {reading: broken, at_most: 60 V}");
    assert!(limits.is_empty() && messages.is_empty(), "{messages:?}");
}
