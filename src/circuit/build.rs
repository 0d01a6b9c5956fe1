//! From the document to a checked circuit: materials and cores, elements with their parts, nodes, numbers.

use super::checks::CHECKS;
use super::numbering::Unfollowed;
use super::{Circuit, Entry, GROUND, Refused};
use crate::diag::{Diagnostic, Sink, Span};
use crate::elements::{
    ElementKind, KINDS, Made, Surroundings, Unknown, Unsound, kind::COMMON_KEYS,
};
use crate::magnetics::Library;
use crate::netlist::{Fields, Key, NamedNode, Node, Parameters, Reader, Takes, Value, Values};
use crate::signals::{Rated, Ratings, read_ratings};
use crate::units::{self, Amount};
use std::collections::BTreeMap;

/// The keys at the top of a netlist.
pub const TOP_KEYS: &[Key] = &[
    Key::optional("title", Takes::Text, "what the netlist is, in a line"),
    Key::default(
        "ambient",
        Takes::Quantity(units::TEMPERATURE),
        "25 °C",
        "temperature of everything that is not heated",
    ),
    Key::default(
        "reference_temperature",
        Takes::Quantity(units::TEMPERATURE),
        "25 °C",
        "temperature at which the values of parts hold",
    ),
    Key::default(
        "spread",
        Takes::Word(&["uniform", "normal"]),
        "uniform",
        "how samples lie within a spread",
    ),
    Key::optional(
        "bring",
        Takes::Other("files with materials, cores and parts"),
        "files in or below the netlist's folder",
    ),
    Key::optional(
        "materials",
        Takes::Other("a mapping of names to materials"),
        "core materials",
    ),
    Key::optional(
        "cores",
        Takes::Other("a mapping of names to cores"),
        "cores",
    ),
    Key::optional(
        "parts",
        Takes::Other("a mapping of names to parts"),
        "parts that elements take their keys from",
    ),
    Key::required(
        "elements",
        Takes::Other("a mapping of names to elements"),
        "the elements of the circuit",
    ),
    Key::optional("analysis", Takes::Other("one analysis"), "what is computed"),
    Key::optional(
        "readings",
        Takes::Other("a mapping of names to readings"),
        "numbers taken from waveforms",
    ),
    Key::optional(
        "limits",
        Takes::Other("a mapping of names to limits"),
        "bounds on readings and ratings",
    ),
    Key::optional(
        "sizing",
        Takes::Other("what to size a suppressor for"),
        "the sizing of a suppressor",
    ),
];

/// The key by which an element names its kind.
const KIND_KEY: &str = "kind";

/// What came of building.
pub struct Built {
    /// The circuit; None where an error was reported.
    pub circuit: Option<Circuit>,
    /// The ratings of all elements, those of unsound ones included, so that limits can be read all the same.
    pub ratings: Vec<Ratings>,
}

/// What is asked of a circuit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Demand {
    /// That it can be solved: what breaks the rules of structure is an error.
    Solvable,
    /// That its elements are sound; coils alone, without source and ground, will do.
    Elements,
}

/// Builds the circuit of a netlist whose top is `top`. `probe` says whose terminal currents will be asked for.
/// Errors go to the reader's sink.
pub fn build(top: &Fields<'_>, demand: Demand, probe: &dyn Fn(&str) -> bool) -> Built {
    let mut ratings = Vec::new();
    let circuit = read_elements(top, &mut ratings)
        .and_then(|entries| assemble(entries, top.reader(), demand, probe));
    Built { circuit, ratings }
}

/// Every element of a netlist; None where one of them is wrong.
fn read_elements(top: &Fields<'_>, ratings: &mut Vec<Ratings>) -> Option<Vec<Entry>> {
    let reader = top.reader();
    let library = Library::read(top);
    let around = Surroundings {
        library: &library,
        ambient: temperature(top, "ambient"),
        reference_temperature: temperature(top, "reference_temperature"),
    };
    let parts = Parts::read(top);
    let mut entries = Vec::new();
    for named in top.entries("elements") {
        if let Some(entry) = read_element(&named, top, &parts, &around, ratings) {
            entries.push(entry);
        }
    }
    if !top.has("elements") {
        return None;
    }
    parts.check_unused_kinds();
    (!reader.sink.has_errors()).then_some(entries)
}

/// A temperature of the file. Where it is wrong, room temperature stands in, so that reading on finds the other errors.
fn temperature(top: &Fields<'_>, key: &str) -> Value {
    top.value(key).unwrap_or_else(|| {
        let kind = units::TEMPERATURE;
        let room = Amount::exactly(298.15, kind.dimension.unwrap_or_default());
        top.reader().register(key, kind, room, None)
    })
}

