//! Magnetic circuit: legs of iron and air between magnetic nodes, windings on any of them, closed rings around them.
//! See [`super::wound`] for its equations.

use super::kind::{ElementKind, Made, NODES, Surroundings, reference_temperature};
use super::transformer::{INITIAL_CURRENT, SELF_CAPACITANCE, ends, read_turns};
use super::winding::{
    LAYER_BREADTH, LAYERS, RESISTANCE, SKIN_AND_PROXIMITY, TEMPERATURE_COEFFICIENT, TURNS, WIRE,
    Winding,
};
use super::wound::{Layout, Leakage, Turns, WoundLegs};
use crate::diag::{Diagnostic, Span};
use crate::magnetics::{Core, Network};
use crate::netlist::{Data, Fields, Key, Named, Takes, Value, nearest};
use crate::units;
use std::sync::Arc;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "magnetic_circuit",
    about: "Legs of iron and air that meet in magnetic nodes, with windings on any of them.",
    keys: &[
        Key::required(
            "legs",
            Takes::Other("a mapping of leg names to the keys of a core and between"),
            "the legs; flux counts positive from the first node of `between` to the second",
        ),
        Key::required(
            "windings",
            Takes::Other("a mapping of winding names to nodes, leg, turns, wire or resistance"),
            "the windings; current into the first node drives flux along the leg",
        ),
        Key::optional(
            "shading_rings",
            Takes::Other("a mapping of ring names to leg and resistance"),
            "closed turns around a leg, such as the ring in the pole of an AC magnet",
        ),
    ],
    read,
};

/// What a leg has besides the keys of its core.
const LEG_KEYS: &[Key] = &[Key::required(
    "between",
    Takes::Names(2),
    "the magnetic nodes that it joins",
)];

const LEG: Key = Key::required("leg", Takes::Name("a leg"), "the leg that it is on");

/// The keys of one winding.
pub const WINDING_KEYS: &[Key] = &[
    NODES,
    LEG,
    TURNS,
    WIRE,
    RESISTANCE,
    TEMPERATURE_COEFFICIENT,
    SKIN_AND_PROXIMITY,
    LAYERS,
    LAYER_BREADTH,
    SELF_CAPACITANCE,
    INITIAL_CURRENT,
    Key::optional(
        "leakage",
        Takes::Quantity(units::INDUCTANCE),
        "inductance of flux that closes in air, in series with the winding",
    ),
];

/// The keys of a ring.
pub const RING_KEYS: &[Key] = &[
    LEG,
    Key::default("turns", Takes::Count, "1", "number of turns"),
    RESISTANCE,
    WIRE,
    TEMPERATURE_COEFFICIENT,
];

/// The legs as read.
struct Legs {
    names: Vec<Named>,
    cores: Vec<Arc<Core>>,
    ends: Vec<(usize, usize)>,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let reference = reference_temperature(fields, around);
    let legs = read_legs(fields, around);
    let (mut terminals, mut windings, mut own) = (Vec::new(), Vec::new(), Vec::new());
    let entries = fields.entries("windings");
    for entry in &entries {
        let inner = fields.inside(entry, WINDING_KEYS);
        let ends = ends(&inner, &entry.name.text);
        let leg = legs.as_ref().and_then(|legs| leg_of(&inner, legs));
        let turns = reference.and_then(|reference| {
            read_turns(
                &inner,
                around,
                reference,
                &entry.name.text,
                leg.unwrap_or(0),
            )
        });
        let leakage = inner.has("leakage").then(|| inner.non_negative("leakage"));
        inner.finish();
        let (Some(ends), Some(turns), Some(_)) = (ends, turns, leg) else {
            continue;
        };
        if leakage != Some(None) {
            terminals.extend(ends);
            windings.push(turns);
            own.push(leakage.flatten());
        }
    }
    if fields.has("windings") && entries.is_empty() {
        fields.error(
            "windings",
            "too-few-windings",
            "a magnetic circuit takes at least one winding",
            "none here",
            None,
        );
    }
    let mut whole = windings.len() == entries.len() && !entries.is_empty();
    let rings = if fields.has("shading_rings") {
        fields.entries("shading_rings")
    } else {
        Vec::new()
    };
    for entry in &rings {
        let inner = fields.inside(entry, RING_KEYS);
        let leg = legs.as_ref().and_then(|legs| leg_of(&inner, legs));
        let winding =
            reference.and_then(|reference| Winding::read(&inner, around, reference, "a ring"));
        inner.finish();
        if entries
            .iter()
            .any(|other| other.name.text == entry.name.text)
        {
            let headline = format!("a winding is named `{}` as well", entry.name.text);
            fields.error_at(
                entry.name.span,
                "duplicate-name",
                headline,
                "the second of this name",
                "rings and windings of a magnetic circuit have names of their own",
            );
            whole = false;
        }
        let Some((leg, winding)) = leg.zip(winding) else {
            whole = false;
            continue;
        };
        windings.push(Turns {
            name: entry.name.text.clone(),
            winding,
            leg,
            has_ends: false,
            self_capacitance: None,
            initial: None,
        });
        own.push(None::<Value>);
    }
    let legs = legs?;
    if !whole {
        return None;
    }
    let names = windings.iter().map(|turns| turns.name.clone()).collect();
    let element = WoundLegs::new(
        windings,
        legs.cores,
        Layout::Between(legs.ends),
        Leakage::Own(own),
        &[],
    )
    .with_legs_named(legs.names.into_iter().map(|name| name.text).collect());
    Some(Made {
        terminals,
        windings: names,
        element: Box::new(element),
    })
}

