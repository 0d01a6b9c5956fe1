//! What a netlist asks to be computed: `analysis: {transient: {...}}` or `analysis: operating_point`.

use crate::diag::Diagnostic;
use crate::netlist::{Data, Fields, Key, Takes, Value};
use crate::units;

/// An analysis with its wishes.
#[derive(Clone, Debug)]
pub enum Analysis {
    /// The state at rest.
    OperatingPoint,
    /// Waveforms over time.
    Transient(Transient),
}

/// A transient's wishes, as parameters [SI].
#[derive(Clone, Debug)]
pub struct Transient {
    /// Simulated time.
    pub duration: Value,
    /// Error aimed at in every waveform, relative to its largest swing.
    pub accuracy: Value,
    /// Where it begins.
    pub start: Start,
    /// Longest step.
    pub longest_step: Option<Value>,
    /// Instant from which waveforms are kept.
    pub record_from: Value,
}

/// Where a transient begins.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Start {
    /// Uncharged, with the initial values that are given.
    Zero,
    /// At rest, switches as they start.
    OperatingPoint,
}

/// The analyses by word.
pub const ANALYSES: &[&str] = &["operating_point", "transient"];

/// The keys of a transient.
pub const TRANSIENT_KEYS: &[Key] = &[
    Key::required("duration", Takes::Quantity(units::TIME), "simulated time"),
    Key::default(
        "accuracy",
        Takes::Quantity(units::RATIO),
        "1e-4",
        "error aimed at in every waveform, relative to its largest swing",
    ),
    Key::default(
        "start",
        Takes::Word(&["operating_point", "zero"]),
        "operating_point",
        "where it begins",
    ),
    Key::optional("longest_step", Takes::Quantity(units::TIME), "longest step"),
    Key::default(
        "record_from",
        Takes::Quantity(units::TIME),
        "0 s",
        "instant from which waveforms are kept",
    ),
];

/// Reads `analysis`; None where it is absent or an error was reported.
pub fn read(top: &Fields<'_>) -> Option<Analysis> {
    let node = top.node("analysis")?;
    if let Data::Scalar(text) = &node.data {
        if text == "operating_point" {
            return Some(Analysis::OperatingPoint);
        }
        let headline = format!(
            "analysis takes a mapping such as `transient: {{...}}`, got {}",
            node.what()
        );
        top.error(
            "analysis",
            "wrong-type",
            headline,
            "not an analysis",
            Some("analysis: {transient: {duration: 100 ms}}"),
        );
        return None;
    }
    let mut entries = top.entries("analysis");
    if entries.len() != 1 {
        let headline = format!("a netlist has one analysis, got {}", entries.len());
        top.error(
            "analysis",
            "one-of",
            headline,
            "one of them here",
            Some(&format!("analyses are {}", ANALYSES.join(", "))),
        );
        return None;
    }
    let entry = entries.remove(0);
    match entry.name.text.as_str() {
        "operating_point" => Some(Analysis::OperatingPoint),
        "transient" => read_transient(&top.inside(&entry, TRANSIENT_KEYS)).map(Analysis::Transient),
        "steady_state" => {
            top.reader().sink.report(
                Diagnostic::error("not-yet", "`steady_state` is not solved by this version")
                    .at(entry.name.span, "not available yet")
                    .help("run a `transient` until it has settled, and read in a late window"),
            );
            None
        }
        _ => {
            top.unknown_word(&entry.name, "analysis", ANALYSES);
            None
        }
    }
}

fn read_transient(fields: &Fields<'_>) -> Option<Transient> {
    let duration = fields.positive("duration");
    let accuracy = fields.within("accuracy", 1e-10, 0.1);
    let start = fields.word("start");
    let longest_step = if fields.has("longest_step") {
        Some(fields.positive("longest_step"))
    } else {
        None
    };
    let record_from = fields.non_negative("record_from");
    fields.finish();
    Some(Transient {
        duration: duration?,
        accuracy: accuracy?,
        start: if start? == "zero" {
            Start::Zero
        } else {
            Start::OperatingPoint
        },
        longest_step: match longest_step {
            Some(value) => Some(value?),
            None => None,
        },
        record_from: record_from?,
    })
}
