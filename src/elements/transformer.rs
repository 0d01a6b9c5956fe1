//! Transformer: any number of windings on one core that saturates, with leakage by value, by coefficient of coupling or
//! from the windings' geometry. See [`super::wound`] for its equations.

use super::kind::{ElementKind, Made, NODES, Surroundings, Terminal, reference_temperature};
use super::pairs;
use super::winding::{
    LAYER_BREADTH, LAYERS, RESISTANCE, SKIN_AND_PROXIMITY, TEMPERATURE_COEFFICIENT, TURNS, WIRE,
    Winding,
};
use super::wound::{Concentric, Layout, Leakage, Turns, WoundLegs};
use crate::netlist::{Fields, Key, Takes, Value};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "transformer",
    about: "Windings on one core; the first node of each is the like-polarity end.",
    keys: &[
        Key::required(
            "core",
            Takes::Name("core"),
            "the core that they are wound on",
        ),
        Key::required(
            "windings",
            Takes::Other("a mapping of winding names to nodes, turns, wire or resistance"),
            "the windings, from the inside out",
        ),
        Key::optional(
            "leakage",
            Takes::Other("an inductance, or {A-B: inductance} for each pair"),
            "inductance of the first winding (A) with the second one (B) shorted",
        ),
        Key::optional(
            "coefficient",
            Takes::Other("one number, or {A-B: number} for each pair"),
            "coefficient of coupling at small flux, instead of a leakage",
        ),
        Key::optional(
            "concentric",
            Takes::Map(CONCENTRIC_KEYS),
            "geometry from which the leakage follows; each winding then tells its `build`",
        ),
        Key::optional(
            "interwinding_capacitance",
            Takes::Other("a capacitance, or {A-B: capacitance} for some pairs"),
            "capacitance between windings, half of it at either end",
        ),
    ],
    read,
};

/// The keys behind `concentric`.
pub const CONCENTRIC_KEYS: &[Key] = &[
    Key::required(
        "breadth",
        Takes::Quantity(units::LENGTH),
        "length of the windings along the axis",
    ),
    Key::required(
        "spacing",
        Takes::Quantity(units::LENGTH),
        "insulation between one winding and the next",
    ),
    Key::optional(
        "mean_turn",
        Takes::Quantity(units::LENGTH),
        "mean turn of all windings; that of the core without",
    ),
];

/// Capacitance across a winding.
pub const SELF_CAPACITANCE: Key = Key::default(
    "self_capacitance",
    Takes::Quantity(units::CAPACITANCE),
    "0 F",
    "capacitance across the whole winding",
);
/// Current at a zero start.
pub const INITIAL_CURRENT: Key = Key::default(
    "initial_current",
    Takes::Quantity(units::CURRENT),
    "0 A",
    "winding current at a zero start",
);

/// The keys of one winding.
pub const WINDING_KEYS: &[Key] = &[
    NODES,
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
        "build",
        Takes::Quantity(units::LENGTH),
        "radial thickness, for `concentric`",
    ),
];

const WAYS: [&str; 3] = ["leakage", "coefficient", "concentric"];

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let core = around.library.core(fields, "core");
    let reference = reference_temperature(fields, around);
    let entries = fields.entries("windings");
    let (mut terminals, mut windings, mut builds) = (Vec::new(), Vec::new(), Vec::new());
    for entry in &entries {
        let inner = fields.inside(entry, WINDING_KEYS);
        let ends = ends(&inner, &entry.name.text);
        let turns = reference
            .and_then(|reference| read_turns(&inner, around, reference, &entry.name.text, 0));
        builds.push(build(&inner, fields.has("concentric")));
        inner.finish();
        if let Some((ends, turns)) = ends.zip(turns) {
            terminals.extend(ends);
            windings.push(turns);
        }
    }
    if fields.has("windings") && entries.is_empty() {
        fields.error(
            "windings",
            "too-few-windings",
            "a transformer takes at least one winding",
            "none here",
            None,
        );
    }
    if windings.len() < entries.len() || windings.is_empty() {
        return None;
    }
    let names: Vec<String> = windings.iter().map(|turns| turns.name.clone()).collect();
    let leakage = read_leakage(fields, &names, &builds);
    let between = if fields.has("interwinding_capacitance") {
        let key = "interwinding_capacitance";
        pairs::read(fields, key, units::CAPACITANCE, &names)
            .filter(|found| not_negative(fields, key, found).is_some())
    } else {
        Some(Vec::new())
    };
    let element = WoundLegs::new(windings, vec![core?], Layout::Ring, leakage?, &between?);
    Some(Made {
        terminals,
        windings: names,
        element: Box::new(element),
    })
}

