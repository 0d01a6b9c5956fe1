//! Reads a whole netlist: circuit, analysis, readings, limits and the wishes for sizing, all errors in one go.

use super::obvious;
use crate::analysis::{Analysis, Start, period, task};
use crate::circuit::checks::without_rest;
use crate::circuit::{Built, Circuit, Demand, TOP_KEYS, build};
use crate::diag::{Diagnostic, Sink, Sources};
use crate::limits::{Limit, read_limits};
use crate::netlist::{
    DefaultUsed, Document, Failure, Fields, Input, Key, LoadError, Loaded, Named, Reader, Takes,
    Value, load,
};
use crate::readings::{Reading, read_readings};
use crate::units;

/// A netlist ready to be run.
pub struct Netlist {
    /// Its title; empty where it has none.
    pub title: String,
    /// The circuit.
    pub circuit: Circuit,
    /// What is computed.
    pub analysis: Analysis,
    /// Readings in the order of the file.
    pub readings: Vec<Reading>,
    /// Limits in the order of the file.
    pub limits: Vec<Limit>,
    /// What to size a suppressor for, where the netlist says.
    pub sizing: Option<Sizing>,
    /// Samples lie normally within a spread.
    pub normal_spread: bool,
    /// Defaults that held because their keys were not written.
    pub defaults: Vec<DefaultUsed>,
    /// Cautions from reading.
    pub cautions: Vec<Diagnostic>,
    /// The tree, for variants.
    pub document: Document,
    /// The texts, for messages.
    pub sources: Sources,
}

/// What to size a suppressor for, as parameters [SI].
#[derive(Clone, Debug)]
pub struct Sizing {
    /// The coil that is interrupted.
    pub coil: Named,
    /// The switch that interrupts it.
    pub switch: Named,
    /// Operations per second.
    pub operating_rate: Option<Value>,
    /// Winding current at which it has let go.
    pub release_current: Option<Value>,
    /// The voltage whose current at the cold coil is the release current, instead.
    pub release_voltage: Option<Value>,
    /// Longest release time.
    pub release_within: Option<Value>,
    /// Margin asked of the release time.
    pub release_margin: Option<Value>,
    /// Margin asked of every rating.
    pub margin: Value,
    /// Suppressors to try; all without.
    pub try_only: Option<Vec<Named>>,
    /// Elements that stay in place though they look like suppressors.
    pub keep: Option<Vec<Named>>,
}

/// The keys of `sizing`.
pub const SIZING_KEYS: &[Key] = &[
    Key::required("coil", Takes::Name("coil"), "the coil that is interrupted"),
    Key::required(
        "switch",
        Takes::Name("switch"),
        "the switch that interrupts it",
    ),
    Key::optional(
        "operating_rate",
        Takes::Quantity(units::RATE),
        "operations per time",
    ),
    Key::optional(
        "release",
        Takes::Map(RELEASE_KEYS),
        "when the coil has let go, and how soon it must",
    ),
    Key::default(
        "margin",
        Takes::Quantity(units::RATIO),
        "20 %",
        "margin asked of every rating",
    ),
    Key::optional("try", Takes::Names(0), "suppressors to try; all without"),
    Key::optional(
        "keep",
        Takes::Names(0),
        "elements that stay in place though they look like suppressors",
    ),
];

/// The keys of `release`.
pub const RELEASE_KEYS: &[Key] = &[
    Key::optional(
        "current",
        Takes::Quantity(units::CURRENT),
        "winding current at which it has let go",
    ),
    Key::optional(
        "voltage",
        Takes::Quantity(units::VOLTAGE),
        "coil voltage at which it has let go, cold",
    ),
    Key::optional(
        "within",
        Takes::Quantity(units::TIME),
        "longest release time",
    ),
    Key::default(
        "margin",
        Takes::Quantity(units::RATIO),
        "0 %",
        "margin asked of the release time",
    ),
];

/// Why there is no netlist.
pub enum ReadError {
    /// A file could not be read (exit code 4).
    Unreadable(Box<Failure>),
    /// The text is wrong (exit code 2).
    Wrong(Box<Failure>),
}

impl ReadError {
    /// The messages and texts.
    pub fn failure(&self) -> &Failure {
        match self {
            ReadError::Unreadable(failure) | ReadError::Wrong(failure) => failure,
        }
    }
}

/// Reads a netlist with overrides `PATH=VALUE`.
///
/// # Errors
/// A file that cannot be read, or every error that the text has.
pub fn read(input: &Input, overrides: &[String]) -> Result<Netlist, ReadError> {
    read_as(input, overrides, Demand::Solvable)
}

