//! Signal phrases: the one way in which a waveform is named (readings, plots, CSV headings, command line).
//!
//! To add one: a line in `PHRASES`, and a variant where it names something new.

use super::words::{Family, PhraseError, matched, refuse};
use crate::units::{self, Kind};
use std::fmt;

/// An element, or a winding of one: `k1_coil`, `t1.primary`.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Owner {
    /// Name of the element.
    pub element: String,
    /// Winding (of a relay's switching: contact), where one is named.
    pub winding: Option<String>,
}

/// What can be asked of an element besides voltages and currents at its terminals.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Quantity {
    /// Current that makes the flux [A]; self-capacitance excluded.
    WindingCurrent,
    /// Flux linkage [Wb].
    FluxLinkage,
    /// Flux density in the core [T].
    FluxDensity,
    /// Field strength in the core [A/m].
    FieldStrength,
    /// Incremental inductance [H].
    Inductance,
    /// 1 less incremental over initial inductance.
    Saturation,
    /// Position of an armature [m].
    Position,
    /// Pull on an armature [N].
    Pull,
    /// Temperature [K].
    Temperature,
}

/// The name of a waveform, taken apart. It says nothing about whether such a node or element exists.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Phrase {
    /// Potential of a node against `ground` [V].
    VoltageAt(String),
    /// Potential of the first node less that of the second [V].
    VoltageFrom(String, String),
    /// Voltage across an element of two terminals [V].
    VoltageAcross(Owner),
    /// Current into an element's first terminal [A].
    CurrentThrough(Owner),
    /// Current into a terminal [A].
    CurrentInto(Owner, String),
    /// Power absorbed, over all terminals [W].
    Power(Owner),
    /// Energy absorbed since the start [J].
    Energy(Owner),
    /// A quantity of the element's own.
    Of(Quantity, Owner),
}

/// A form of phrase, as the reference lists it.
pub struct PhraseKind {
    /// How it is written: `voltage at NODE`.
    pub pattern: &'static str,
    /// What it measures.
    pub kind: Kind,
    /// What it means, in a phrase.
    pub about: &'static str,
    make: fn(&[&str]) -> Option<Phrase>,
}

const fn form(
    pattern: &'static str,
    kind: Kind,
    about: &'static str,
    make: fn(&[&str]) -> Option<Phrase>,
) -> PhraseKind {
    PhraseKind {
        pattern,
        kind,
        about,
        make,
    }
}

/// Every form of phrase. Of two that are equally near to a misspelt text, the first is suggested.
pub const PHRASES: &[PhraseKind] = &[
    form(
        "voltage at NODE",
        units::VOLTAGE,
        "potential of a node against `ground`",
        |names| match names {
            [node] => Some(Phrase::VoltageAt((*node).into())),
            _ => None,
        },
    ),
    form(
        "voltage from A to B",
        units::VOLTAGE,
        "potential of node A less that of node B",
        |names| match names {
            [a, b] => Some(Phrase::VoltageFrom((*a).into(), (*b).into())),
            _ => None,
        },
    ),
    form(
        "voltage across ELEMENT",
        units::VOLTAGE,
        "first terminal less second, of an element with two",
        |names| owner(names).map(Phrase::VoltageAcross),
    ),
    form(
        "current through ELEMENT",
        units::CURRENT,
        "current into the first terminal",
        |names| owner(names).map(Phrase::CurrentThrough),
    ),
    form(
        "current into ELEMENT.TERMINAL",
        units::CURRENT,
        "current into the named terminal",
        |names| {
            let (place, terminal) = names.first()?.rsplit_once('.')?;
            Some(Phrase::CurrentInto(Owner::parse(place), terminal.into()))
        },
    ),
    form(
        "winding current of COIL",
        units::CURRENT,
        "the current that makes the flux, self-capacitance excluded",
        |names| of(Quantity::WindingCurrent, names),
    ),
    form(
        "power in ELEMENT",
        units::POWER,
        "power absorbed, over all terminals",
        |names| owner(names).map(Phrase::Power),
    ),
    form(
        "energy in ELEMENT",
        units::ENERGY,
        "energy absorbed since the start of the run",
        |names| owner(names).map(Phrase::Energy),
    ),
    form(
        "flux linkage of COIL",
        units::FLUX_LINKAGE,
        "flux times turns of a winding",
        |names| of(Quantity::FluxLinkage, names),
    ),
    form(
        "flux density in COIL",
        units::FLUX_DENSITY,
        "flux density in the core's effective area",
        |names| of(Quantity::FluxDensity, names),
    ),
    form(
        "field strength in COIL",
        units::FIELD_STRENGTH,
        "field strength in the core",
        |names| of(Quantity::FieldStrength, names),
    ),
    form(
        "inductance of COIL",
        units::INDUCTANCE,
        "incremental inductance, slope of flux linkage over current",
        |names| of(Quantity::Inductance, names),
    ),
    form(
        "saturation of COIL",
        units::RATIO,
        "1 less the incremental over the initial inductance",
        |names| of(Quantity::Saturation, names),
    ),
    form(
        "position of RELAY",
        units::LENGTH,
        "position of the armature",
        |names| of(Quantity::Position, names),
    ),
    form(
        "pull of RELAY",
        units::FORCE,
        "pull on the armature",
        |names| of(Quantity::Pull, names),
    ),
    form(
        "temperature of ELEMENT",
        units::TEMPERATURE,
        "temperature of the element's innermost stage",
        |names| of(Quantity::Temperature, names),
    ),
];