/// The legs; None where one is wrong or carries no flux.
fn read_legs(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Legs> {
    let mut legs = Legs {
        names: Vec::new(),
        cores: Vec::new(),
        ends: Vec::new(),
    };
    let mut nodes: Vec<String> = Vec::new();
    // Where each node is named first.
    let mut places: Vec<Span> = Vec::new();
    let mut sound = true;
    let entries = fields.entries("legs");
    for entry in &entries {
        let core = around.library.core_at(entry.node, &entry.path, LEG_KEYS);
        // What is no mapping has its message from the core.
        let between = matches!(entry.node.data, Data::Map(_))
            .then(|| fields.inside(entry, LEG_KEYS))
            .filter(|inner| inner.has("between"))
            .and_then(|inner| inner.names("between"));
        let Some((core, between)) = core.zip(between) else {
            sound = false;
            continue;
        };
        let mut number = |named: &Named| {
            let known = nodes.iter().position(|node| *node == named.text);
            known.unwrap_or_else(|| {
                nodes.push(named.text.clone());
                places.push(named.span);
                nodes.len() - 1
            })
        };
        let ends = (number(&between[0]), number(&between[1]));
        if ends.0 == ends.1 {
            let headline = format!("leg `{}` begins and ends at one node", entry.name.text);
            fields.error_at(
                between[1].span,
                "leg-on-one-node",
                headline,
                "the same node again",
                "a core that closes upon itself is a `transformer` or a `coil`; two legs in series close by two nodes",
            );
            sound = false;
        }
        legs.names.push(entry.name.clone());
        legs.cores.push(core);
        legs.ends.push(ends);
    }
    if fields.has("legs") && entries.is_empty() {
        fields.error(
            "legs",
            "too-few-legs",
            "a magnetic circuit takes legs",
            "none here",
            None,
        );
    }
    if !sound || entries.is_empty() {
        return None;
    }
    closed(fields, &legs, &nodes, &places).then_some(legs)
}

/// Reports legs that no flux can pass: at a node that nothing else meets, or without a way back.
fn closed(fields: &Fields<'_>, legs: &Legs, nodes: &[String], places: &[Span]) -> bool {
    let mut sound = true;
    let meets = |node: usize| {
        let at = legs.ends.iter().filter(|&&(a, b)| a == node || b == node);
        at.count()
    };
    for (node, name) in nodes.iter().enumerate() {
        if meets(node) != 1 {
            continue;
        }
        sound = false;
        let others = nodes
            .iter()
            .filter(|other| *other != name)
            .map(String::as_str);
        let help = match nearest(name, others) {
            Some(near) => format!("if it was meant to be `{near}`, write that"),
            None => "flux closes upon itself: join the node to another leg".to_owned(),
        };
        fields.error_at(
            places[node],
            "dangling-magnetic-node",
            format!("only one leg meets magnetic node `{name}`, so it carries no flux"),
            "nothing else is on this node",
            &help,
        );
    }
    if !sound {
        return false;
    }
    let network = Network::new(&legs.ends);
    for (leg, name) in legs.names.iter().enumerate() {
        if network.form(leg).is_empty() {
            sound = false;
            fields.error_at(
                name.span,
                "leg-without-path",
                format!("the flux of leg `{}` has no way back", name.text),
                "it alone joins what lies at its two ends",
                "add a leg that closes the way, such as the air beside it",
            );
        }
    }
    sound
}

/// The number of the leg that a winding or a ring is on.
fn leg_of(fields: &Fields<'_>, legs: &Legs) -> Option<usize> {
    let named = fields.name("leg")?;
    let found = legs.names.iter().position(|leg| leg.text == named.text);
    if found.is_none() {
        let known = legs.names.iter().map(|leg| leg.text.as_str());
        let label = match nearest(&named.text, known) {
            Some(near) => format!("did you mean `{near}`?"),
            None => "not among `legs`".to_owned(),
        };
        let headline = format!("there is no leg `{}`", named.text);
        let diagnostic = Diagnostic::error("unknown-name", headline).at(named.span, label);
        fields.reader().sink.report(diagnostic);
    }
    found
}
