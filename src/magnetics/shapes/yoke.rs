//! `shape: yoke`: the magnet of a relay with a hinged armature.
//!
//! ```text
//!        armature                 The winding sits on a round core of core_diameter and core_length. A frame, bent from
//!   ===================           strip of frame_width and frame_thickness, carries it: a base under the core, and a
//!   | hinge     ##### pole        leg beside it whose inner face is frame_distance from the core's axis. The armature
//!   |            | |              is hinged on the leg and lies across the core's pole, a gap away.
//!   | leg        | | core
//!   +============+=+              Sections in series by IEC 60205: core, base, leg, armature and four corners.
//! ```
//!
//! The gap before the pole and the leakage path from the core to the frame's leg lie in parallel, the hinge's gap in
//! series with both. Leakage of a bar of radius r along a plane h from its axis, per metre: 2π mu0/arcosh(h/r); the
//! magnetomotive force along the core rises from none at the base to all of it at the pole, so that a third of this
//! permeance counts for the winding's linkage (H. C. Roters, Electromagnetic Devices, 1941, from memory). A leg that is
//! narrow against the distance leaks less, the armature's overhang more: good to about a third. `leakage` overrules it.

use super::sections::{self, Part};
use super::{Around, BOBBIN_FILL, Shape, ShapeKind, ordered};
use crate::magnetics::MU0;
use crate::magnetics::fringing::Rule;
use crate::magnetics::fringing::spec::{DRAWN_KEYS, rule};
use crate::magnetics::gaps::Gap;
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::magnetics::moving::{FringingRule, MovingGap};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{INDUCTANCE, LENGTH};
use std::f64::consts::{FRAC_PI_4, PI};

/// `shape: yoke`.
pub const KIND: ShapeKind = ShapeKind {
    word: "yoke",
    about: "a relay's core and frame with a hinged armature and a moving gap",
    keys: &[KEYS, DRAWN_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required(
        "core_diameter",
        Takes::Quantity(LENGTH),
        "diameter of the round core under the winding",
    ),
    Key::required(
        "core_length",
        Takes::Quantity(LENGTH),
        "from the base to the pole's face",
    ),
    Key::optional(
        "pole_diameter",
        Takes::Quantity(LENGTH),
        "diameter of the pole's face; the core's unless said",
    ),
    Key::required("frame_width", Takes::Quantity(LENGTH), "width of the frame"),
    Key::required(
        "frame_thickness",
        Takes::Quantity(LENGTH),
        "thickness of the frame",
    ),
    Key::required(
        "frame_distance",
        Takes::Quantity(LENGTH),
        "from the core's axis to the inner face of the frame's leg",
    ),
    Key::required(
        "armature_thickness",
        Takes::Quantity(LENGTH),
        "thickness of the armature, which is as wide as the frame",
    ),
    Key::required(
        "gap",
        Takes::Quantity(LENGTH),
        "from the pole to the armature as it stands",
    ),
    Key::default(
        "residual_gap",
        Takes::Quantity(LENGTH),
        "0 mm",
        "what stays between them when the armature is seated",
    ),
    Key::default(
        "hinge_gap",
        Takes::Quantity(LENGTH),
        "0 mm",
        "gap between armature and frame at the hinge",
    ),
    Key::optional(
        "leakage",
        Takes::Quantity(INDUCTANCE),
        "permeance of the leakage path; from the dimensions unless said",
    ),
];

#[derive(Debug)]
struct Yoke {
    core_diameter: Value,
    core_length: Value,
    pole_diameter: Option<Value>,
    frame_width: Value,
    frame_thickness: Value,
    frame_distance: Value,
    armature_thickness: Value,
    gap: Value,
    residual: Value,
    hinge: Value,
    leakage: Option<Value>,
    rule: &'static Rule,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let core_diameter = fields.positive("core_diameter");
    let core_length = fields.positive("core_length");
    let pole_diameter = fields.positive("pole_diameter");
    let frame_width = fields.positive("frame_width");
    let frame_thickness = fields.positive("frame_thickness");
    let frame_distance = fields.positive("frame_distance");
    let armature_thickness = fields.positive("armature_thickness");
    let gap = fields.non_negative("gap");
    let residual = fields.non_negative("residual_gap");
    let hinge = fields.non_negative("hinge_gap");
    let leakage = fields.non_negative("leakage");
    let rule = rule(fields)?;
    clear(fields, "core_diameter")?;
    if fields.has("pole_diameter") {
        pole_diameter?;
        ordered_or_equal(fields)?;
        clear(fields, "pole_diameter")?;
    }
    if fields.has("leakage") {
        leakage?;
    }
    Some(Box::new(Yoke {
        core_diameter: core_diameter?,
        core_length: core_length?,
        pole_diameter,
        frame_width: frame_width?,
        frame_thickness: frame_thickness?,
        frame_distance: frame_distance?,
        armature_thickness: armature_thickness?,
        gap: gap?,
        residual: residual?,
        hinge: hinge?,
        leakage,
        rule,
    }))
}

/// Core and pole must clear the frame's leg.
fn clear(fields: &Fields<'_>, key: &str) -> Option<()> {
    let (across, distance) = (fields.amount(key)?, fields.amount("frame_distance")?);
    if 0.5 * across.high < distance.low {
        return Some(());
    }
    let headline = format!("half of {key} must be smaller than frame_distance");
    fields.error(
        key,
        "out-of-range",
        headline,
        "it reaches the frame's leg",
        None,
    );
    None
}

/// A pole is a shoe on the core: not smaller than it.
fn ordered_or_equal(fields: &Fields<'_>) -> Option<()> {
    let (pole, core) = (
        fields.amount("pole_diameter")?,
        fields.amount("core_diameter")?,
    );
    if pole.nominal == core.nominal {
        return Some(());
    }
    ordered(fields, "core_diameter", "pole_diameter")
}

impl Shape for Yoke {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let core = values[self.core_diameter];
        let length = values[self.core_length];
        let pole = self.pole_diameter.map_or(core, |value| values[value]);
        let (width, thick) = (values[self.frame_width], values[self.frame_thickness]);
        let distance = values[self.frame_distance];
        let armature = values[self.armature_thickness];
        let (gap, residual) = (values[self.gap], values[self.residual]);
        let hinge = values[self.hinge];
        let window = distance - 0.5 * core;
        super::above_zero(&[
            core,
            length,
            pole,
            width,
            thick,
            armature,
            window,
            distance - 0.5 * pole,
        ])?;
        if gap < 0.0 || residual < 0.0 || hinge < 0.0 {
            return Err(below_zero());
        }
        let moving = MovingGap {
            area: FRAC_PI_4 * pole * pole,
            gap,
            residual,
            leakage: self
                .leakage
                .map_or_else(|| leakage(core, length, distance), |value| values[value]),
            fixed: hinge / (MU0 * width * thick),
            pole_diameter: pole,
            pole_height: length,
            rule: FringingRule(self.rule),
        };
        let mut geometry = iron(core, length, (width, thick), armature, window);
        let area = geometry.area;
        geometry = geometry.with_gaps(gaps(&moving, hinge, width * thick));
        geometry.air = MU0 * area * moving.reluctance(gap).0;
        geometry.moving = Some(moving);
        geometry.mean_turn = Some(PI * (core + window));
        geometry.layer_breadth = Some(length);
        geometry.wind(
            Window {
                area: window * length,
                practical_fill: BOBBIN_FILL,
            },
            around.winding,
        );
        Ok(geometry)
    }
}