/// The two terminals of a winding.
pub fn ends(fields: &Fields<'_>, name: &str) -> Option<Vec<Terminal>> {
    let nodes = fields.names("nodes")?;
    let terminal = |(end, node)| Terminal {
        name: format!("{name}.{end}"),
        node,
    };
    Some(
        ["first", "second"]
            .into_iter()
            .zip(nodes)
            .map(terminal)
            .collect(),
    )
}

/// One winding with ends, on a numbered leg.
pub fn read_turns(
    fields: &Fields<'_>,
    around: &Surroundings<'_>,
    reference: Value,
    name: &str,
    leg: usize,
) -> Option<Turns> {
    let winding = Winding::read(fields, around, reference, "a winding")
        .and_then(|winding| winding.with_lay(fields));
    let self_capacitance = fields.non_negative("self_capacitance");
    let initial = fields.value("initial_current");
    Some(Turns {
        name: name.to_owned(),
        winding: winding?,
        leg,
        has_ends: true,
        self_capacitance: Some(self_capacitance?),
        initial: Some(initial?),
    })
}

/// A winding's `build`, needed with `concentric` and of no meaning without.
fn build(fields: &Fields<'_>, needed: bool) -> Option<Value> {
    match (needed, fields.has("build")) {
        (true, false) => {
            fields.missing("build");
            None
        }
        (true, true) => fields.positive("build"),
        (false, true) => {
            fields.error(
                "build",
                "conflicting-keys",
                "`build` has no meaning without `concentric`",
                "only geometry needs it",
                Some("concentric: {breadth: 18 mm, spacing: 0.2 mm}"),
            );
            None
        }
        (false, false) => None,
    }
}

fn read_leakage(
    fields: &Fields<'_>,
    names: &[String],
    builds: &[Option<Value>],
) -> Option<Leakage> {
    let written: Vec<&str> = WAYS.into_iter().filter(|way| fields.has(way)).collect();
    if names.len() == 1 {
        if let Some(way) = written.first() {
            let headline = format!("a single winding has no `{way}`");
            fields.error(
                way,
                "conflicting-keys",
                headline,
                "nothing to couple with",
                None,
            );
            return None;
        }
        return Some(Leakage::Own(vec![None]));
    }
    match written[..] {
        ["leakage"] => {
            if names.len() > 2 && !fields.is_map("leakage") {
                fields.error(
                    "leakage",
                    "missing-key",
                    "with more than two windings `leakage` is told for each pair",
                    "one value for several pairs",
                    Some(&format!(
                        "leakage: {{{}-{}: 5 µH, ...}}",
                        names[0], names[1]
                    )),
                );
                return None;
            }
            let found = pairs::read(fields, "leakage", units::INDUCTANCE, names)?;
            pairs::complete(fields, "leakage", names, &found)?;
            not_negative(fields, "leakage", &found)?;
            Some(Leakage::Shorted(found))
        }
        ["coefficient"] => {
            let found = pairs::read(fields, "coefficient", units::RATIO, names)?;
            pairs::complete(fields, "coefficient", names, &found)?;
            Some(Leakage::Coefficients(found))
        }
        ["concentric"] => {
            let inner = fields.map("concentric")?;
            inner.finish();
            let breadth = inner.positive("breadth");
            let spacing = inner.non_negative("spacing");
            let mean_turn = if inner.has("mean_turn") {
                Some(inner.positive("mean_turn")?)
            } else {
                None
            };
            let builds: Option<Vec<Value>> = builds.iter().copied().collect();
            Some(Leakage::Concentric(Concentric {
                breadth: breadth?,
                mean_turn,
                spacing: spacing?,
                builds: builds?,
            }))
        }
        _ => {
            fields.error_here(
                "one-of",
                "a transformer takes one of `leakage`, `coefficient`, `concentric`".into(),
                "write one of the three",
                "`leakage: 5 µH` if it was measured with the second winding shorted, `leakage: 0 H` for none",
            );
            None
        }
    }
}

/// Refuses a value below zero anywhere in its spread.
fn not_negative(fields: &Fields<'_>, key: &str, found: &[pairs::Pair]) -> Option<()> {
    let parameters = fields.reader().parameters.borrow();
    let below = |&(_, _, value): &pairs::Pair| parameters.get(value).spread.0 < 0.0;
    if !found.iter().any(below) {
        return Some(());
    }
    drop(parameters);
    fields.error(
        key,
        "out-of-range",
        format!("{key} must be zero or more"),
        "below zero",
        None,
    );
    None
}
