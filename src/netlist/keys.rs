//! The words of a mapping in the netlist, as a table: the parser, the reference pages and the schema read it.

use crate::units::Kind;

/// One key of a mapping.
#[derive(Debug)]
pub struct Key {
    /// The word as written.
    pub name: &'static str,
    /// What stands behind it.
    pub takes: Takes,
    /// Whether it must be there.
    pub need: Need,
    /// What it means, in a phrase.
    pub about: &'static str,
}

/// What a key takes.
#[derive(Clone, Copy, Debug)]
pub enum Takes {
    /// A number with a unit, possibly with a spread; it becomes a parameter with a path.
    Quantity(Kind),
    /// A whole number from 1.
    Count,
    /// One of these words.
    Word(&'static [&'static str]),
    /// The name of something: a node, an element, a core.
    Name(&'static str),
    /// A list of names, with its exact length: `nodes: [a, b]`.
    Names(usize),
    /// Free text.
    Text,
    /// A signal phrase or an event phrase.
    Phrase,
    /// A constant of this kind or a waveform.
    Waveform(Kind),
    /// A list of quantities of one kind.
    List(Kind),
    /// A list of pairs `[x, y]`.
    Pairs(Kind, Kind),
    /// A mapping with keys of its own.
    Map(&'static [Key]),
    /// Anything that the kind's own reader takes apart; the text says what, for the reference.
    Other(&'static str),
}

/// Whether a key must be there.
#[derive(Clone, Copy, Debug)]
pub enum Need {
    /// Missing is an error.
    Required,
    /// May be absent; then there is none.
    Optional,
    /// May be absent; then this value holds and is listed among the defaults used.
    Default(&'static str),
}

impl Key {
    /// A key that must be there.
    pub const fn required(name: &'static str, takes: Takes, about: &'static str) -> Self {
        Key {
            name,
            takes,
            need: Need::Required,
            about,
        }
    }
    /// A key that may be absent.
    pub const fn optional(name: &'static str, takes: Takes, about: &'static str) -> Self {
        Key {
            name,
            takes,
            need: Need::Optional,
            about,
        }
    }
    /// A key with a value of its own where it is absent, written as in a netlist: `0 Ω`.
    pub const fn default(
        name: &'static str,
        takes: Takes,
        default: &'static str,
        about: &'static str,
    ) -> Self {
        Key {
            name,
            takes,
            need: Need::Default(default),
            about,
        }
    }
}
