//! `shape: pot`: two halves that enclose the winding, with a round centre post.
//!
//! IEC 60205 for pot cores (from memory): outer ring, backs as discs crossed from the post's radius to the ring's, post,
//! and two corners each. The sections' middle is where half of their area lies on either side: the post's at
//! √((r₁² + r₂²)/2), the ring's likewise. Slots narrow the ring; those of the backs are not counted.

use super::sections::{self, Part};
use super::{Around, BOBBIN_FILL, Shape, ShapeKind, ordered};
use crate::magnetics::fringing::Section;
use crate::magnetics::fringing::spec::{DRAWN_KEYS, rule};
use crate::magnetics::gaps::{Gapping, Leg, Legs, PAIR_KEYS};
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::PI;

/// `shape: pot`.
pub const KIND: ShapeKind = ShapeKind {
    word: "pot",
    about: "two round halves that enclose the winding",
    keys: &[KEYS, PAIR_KEYS, DRAWN_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required("diameter", Takes::Quantity(LENGTH), "outer diameter"),
    Key::required(
        "height",
        Takes::Quantity(LENGTH),
        "height of one half, back included",
    ),
    Key::required(
        "window_depth",
        Takes::Quantity(LENGTH),
        "depth of the window in one half",
    ),
    Key::required(
        "window_diameter",
        Takes::Quantity(LENGTH),
        "inner diameter of the outer ring",
    ),
    Key::required(
        "leg_diameter",
        Takes::Quantity(LENGTH),
        "diameter of the centre post",
    ),
    Key::default(
        "hole_diameter",
        Takes::Quantity(LENGTH),
        "0 mm",
        "hole through the post",
    ),
    Key::default(
        "slot_width",
        Takes::Quantity(LENGTH),
        "0 mm",
        "width of each of two slots in the ring",
    ),
];

#[derive(Debug)]
struct Pot {
    diameter: Value,
    height: Value,
    window_depth: Value,
    window_diameter: Value,
    leg: Value,
    hole: Value,
    slot: Value,
    gapping: Gapping,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let (diameter, height) = (fields.positive("diameter"), fields.positive("height"));
    let (window_depth, window_diameter) = (
        fields.positive("window_depth"),
        fields.positive("window_diameter"),
    );
    let leg = fields.positive("leg_diameter");
    let (hole, slot) = (
        fields.non_negative("hole_diameter"),
        fields.non_negative("slot_width"),
    );
    let gapping = Gapping::read(fields, true, rule(fields)?, true);
    ordered(fields, "window_depth", "height")?;
    ordered(fields, "window_diameter", "diameter")?;
    ordered(fields, "leg_diameter", "window_diameter")?;
    ordered(fields, "hole_diameter", "leg_diameter")?;
    ordered(fields, "slot_width", "window_diameter")?;
    Some(Box::new(Pot {
        diameter: diameter?,
        height: height?,
        window_depth: window_depth?,
        window_diameter: window_diameter?,
        leg: leg?,
        hole: hole?,
        slot: slot?,
        gapping: gapping?,
    }))
}

impl Shape for Pot {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let [
            diameter,
            height,
            window_depth,
            window_diameter,
            leg,
            hole,
            slot,
        ] = [
            self.diameter,
            self.height,
            self.window_depth,
            self.window_diameter,
            self.leg,
            self.hole,
            self.slot,
        ]
        .map(|value| values[value]);
        let [r1, r2, r3, r4] = [hole, leg, window_diameter, diameter].map(|d| 0.5 * d);
        let back = height - window_depth;
        let ring = PI * (r4 * r4 - r3 * r3) - 2.0 * slot * (r4 - r3);
        let post = PI * (r2 * r2 - r1 * r1);
        super::above_zero(&[back, window_depth, r2 - r1, r3 - r2, r4 - r3, ring])?;
        if hole < 0.0 || slot < 0.0 {
            return Err(super::no_iron());
        }
        let middle = |inner: f64, outer: f64| (0.5 * (inner * inner + outer * outer)).sqrt();
        let parts = [
            Part::straight(2.0 * window_depth, ring),
            Part::discs(2, back, r2, r3),
            Part::straight(2.0 * window_depth, post),
            Part::corners(
                2,
                (middle(r3, r4) - r3, ring),
                (0.5 * back, 2.0 * PI * r3 * back),
            ),
            Part::corners(
                2,
                (r2 - middle(r1, r2), post),
                (0.5 * back, 2.0 * PI * r2 * back),
            ),
        ];
        let leg_of = |place, section: Section, area| Leg {
            place,
            section,
            area,
            window_height: Some(2.0 * window_depth),
            leg_height: None,
        };
        // The ring fringes at its two rims, like a long leg as wide as the ring is thick.
        let rim = Section::Rectangle(r4 - r3, PI * (r3 + r4));
        let legs = Legs {
            ground: leg_of("centre post", Section::Round(leg), post),
            others: &[leg_of("outer ring", rim, ring)],
        };
        let closed = sections::path(&parts);
        let mut geometry = self
            .gapping
            .derive(values, closed, &legs, around.permeability)?;
        geometry.mean_turn = Some(PI * (r2 + r3));
        geometry.layer_breadth = Some(2.0 * window_depth);
        geometry.wind(
            Window {
                area: 2.0 * window_depth * (r3 - r2),
                practical_fill: BOBBIN_FILL,
            },
            around.winding,
        );
        Ok(geometry)
    }
}