/// Joins elements to a circuit: nodes, numbers, checks.
fn assemble(
    entries: Vec<Entry>,
    reader: &Reader<'_>,
    demand: Demand,
    probe: &dyn Fn(&str) -> bool,
) -> Option<Circuit> {
    let parameters = reader.parameters.borrow().clone();
    let mut circuit = Circuit::unnumbered(entries, parameters);
    let sound = circuit.derive_all();
    for refused in sound {
        report_refused(&circuit, &refused, reader);
    }
    if reader.sink.has_errors() {
        return None;
    }
    let probed: Vec<bool> = circuit
        .entries
        .iter()
        .map(|entry| probe(&entry.name))
        .collect();
    if let Err(unfollowed) = circuit.number(&probed) {
        report_unfollowed(&circuit, &unfollowed, reader);
        return None;
    }
    let aside = Sink::new();
    let sink = match demand {
        Demand::Solvable => reader.sink,
        Demand::Elements => &aside,
    };
    for check in CHECKS {
        (check.run)(&circuit, sink);
    }
    circuit.solvable = !sink.has_errors();
    (circuit.solvable || demand == Demand::Elements).then_some(circuit)
}

/// The entries of `parts`, by name.
struct Parts<'a> {
    by_name: BTreeMap<String, NamedNode<'a>>,
    reader: &'a Reader<'a>,
}

impl<'a> Parts<'a> {
    fn read(top: &Fields<'a>) -> Self {
        let by_name = top
            .entries("parts")
            .into_iter()
            .map(|part| (part.name.text.clone(), part))
            .collect();
        Parts {
            by_name,
            reader: top.reader(),
        }
    }

    /// Every part names a kind that there is, used or not.
    fn check_unused_kinds(&self) {
        for part in self.by_name.values() {
            if find_kind(part.node, self.reader).is_none() && part.node.get(KIND_KEY).is_none() {
                self.reader.sink.report(
                    Diagnostic::error(
                        "missing-key",
                        format!("part `{}` needs `kind`", part.name.text),
                    )
                    .at(part.name.span, "what kind of element is it?")
                    .help(format!("kinds are {}", kind_words().join(", "))),
                );
            }
        }
    }
}

fn kind_words() -> Vec<&'static str> {
    KINDS.iter().map(|kind| kind.word).collect()
}

