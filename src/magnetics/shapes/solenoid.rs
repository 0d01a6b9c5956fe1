//! `shape: solenoid`: a straight coil in air, told in one of three ways, or with a slug of material in it.
//!
//! `mean_diameter` and `length`: the current sheet. `inner_diameter`, `outer_diameter` and `length`: current spread over the
//! section. With `layers` and the coil's wire: turn by turn. `core_diameter` and `core_length` put a slug into the
//! middle of any of them ([`crate::magnetics::open_core`]), which sees a thick coil as three layers of one third each.

use super::{Around, Shape, ShapeKind, ordered};
use crate::magnetics::MU0;
use crate::magnetics::air::section::{self, Section};
use crate::magnetics::air::sheet;
use crate::magnetics::air::turns::Lattice;
use crate::magnetics::geometry::{Fault, Geometry, Remark, Window};
use crate::magnetics::open_core::{Coil, Cylinder, sheet_coil, with_core};
use crate::magnetics::winding::WindingPlan;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::{FRAC_PI_4, PI};

/// `shape: solenoid`.
pub const KIND: ShapeKind = ShapeKind {
    word: "solenoid",
    about: "a straight coil in air, or with a slug in it",
    keys: &[KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::optional(
        "mean_diameter",
        Takes::Quantity(LENGTH),
        "diameter of the one layer, from wire centre to wire centre",
    ),
    Key::optional(
        "inner_diameter",
        Takes::Quantity(LENGTH),
        "inner diameter of the winding",
    ),
    Key::optional(
        "outer_diameter",
        Takes::Quantity(LENGTH),
        "outer diameter of the winding",
    ),
    Key::optional(
        "length",
        Takes::Quantity(LENGTH),
        "length of the winding along the axis",
    ),
    Key::optional(
        "layers",
        Takes::Count,
        "number of layers; the coil is then summed turn by turn",
    ),
    Key::optional(
        "axial_pitch",
        Takes::Quantity(LENGTH),
        "from turn to turn; the wire's outer diameter unless said",
    ),
    Key::optional(
        "radial_pitch",
        Takes::Quantity(LENGTH),
        "from layer to layer; the wire's outer diameter unless said",
    ),
    Key::optional(
        "core_diameter",
        Takes::Quantity(LENGTH),
        "diameter of a slug of the core's material in the coil",
    ),
    Key::optional(
        "core_length",
        Takes::Quantity(LENGTH),
        "length of the slug, whose middle is the coil's",
    ),
];

/// Room beside bobbin walls and imperfect lay: common practice.
const PRACTICAL_FILL: f64 = 0.9;

#[derive(Debug)]
struct Solenoid {
    coil: Winding,
    /// Diameter and length of the slug.
    slug: Option<(Value, Value)>,
}

#[derive(Debug)]
enum Winding {
    Sheet {
        diameter: Value,
        length: Value,
    },
    Thick {
        inner: Value,
        outer: Value,
        length: Value,
    },
    Layered(Layered),
}

#[derive(Debug)]
struct Layered {
    /// On this diameter the first layer lies, or the middle of all layers.
    diameter: Value,
    centred: bool,
    layers: usize,
    axial: Option<Value>,
    radial: Option<Value>,
    length: Option<Value>,
    outer: Option<Value>,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let slug = slug(fields);
    let coil = if fields.has("layers") {
        Winding::Layered(layered(fields)?)
    } else {
        only_with_layers(fields)?;
        spread_out(fields)?
    };
    Some(Box::new(Solenoid { coil, slug: slug? }))
}

/// The slug, where there is one; a material and a slug belong together.
#[allow(clippy::option_option)]
fn slug(fields: &Fields<'_>) -> Option<Option<(Value, Value)>> {
    let (across, along) = (fields.has("core_diameter"), fields.has("core_length"));
    if !across && !along {
        if fields.has("material") {
            fields.error(
                "material",
                "conflicting-keys",
                "a solenoid without `core_diameter` and `core_length` is a coil in air and takes no `material`",
                "nothing to fill",
                None,
            );
            return None;
        }
        return Some(None);
    }
    let diameter = fields.needed_with("core_diameter", "core_length");
    let length = fields.needed_with("core_length", "core_diameter");
    let around = if fields.has("mean_diameter") {
        "mean_diameter"
    } else {
        "inner_diameter"
    };
    if fields.has(around) {
        fits(fields, around)?;
    }
    Some(Some((diameter?, length?)))
}

/// A slug fits into its coil.
fn fits(fields: &Fields<'_>, around: &str) -> Option<()> {
    let (slug, hole) = (fields.amount("core_diameter")?, fields.amount(around)?);
    if slug.high <= hole.low {
        return Some(());
    }
    let headline = format!("core_diameter must not exceed {around}");
    fields.error(
        "core_diameter",
        "out-of-range",
        headline,
        "it does not fit into the coil",
        None,
    );
    None
}

fn spread_out(fields: &Fields<'_>) -> Option<Winding> {
    if !fields.has("length") {
        fields.missing("length");
    }
    let length = fields.positive("length");
    let (inner, outer) = (fields.has("inner_diameter"), fields.has("outer_diameter"));
    if fields.has("mean_diameter") {
        if inner || outer {
            one_diameter(fields);
            return None;
        }
        return Some(Winding::Sheet {
            diameter: fields.positive("mean_diameter")?,
            length: length?,
        });
    }
    if !inner && !outer {
        let headline = format!(
            "{} needs `mean_diameter` (one layer), or `inner_diameter` and `outer_diameter`",
            fields.path()
        );
        fields.error(
            "shape",
            "missing-key",
            headline,
            "no diameter told",
            Some("mean_diameter: 10 mm"),
        );
        return None;
    }
    if !inner || !outer {
        fields.missing(if inner {
            "outer_diameter"
        } else {
            "inner_diameter"
        });
        return None;
    }
    let (inner, outer) = (
        fields.non_negative("inner_diameter"),
        fields.positive("outer_diameter"),
    );
    ordered(fields, "inner_diameter", "outer_diameter")?;
    Some(Winding::Thick {
        inner: inner?,
        outer: outer?,
        length: length?,
    })
}

fn layered(fields: &Fields<'_>) -> Option<Layered> {
    let centred = fields.has("mean_diameter");
    if centred && fields.has("inner_diameter") {
        one_diameter(fields);
        return None;
    }
    if !centred && !fields.has("inner_diameter") {
        fields.missing("inner_diameter");
        return None;
    }
    let diameter = fields.positive(if centred {
        "mean_diameter"
    } else {
        "inner_diameter"
    });
    let (axial, radial) = (
        fields.positive("axial_pitch"),
        fields.positive("radial_pitch"),
    );
    let (length, outer) = (fields.positive("length"), fields.positive("outer_diameter"));
    Some(Layered {
        diameter: diameter?,
        centred,
        layers: fields.count("layers")?,
        axial,
        radial,
        length,
        outer,
    })
}

fn only_with_layers(fields: &Fields<'_>) -> Option<()> {
    let Some(stray) = ["axial_pitch", "radial_pitch"]
        .into_iter()
        .find(|key| fields.has(key))
    else {
        return Some(());
    };
    let headline = format!("{stray} belongs to a coil with `layers`");
    fields.error(
        stray,
        "conflicting-keys",
        headline,
        "without `layers`",
        Some("layers: 1"),
    );
    None
}

fn one_diameter(fields: &Fields<'_>) {
    let headline = "a solenoid has either `mean_diameter` or `inner_diameter` and `outer_diameter`";
    fields.error(
        "mean_diameter",
        "conflicting-keys",
        headline,
        "both are written",
        None,
    );
}

impl Shape for Solenoid {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let (air, coil) = self.coil.derive(values, around.winding)?;
        let Some((diameter, length)) = self.slug else {
            return Ok(air);
        };
        let slug = Cylinder {
            diameter: values[diameter],
            length: values[length],
        };
        super::above_zero(&[slug.diameter, slug.length])?;
        super::slender(slug.length / slug.diameter, coil.length / slug.length)?;
        if coil.diameters.iter().any(|&outer| slug.diameter > outer) {
            return Err(no_room(
                "core_diameter",
                "the slug does not fit into its coil",
            ));
        }
        // What the coil alone has, told by its path.
        let permeance = MU0 * air.area / air.air;
        with_core(air, permeance, &coil, slug, around.permeability)
    }
}

