//! What a kind of element is to the parser and the reference: a word, its keys, and the reading of them.

use super::element::Element;
use crate::magnetics::Library;
use crate::netlist::{Fields, Key, Named, Need, Takes, Value};
use crate::signals::RATING_KEYS;
use crate::units;

/// A kind of element: one file, one line in `KINDS`.
pub struct ElementKind {
    /// The word after `kind:`.
    pub word: &'static str,
    /// What it is, in a sentence.
    pub about: &'static str,
    /// The keys beyond those that any element takes ([`COMMON_KEYS`]).
    pub keys: &'static [Key],
    /// Reads the keys; None where an error was reported.
    pub read: fn(&Fields<'_>, &Surroundings<'_>) -> Option<Made>,
}

impl ElementKind {
    /// True where an element of this kind does nothing but open and close.
    pub fn is_switch(&self) -> bool {
        matches!(self.word, "switch" | "contact")
    }
}

/// The keys that any element takes; the circuit's builder reads them.
pub const COMMON_KEYS: &[Key] = &[
    Key::optional("kind", Takes::Text, "the kind of element"),
    Key::optional(
        "part",
        Takes::Name("part"),
        "takes the keys of this entry of `parts`",
    ),
    Key::optional(
        "label",
        Takes::Text,
        "designation on the drawing, free text",
    ),
    Key::optional(
        "ratings",
        Takes::Map(RATING_KEYS),
        "what the part is rated for",
    ),
    Key::optional(
        "reference_temperature",
        Takes::Quantity(units::TEMPERATURE),
        "temperature at which this part's values hold",
    ),
    Key::optional(
        "thermal",
        Takes::Other("to_ambient and capacity, or a list of such stages"),
        "way of the heat to ambient",
    ),
];

/// What an element's reader may look at besides its own keys.
pub struct Surroundings<'a> {
    /// The cores and materials of the file.
    pub library: &'a Library<'a>,
    /// Temperature of everything that is not heated [K].
    pub ambient: Value,
    /// Temperature at which parameters hold unless a part says otherwise [K].
    pub reference_temperature: Value,
}

/// One terminal of an element.
#[derive(Clone, Debug)]
pub struct Terminal {
    /// Its name in `current into ELEMENT.TERMINAL`.
    pub name: String,
    /// The node that it is on.
    pub node: Named,
}

/// An element as read.
pub struct Made {
    /// Its terminals, in the order that its equations use.
    pub terminals: Vec<Terminal>,
    /// Its windings by name, each from terminal 2 k to 2 k + 1; empty where it has no named windings.
    pub windings: Vec<String>,
    /// The element.
    pub element: Box<dyn Element>,
}

impl Made {
    /// An element without named windings.
    pub fn new(terminals: Vec<Terminal>, element: impl Element + 'static) -> Self {
        Made {
            terminals,
            windings: Vec::new(),
            element: Box::new(element),
        }
    }
}

/// The key `nodes` of a two-terminal element.
pub const NODES: Key = Key {
    name: "nodes",
    takes: Takes::Names(2),
    need: Need::Required,
    about: "first and second node; the current counts positive from first to second",
};

/// The temperature at which an element's values hold: its own, or the file's.
pub fn reference_temperature(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Value> {
    if fields.has("reference_temperature") {
        fields.value("reference_temperature")
    } else {
        Some(around.reference_temperature)
    }
}

/// Reads `nodes: [first, second]`.
pub fn pair(fields: &Fields<'_>) -> Option<Vec<Terminal>> {
    let names = fields.names("nodes")?;
    Some(name_terminals(&["first", "second"], names))
}

/// Reads terminals that have keys of their own, such as `anode` and `cathode`.
pub fn named(fields: &Fields<'_>, keys: &[&'static str]) -> Option<Vec<Terminal>> {
    let nodes: Vec<Option<Named>> = keys.iter().map(|key| fields.name(key)).collect();
    let nodes: Option<Vec<Named>> = nodes.into_iter().collect();
    Some(name_terminals(keys, nodes?))
}

fn name_terminals(names: &[&str], nodes: Vec<Named>) -> Vec<Terminal> {
    names
        .iter()
        .zip(nodes)
        .map(|(name, node)| Terminal {
            name: (*name).to_string(),
            node,
        })
        .collect()
}