/// Reads a netlist of which only the coils matter: neither source nor ground need be there.
///
/// # Errors
/// As [`read`].
pub fn read_coils(input: &Input, overrides: &[String]) -> Result<Netlist, ReadError> {
    read_as(input, overrides, Demand::Elements)
}

fn read_as(input: &Input, overrides: &[String], demand: Demand) -> Result<Netlist, ReadError> {
    let loaded = load(input, overrides).map_err(|error| match error {
        LoadError::Unreadable(failure) => ReadError::Unreadable(failure),
        LoadError::Wrong(failure) => ReadError::Wrong(failure),
    })?;
    read_loaded(loaded, demand)
}

/// Reads a netlist from a tree, such as a variant with a suppressor in it.
///
/// # Errors
/// Every error that the tree has.
pub fn read_document(document: Document, sources: Sources) -> Result<Netlist, ReadError> {
    let loaded = Loaded {
        document,
        sources,
        sink: Sink::new(),
    };
    read_loaded(loaded, Demand::Solvable)
}

fn read_loaded(loaded: Loaded, demand: Demand) -> Result<Netlist, ReadError> {
    let Loaded {
        mut document,
        mut sources,
        sink,
    } = loaded;
    obvious::add(&mut document, &mut sources);
    let read = read_top(&document, demand, &sink);
    let diagnostics = sink.sorted();
    match read {
        Some(parts) if !sink.has_errors() => Ok(Netlist {
            title: parts.title,
            circuit: parts.circuit,
            analysis: parts.analysis,
            readings: parts.readings,
            limits: parts.limits,
            sizing: parts.sizing,
            normal_spread: parts.normal_spread,
            defaults: parts.defaults,
            cautions: diagnostics,
            document,
            sources,
        }),
        _ => Err(ReadError::Wrong(Box::new(Failure {
            diagnostics,
            sources,
        }))),
    }
}

struct Parts {
    title: String,
    circuit: Circuit,
    analysis: Analysis,
    readings: Vec<Reading>,
    limits: Vec<Limit>,
    sizing: Option<Sizing>,
    normal_spread: bool,
    defaults: Vec<DefaultUsed>,
}

fn read_top(document: &Document, demand: Demand, sink: &Sink) -> Option<Parts> {
    let reader = Reader::new(sink);
    let top = Fields::new(&document.root, "", TOP_KEYS, &reader);
    let title = if top.has("title") {
        top.text("title").map(|title| title.text)
    } else {
        None
    };
    let normal_spread = top.word("spread") == Some("normal");
    let written = top.has("analysis");
    let analysis = task::read(&top);
    let readings = read_readings(&top);
    let Built { circuit, ratings } = build(&top, demand, &|_| true);
    let limits = read_limits(&top, &readings, &ratings);
    let sizing = if top.has("sizing") {
        read_sizing(&top)
    } else {
        None
    };
    top.finish();
    let mut circuit = circuit?;
    circuit.complete(reader.parameters.borrow().clone());
    check_signals(&circuit, &readings, sink);
    check_sizing(&circuit, sizing.as_ref(), sink);
    let analysis = match (analysis, written) {
        (Some(analysis), _) => analysis,
        (None, false) => Analysis::OperatingPoint,
        (None, true) => return None,
    };
    if demand == Demand::Solvable && begins_at_rest(&analysis) {
        without_rest(&circuit)
            .into_iter()
            .for_each(|diagnostic| sink.report(diagnostic));
    }
    if demand == Demand::Solvable {
        check_period(&circuit, &analysis, sink);
    }
    let defaults = reader.defaults.borrow().clone();
    Some(Parts {
        title: title.unwrap_or_default(),
        circuit,
        analysis,
        readings,
        limits,
        sizing,
        normal_spread,
        defaults,
    })
}

/// A periodic state needs a period that goes with all that the clock does.
fn check_period(circuit: &Circuit, analysis: &Analysis, sink: &Sink) {
    let fault = match analysis {
        Analysis::SteadyState(task) => period::repeats(circuit).err().or_else(|| {
            let fit = period::fits(circuit, circuit.values()[task.period], task.unknown);
            fit.err().map(|why| why.at(task.span, "this period"))
        }),
        Analysis::Transient(transient) if transient.start == Start::SteadyState => {
            period::common_period(circuit, transient.start_span).err()
        }
        Analysis::Transient(_) | Analysis::OperatingPoint => None,
    };
    fault.into_iter().for_each(|why| sink.report(why));
}

fn begins_at_rest(analysis: &Analysis) -> bool {
    match analysis {
        Analysis::OperatingPoint => true,
        Analysis::SteadyState(_) => false,
        Analysis::Transient(transient) => transient.start == Start::OperatingPoint,
    }
}