/// The kind that a mapping names; an unknown word is reported.
fn find_kind(node: &Node, reader: &Reader<'_>) -> Option<&'static ElementKind> {
    let written = node.get(KIND_KEY)?;
    let text = written.text().unwrap_or("");
    let found = KINDS.iter().find(|kind| kind.word == text);
    if found.is_none() {
        let diagnostic = Diagnostic::error(
            "unknown-kind",
            format!(
                "`{}` is no kind of element",
                crate::netlist::shortened(text)
            ),
        );
        let diagnostic = match crate::netlist::nearest(text, kind_words()) {
            Some(near) => diagnostic.at(written.span, format!("did you mean `{near}`?")),
            None => diagnostic
                .at(written.span, "unknown kind")
                .help(format!("kinds are {}", kind_words().join(", "))),
        };
        reader.sink.report(diagnostic);
    }
    found
}

fn read_element(
    named: &NamedNode<'_>,
    top: &Fields<'_>,
    parts: &Parts<'_>,
    around: &Surroundings<'_>,
    all_ratings: &mut Vec<Ratings>,
) -> Option<Entry> {
    let reader = top.reader();
    let part = find_part(named, parts, reader)?;
    let own = find_kind(named.node, reader);
    if own.is_none() && named.node.get(KIND_KEY).is_some() {
        return None;
    }
    let of_part = part.and_then(|part| find_kind(part.node, reader));
    let Some(kind) = own.or(of_part) else {
        if part.is_none() {
            reader.sink.report(
                Diagnostic::error(
                    "missing-key",
                    format!("element `{}` needs `kind` or `part`", named.name.text),
                )
                .at(named.name.span, "what kind of element is it?")
                .help(format!("kinds are {}", kind_words().join(", "))),
            );
        }
        return None;
    };
    if let (Some(own), Some(of_part)) = (own, of_part)
        && own.word != of_part.word
    {
        let span = named
            .node
            .get(KIND_KEY)
            .map_or(named.name.span, |node| node.span);
        reader.sink.report(
            Diagnostic::error(
                "kind-mismatch",
                format!("the part is a {}, the element a {}", of_part.word, own.word),
            )
            .at(span, "another kind than the part's")
            .help("leave `kind` out: the part names it"),
        );
        return None;
    }
    let mut fields =
        Fields::new(named.node, named.path.clone(), kind.keys, reader).also(COMMON_KEYS);
    if let Some(part) = part {
        fields = fields.behind(part.node, part.path.clone());
    }
    let made = (kind.read)(&fields, around);
    let ratings = element_ratings(&fields);
    all_ratings.push(Ratings {
        element: named.name.text.clone(),
        rated: ratings.clone(),
    });
    let label = if fields.has("label") {
        fields.text("label").map(|label| label.text)
    } else {
        None
    };
    fields.finish();
    let Made {
        terminals,
        windings,
        element,
    } = made?;
    Some(Entry {
        name: named.name.text.clone(),
        span: named.name.span,
        node: named.node.clone(),
        kind,
        label,
        ratings,
        terminals,
        nodes: Vec::new(),
        windings,
        element,
        modes: 0..0,
        guards: 0..0,
        probed: false,
    })
}

/// The part that an element names; Some(None) where it names none.
fn find_part<'a, 'p>(
    named: &NamedNode<'_>,
    parts: &'p Parts<'a>,
    reader: &Reader<'_>,
) -> Option<Option<&'p NamedNode<'a>>> {
    let Some(written) = named.node.get("part") else {
        return Some(None);
    };
    let text = written.text().unwrap_or("");
    match parts.by_name.get(text) {
        Some(part) => Some(Some(part)),
        None => {
            let diagnostic = Diagnostic::error(
                "unknown-part",
                format!("there is no part `{}`", crate::netlist::shortened(text)),
            );
            let diagnostic =
                match crate::netlist::nearest(text, parts.by_name.keys().map(String::as_str)) {
                    Some(near) => diagnostic.at(written.span, format!("did you mean `{near}`?")),
                    None => diagnostic
                        .at(written.span, "not among `parts`")
                        .help("write it under `parts:`, or bring a file that has it"),
                };
            reader.sink.report(diagnostic);
            None
        }
    }
}

/// What an element is rated for, by itself or its part.
fn element_ratings(fields: &Fields<'_>) -> Vec<Rated> {
    if !fields.has("ratings") {
        return Vec::new();
    }
    fields
        .map("ratings")
        .map_or_else(Vec::new, |ratings| read_ratings(&ratings))
}

impl Circuit {
    /// A circuit whose elements are not numbered yet.
    fn unnumbered(mut entries: Vec<Entry>, parameters: Parameters) -> Self {
        let mut node_names: Vec<String> = Vec::new();
        let mut number: BTreeMap<String, Unknown> = BTreeMap::new();
        number.insert(GROUND.to_owned(), Unknown::GROUND);
        for entry in &mut entries {
            for terminal in &entry.terminals {
                let next = Unknown(node_names.len() as u32);
                let node = *number.entry(terminal.node.text.clone()).or_insert_with(|| {
                    node_names.push(terminal.node.text.clone());
                    next
                });
                entry.nodes.push(node);
            }
        }
        let by_name = entries
            .iter()
            .enumerate()
            .map(|(k, entry)| (entry.name.clone(), k))
            .collect();
        let values = parameters.nominal();
        Circuit {
            entries,
            node_names,
            unknowns: Vec::new(),
            parameters,
            values,
            dependents: BTreeMap::new(),
            pattern: crate::dae::Pattern::default(),
            stamped: Vec::new(),
            slots: Vec::new(),
            linear_slots: Vec::new(),
            linear: Default::default(),
            switching: Vec::new(),
            mode_size: 0,
            guard_size: 0,
            by_name,
            solvable: false,
        }
    }

    /// Derives every element once, and learns which values each depends on.
    fn derive_all(&mut self) -> Vec<Refused> {
        let mut refused = Vec::new();
        for (k, entry) in self.entries.iter_mut().enumerate() {
            let (result, read) = self
                .values
                .traced(|values: &Values| entry.element.derive(values));
            for value in read {
                self.dependents.entry(value).or_default().push(k);
            }
            if let Err(reason) = result {
                refused.push(Refused { entry: k, reason });
            }
        }
        refused
    }
}

/// Points at the key that is to blame (`square.duty`), where it is written; at what holds it where it is not.
fn key_span(entry: &Entry, key: &str) -> Span {
    let mut at = (&entry.node, entry.span);
    for part in key.split('.') {
        match at.0.get(part) {
            Some(node) => at = (node, node.span),
            None => break,
        }
    }
    at.1
}

/// The diagnostic of a refused element.
pub fn refusal(circuit: &Circuit, refused: &Refused) -> Diagnostic {
    let entry = &circuit.entries[refused.entry];
    let Unsound {
        word,
        key,
        headline,
        help,
    } = &refused.reason;
    Diagnostic::error(word, format!("`{}`: {headline}", entry.name))
        .at(key_span(entry, key), "here")
        .help(help.clone())
}

fn report_refused(circuit: &Circuit, refused: &Refused, reader: &Reader<'_>) {
    reader.sink.report(refusal(circuit, refused));
}

fn report_unfollowed(circuit: &Circuit, unfollowed: &Unfollowed, reader: &Reader<'_>) {
    let entry = &circuit.entries[unfollowed.entry];
    let key = if entry.node.get("follows").is_some() {
        "follows"
    } else {
        "watches.signal"
    };
    reader.sink.report(
        Diagnostic::error("unknown-signal", format!("`{}` cannot be followed: {}", unfollowed.phrase, unfollowed.why))
            .at(key_span(entry, key), "this signal")
            .help("a potential, a voltage, a current through an element or the winding current of a coil can be followed"),
    );
}