const FAMILY: Family = Family {
    word: "unknown-signal",
    noun: "a signal",
    help: "a signal reads like `voltage at NODE`, `current through ELEMENT`, `winding current of COIL` or `power in ELEMENT`",
};

fn owner(names: &[&str]) -> Option<Owner> {
    names.first().map(|name| Owner::parse(name))
}

fn of(quantity: Quantity, names: &[&str]) -> Option<Phrase> {
    owner(names).map(|owner| Phrase::Of(quantity, owner))
}

impl Owner {
    /// From `ELEMENT` or `ELEMENT.WINDING`.
    pub fn parse(text: &str) -> Self {
        match text.split_once('.') {
            Some((element, winding)) => Owner {
                element: element.into(),
                winding: Some(winding.into()),
            },
            None => Owner {
                element: text.into(),
                winding: None,
            },
        }
    }
}

impl fmt::Display for Owner {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match &self.winding {
            Some(winding) => write!(out, "{}.{winding}", self.element),
            None => out.write_str(&self.element),
        }
    }
}

impl Quantity {
    /// What it is, without the preposition: `winding current`.
    pub fn noun(self) -> &'static str {
        self.words().trim_end_matches(" of").trim_end_matches(" in")
    }

    /// The phrase before the element's name: `flux density in`.
    pub fn words(self) -> &'static str {
        match self {
            Quantity::WindingCurrent => "winding current of",
            Quantity::FluxLinkage => "flux linkage of",
            Quantity::FluxDensity => "flux density in",
            Quantity::FieldStrength => "field strength in",
            Quantity::Inductance => "inductance of",
            Quantity::Saturation => "saturation of",
            Quantity::Position => "position of",
            Quantity::Pull => "pull of",
            Quantity::Temperature => "temperature of",
        }
    }

    /// What it measures.
    pub fn kind(self) -> Kind {
        match self {
            Quantity::WindingCurrent => units::CURRENT,
            Quantity::FluxLinkage => units::FLUX_LINKAGE,
            Quantity::FluxDensity => units::FLUX_DENSITY,
            Quantity::FieldStrength => units::FIELD_STRENGTH,
            Quantity::Inductance => units::INDUCTANCE,
            Quantity::Saturation => units::RATIO,
            Quantity::Position => units::LENGTH,
            Quantity::Pull => units::FORCE,
            Quantity::Temperature => units::TEMPERATURE,
        }
    }
}

impl Phrase {
    /// Reads a phrase; spacing is free, letters are not.
    pub fn parse(text: &str) -> Result<Phrase, PhraseError> {
        PHRASES
            .iter()
            .find_map(|form| matched(text, form.pattern).and_then(|names| (form.make)(&names)))
            .ok_or_else(|| {
                let patterns: Vec<_> = PHRASES.iter().map(|form| form.pattern).collect();
                refuse(text, &patterns, &FAMILY)
            })
    }

    /// What it measures.
    pub fn kind(&self) -> Kind {
        match self {
            Phrase::VoltageAt(_) | Phrase::VoltageFrom(..) | Phrase::VoltageAcross(_) => {
                units::VOLTAGE
            }
            Phrase::CurrentThrough(_) | Phrase::CurrentInto(..) => units::CURRENT,
            Phrase::Power(_) => units::POWER,
            Phrase::Energy(_) => units::ENERGY,
            Phrase::Of(quantity, _) => quantity.kind(),
        }
    }

    /// The element that it asks; None for voltages at and between nodes.
    pub fn owner(&self) -> Option<&Owner> {
        match self {
            Phrase::VoltageAt(_) | Phrase::VoltageFrom(..) => None,
            Phrase::VoltageAcross(owner)
            | Phrase::CurrentThrough(owner)
            | Phrase::CurrentInto(owner, _)
            | Phrase::Power(owner)
            | Phrase::Energy(owner)
            | Phrase::Of(_, owner) => Some(owner),
        }
    }

    /// The nodes that it names.
    pub fn nodes(&self) -> impl Iterator<Item = &str> {
        let pair = match self {
            Phrase::VoltageAt(node) => [Some(node), None],
            Phrase::VoltageFrom(a, b) => [Some(a), Some(b)],
            _ => [None, None],
        };
        pair.into_iter().flatten().map(String::as_str)
    }
}

impl fmt::Display for Phrase {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Phrase::VoltageAt(node) => write!(out, "voltage at {node}"),
            Phrase::VoltageFrom(a, b) => write!(out, "voltage from {a} to {b}"),
            Phrase::VoltageAcross(owner) => write!(out, "voltage across {owner}"),
            Phrase::CurrentThrough(owner) => write!(out, "current through {owner}"),
            Phrase::CurrentInto(owner, terminal) => write!(out, "current into {owner}.{terminal}"),
            Phrase::Power(owner) => write!(out, "power in {owner}"),
            Phrase::Energy(owner) => write!(out, "energy in {owner}"),
            Phrase::Of(quantity, owner) => write!(out, "{} {owner}", quantity.words()),
        }
    }
}

impl std::str::FromStr for Phrase {
    type Err = PhraseError;
    fn from_str(text: &str) -> Result<Self, PhraseError> {
        Phrase::parse(text)
    }
}

#[cfg(test)]
mod tests;