/// Every signal that a reading names is there, and so is every element whose event it waits for.
fn check_signals(circuit: &Circuit, readings: &[Reading], sink: &Sink) {
    for reading in readings {
        if let Err(why) = circuit.tap(&reading.signal.phrase) {
            sink.report(Diagnostic::error("unknown-signal", why).at(
                reading.signal.span,
                format!("signal of reading `{}`", reading.name.text),
            ));
        }
        for instant in reading.events() {
            let Some((event, span)) = instant.event() else {
                continue;
            };
            let known = circuit.find(&event.element.element);
            let switches = known.is_some_and(|entry| match &event.element.winding {
                None => entry.kind.is_switch(),
                Some(contact) => entry.kind.word == "relay" && entry.windings.contains(contact),
            });
            if !switches {
                let words = circuit
                    .entries
                    .iter()
                    .filter(|entry| entry.kind.is_switch());
                let near = crate::netlist::nearest(
                    &event.element.element,
                    words.map(|entry| entry.name.as_str()),
                );
                let headline = format!("no switch `{}` can open or close", event.element);
                let diagnostic = Diagnostic::error("unknown-event", headline);
                sink.report(match near {
                    Some(near) => diagnostic.at(span, format!("did you mean `{near}`?")),
                    None => diagnostic.at(span, "not a switch of this netlist"),
                });
            }
        }
    }
}

fn read_sizing(top: &Fields<'_>) -> Option<Sizing> {
    let fields = top.map_with("sizing", SIZING_KEYS)?;
    let coil = fields.name("coil");
    let switch = fields.name("switch");
    let rate = if fields.has("operating_rate") {
        Some(fields.positive("operating_rate"))
    } else {
        None
    };
    let margin = fields.within("margin", 0.0, 0.99);
    let release = if fields.has("release") {
        fields.map("release")
    } else {
        None
    };
    let optional = |fields: &Fields<'_>, key: &'static str| {
        if fields.has(key) {
            fields.positive(key)
        } else {
            None
        }
    };
    let (mut current, mut voltage, mut within, mut release_margin) = (None, None, None, None);
    if let Some(release) = &release {
        current = optional(release, "current");
        voltage = optional(release, "voltage");
        within = optional(release, "within");
        release_margin = release.within("margin", 0.0, 0.99);
        if release.has("current") == release.has("voltage") {
            release.error_here(
                "one-of",
                "`release` takes either `current` or `voltage`".into(),
                "write one of the two",
                "`release: {current: 8 mA, within: 25 ms, margin: 10 %}`",
            );
        }
        release.finish();
    }
    let try_only = if fields.has("try") {
        fields.names("try")
    } else {
        None
    };
    let keep = if fields.has("keep") {
        fields.names("keep")
    } else {
        None
    };
    fields.finish();
    Some(Sizing {
        coil: coil?,
        switch: switch?,
        operating_rate: rate.flatten(),
        release_current: current,
        release_voltage: voltage,
        release_within: within,
        release_margin,
        margin: margin?,
        try_only,
        keep,
    })
}

fn check_sizing(circuit: &Circuit, sizing: Option<&Sizing>, sink: &Sink) {
    let Some(sizing) = sizing else { return };
    for named in sizing.keep.iter().flatten() {
        if circuit.find(&named.text).is_none() {
            let names = circuit.entries.iter().map(|entry| entry.name.as_str());
            let near = crate::netlist::nearest(&named.text, names);
            let label = near.map_or("not an element of this netlist".into(), |near| {
                format!("did you mean `{near}`?")
            });
            let headline = format!("there is no element `{}` to keep", named.text);
            sink.report(Diagnostic::error("unknown-element", headline).at(named.span, label));
        }
    }
    for (named, wanted) in [(&sizing.coil, "coil"), (&sizing.switch, "switch")] {
        let right = |word: &str| match wanted {
            "coil" => matches!(word, "coil" | "inductor"),
            _ => matches!(word, "switch" | "contact"),
        };
        if circuit
            .find(&named.text)
            .is_some_and(|entry| right(entry.kind.word))
        {
            continue;
        }
        let names = circuit
            .entries
            .iter()
            .filter(|entry| right(entry.kind.word))
            .map(|entry| entry.name.as_str());
        let near = crate::netlist::nearest(&named.text, names);
        let diagnostic = Diagnostic::error(
            "unknown-element",
            format!("there is no {wanted} `{}`", named.text),
        );
        sink.report(match near {
            Some(near) => diagnostic.at(named.span, format!("did you mean `{near}`?")),
            None => diagnostic.at(named.span, format!("not a {wanted} of this netlist")),
        });
    }
}