/// Three layers that stand for an even section.
fn three_layers(inner: f64, outer: f64, length: f64) -> Coil {
    // Of equal weight (Chebyshev's rule of three points, exact for cubics): middle, and ±1/√2 of the half depth.
    let (middle, half) = (0.5 * (inner + outer), 0.5 * (outer - inner));
    let away = half * std::f64::consts::FRAC_1_SQRT_2;
    Coil {
        diameters: vec![middle - away, middle, middle + away],
        length,
    }
}

impl Winding {
    /// The coil in air, and as what a slug sees it.
    fn derive(
        &self,
        values: &Values,
        winding: Option<&WindingPlan>,
    ) -> Result<(Geometry, Coil), Fault> {
        match self {
            Winding::Sheet { diameter, length } => {
                let (diameter, length) = (values[*diameter], values[*length]);
                let (coil, _) = sheet_coil(diameter, length);
                Ok((one_layer(diameter, length, winding), coil))
            }
            Winding::Thick {
                inner,
                outer,
                length,
            } => {
                let (inner, outer, length) = (values[*inner], values[*outer], values[*length]);
                let section = Section {
                    inner: 0.5 * inner,
                    outer: 0.5 * outer,
                    length,
                };
                Ok((thick(section, winding)?, three_layers(inner, outer, length)))
            }
            Winding::Layered(layered) => layered.derive(values, winding),
        }
    }
}

