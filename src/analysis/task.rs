//! What a netlist asks to be computed: `analysis: {transient: {...}}`, `{steady_state: {...}}` or `operating_point`.

use crate::diag::Span;
use crate::netlist::{Data, Fields, Key, Takes, Value};
use crate::units;

/// An analysis with its wishes.
#[derive(Clone, Debug)]
pub enum Analysis {
    /// The state at rest.
    OperatingPoint,
    /// Waveforms over time.
    Transient(Transient),
    /// Waveforms over one period of the periodic state.
    SteadyState(SteadyState),
}

/// A periodic steady state's wishes, as parameters [SI].
#[derive(Clone, Debug)]
pub struct SteadyState {
    /// The period, or where an unknown one is looked for.
    pub period: Value,
    /// True where the circuit sets its period itself.
    pub unknown: bool,
    /// Where the period is written.
    pub span: Span,
    /// Error aimed at in every waveform, relative to its largest swing.
    pub accuracy: Value,
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
    /// Where that is written.
    pub start_span: Span,
    /// Longest step.
    pub longest_step: Option<Value>,
    /// Instant from which waveforms are kept.
    pub record_from: Value,
    /// Steps that may be tried before the run is given up.
    pub most_steps: usize,
}

/// Where a transient begins.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Start {
    /// Uncharged, with the initial values that are given.
    Zero,
    /// At rest, switches as they start.
    OperatingPoint,
    /// In the periodic state.
    SteadyState,
}

/// The analyses by word.
pub const ANALYSES: &[&str] = &["operating_point", "steady_state", "transient"];

/// Steps that may be tried where the netlist does not say.
pub const MOST_STEPS: u64 = 100_000_000;

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
        Takes::Word(&["operating_point", "steady_state", "zero"]),
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
    Key::default(
        "most_steps",
        Takes::Count,
        "100000000",
        "steps after which the run is given up",
    ),
];

/// The keys of a periodic steady state.
pub const STEADY_STATE_KEYS: &[Key] = &[
    Key::required(
        "period",
        Takes::Quantity(units::TIME),
        "the period, a multiple of every source's; or `unknown` where the circuit sets its own",
    ),
    Key::optional(
        "near",
        Takes::Quantity(units::TIME),
        "where an unknown period is looked for",
    ),
    Key::default(
        "accuracy",
        Takes::Quantity(units::RATIO),
        "1e-4",
        "error aimed at in every waveform, relative to its largest swing",
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
            read_steady_state(&top.inside(&entry, STEADY_STATE_KEYS)).map(Analysis::SteadyState)
        }
        _ => {
            top.unknown_word(&entry.name, "analysis", ANALYSES);
            None
        }
    }
}

fn read_steady_state(fields: &Fields<'_>) -> Option<SteadyState> {
    let written = fields.node("period").map(|node| &node.data);
    let unknown = matches!(written, Some(Data::Scalar(text)) if text == "unknown");
    let period = if unknown {
        if !fields.has("near") {
            fields.error(
                "period",
                "missing-key",
                "an unknown period needs `near`: about where it lies",
                "looked for from where?",
                Some("near: 1 ms"),
            );
        }
        fields.positive("near")
    } else {
        if fields.has("near") {
            fields.error(
                "near",
                "one-of",
                "`near` goes with an unknown period alone",
                "the period is given",
                Some("write `period: unknown`, or leave `near` out"),
            );
        }
        fields.positive("period")
    };
    let accuracy = fields.within("accuracy", 1e-10, 0.1);
    fields.finish();
    Some(SteadyState {
        period: period?,
        unknown,
        span: fields.span("period"),
        accuracy: accuracy?,
    })
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
    let most_steps = fields.count("most_steps");
    fields.finish();
    Some(Transient {
        duration: duration?,
        accuracy: accuracy?,
        start: match start? {
            "zero" => Start::Zero,
            "steady_state" => Start::SteadyState,
            _ => Start::OperatingPoint,
        },
        start_span: fields.span("start"),
        longest_step: match longest_step {
            Some(value) => Some(value?),
            None => None,
        },
        record_from: record_from?,
        most_steps: most_steps?,
    })
}