/// The iron alone, its sections in series.
fn iron(
    core: f64,
    length: f64,
    (width, thick): (f64, f64),
    armature: f64,
    window: f64,
) -> Geometry {
    let round = (sections::half_disc(0.5 * core), FRAC_PI_4 * core * core);
    let strip = (0.5 * thick, width * thick);
    let plate = (0.5 * armature, width * armature);
    sections::path(&[
        Part::straight(length, round.1),
        Part::corners(1, round, strip),
        Part::straight(window, strip.1),
        Part::corners(1, strip, strip),
        Part::straight(length, strip.1),
        Part::corners(1, strip, plate),
        Part::straight(window, plate.1),
        Part::corners(1, plate, round),
    ])
}

fn gaps(moving: &MovingGap, hinge: f64, hinge_area: f64) -> Vec<Gap> {
    let across = moving.gap + moving.residual;
    let mut gaps = Vec::new();
    if across > 0.0 {
        gaps.push(Gap {
            place: "pole",
            length: across,
            area: moving.area,
            fringing: moving.fringing(across),
        });
    }
    if hinge > 0.0 {
        gaps.push(Gap {
            place: "hinge",
            length: hinge,
            area: hinge_area,
            fringing: None,
        });
    }
    gaps
}

/// Permeance [H] that counts for the linkage, of a core of a `diameter` and `length` along a leg at a `distance` of its axis.
fn leakage(diameter: f64, length: f64, distance: f64) -> f64 {
    2.0 * PI * MU0 / (2.0 * distance / diameter).acosh() * length / 3.0
}

fn below_zero() -> Fault {
    Fault {
        word: "out-of-range",
        key: "gap",
        text: "a gap of the yoke is below zero".into(),
        help: "gaps are zero or more",
    }
}