fn one_layer(diameter: f64, length: f64, winding: Option<&WindingPlan>) -> Geometry {
    let mut geometry = in_air(diameter, length, sheet::permeance(diameter, length));
    let too_long = winding
        .and_then(|winding| Some(winding.turns as f64 * winding.wire.as_ref()?.outer > length));
    if too_long == Some(true) {
        geometry.remarks.push(Remark::new(
            "window-overfilled",
            "the turns do not fit side by side into the coil's length",
        ));
    }
    geometry
}

fn thick(section: Section, winding: Option<&WindingPlan>) -> Result<Geometry, Fault> {
    // Beyond a million to one the section is a line and the quadrature is not made for it.
    let within = |ratio: f64| (1e-6..=1e6).contains(&ratio);
    let depth = section.outer - section.inner;
    if !(section.inner >= 0.0 && within(depth / section.outer) && within(section.length / depth)) {
        let text = "the coil's section vanishes, or is a million times as long as it is deep";
        return Err(no_room("inner_diameter", text));
    }
    let mut geometry = in_air(
        section.inner + section.outer,
        section.length,
        section::permeance(section),
    );
    let area = depth * section.length;
    let window = Window {
        area,
        practical_fill: PRACTICAL_FILL,
    };
    geometry.window = Some(window);
    geometry
        .remarks
        .extend(winding.and_then(|winding| winding.crowding(window)));
    Ok(geometry)
}

fn in_air(diameter: f64, length: f64, permeance: f64) -> Geometry {
    let mut geometry = Geometry::in_air(length, FRAC_PI_4 * diameter * diameter, permeance);
    geometry.mean_turn = Some(PI * diameter);
    geometry.layer_breadth = Some(length);
    geometry
}

impl Layered {
    fn derive(
        &self,
        values: &Values,
        winding: Option<&WindingPlan>,
    ) -> Result<(Geometry, Coil), Fault> {
        let wire = winding.and_then(|winding| winding.wire.as_ref());
        let bare = wire.and_then(|wire| wire.bare_diameter);
        let (Some(winding), Some(wire), Some(bare_diameter)) = (winding, wire, bare) else {
            return Err(Fault {
                word: "missing-wire",
                key: "layers",
                text: "a solenoid with `layers` is summed turn by turn and needs the coil's round `wire`".into(),
                help: "wire: {diameter: 0.2 mm}",
            });
        };
        let radial_pitch = self.radial.map_or(wire.outer, |pitch| values[pitch]);
        let axial_pitch = self.axial.map_or(wire.outer, |pitch| values[pitch]);
        let around = values[self.diameter];
        let inner_diameter = if self.centred {
            around - self.layers as f64 * radial_pitch
        } else {
            around
        };
        let lattice = Lattice {
            turns: winding.turns,
            layers: self.layers,
            inner_diameter,
            axial_pitch,
            radial_pitch,
            bare_diameter,
        };
        if inner_diameter + radial_pitch <= bare_diameter {
            return Err(no_room(
                "layers",
                "the wire is too thick for the innermost layer",
            ));
        }
        if axial_pitch < bare_diameter || (self.layers > 1 && radial_pitch < bare_diameter) {
            return Err(no_room(
                "axial_pitch",
                "turns closer than the bare wire's diameter overlap",
            ));
        }
        let coil = three_layers(
            lattice.inner_diameter,
            lattice.outer_diameter(),
            lattice.length(),
        );
        Ok((self.geometry(values, &lattice, wire.outer), coil))
    }

    fn geometry(&self, values: &Values, lattice: &Lattice, outer: f64) -> Geometry {
        let mean_turn = lattice.mean_turn();
        let permeance = lattice.inductance() / (lattice.turns as f64).powi(2);
        let mut geometry = in_air(mean_turn / PI, lattice.length(), permeance);
        let mut remark = |text: String| {
            geometry
                .remarks
                .push(Remark::new("window-overfilled", text))
        };
        // A hair of rounding is no lack of room.
        let exceeds = |value: Option<Value>, taken: f64| {
            value.is_some_and(|value| taken > values[value] * (1.0 + 1e-9))
        };
        if exceeds(self.length, lattice.length()) {
            remark(format!(
                "{} turns in a layer are longer than the coil's length",
                lattice.per_layer()
            ));
        }
        if exceeds(self.outer, lattice.outer_diameter()) {
            remark(format!(
                "{} layers reach beyond the outer diameter",
                lattice.used_layers()
            ));
        }
        if lattice.axial_pitch < outer * (1.0 - 1e-9)
            || (self.layers > 1 && lattice.radial_pitch < outer * (1.0 - 1e-9))
        {
            remark("the pitch is less than the insulated wire's diameter".into());
        }
        geometry
    }
}

fn no_room(key: &'static str, text: &str) -> Fault {
    Fault {
        word: "out-of-range",
        key,
        text: text.into(),
        help: "check the diameters, pitches and the wire against each other",
    }
}
