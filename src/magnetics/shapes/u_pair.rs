//! `shape: u_pair`: two U-shaped halves, the winding on one of the legs.
//!
//! IEC 60205, sections in series (the scheme from memory): two legs, two backs, four corners.

use super::sections::{self, Part};
use super::{Around, BOBBIN_FILL, Shape, ShapeKind, ordered};
use crate::magnetics::fringing::Section;
use crate::magnetics::fringing::spec::{DRAWN_KEYS, rule};
use crate::magnetics::gaps::{Gapping, Leg, Legs, PAIR_KEYS};
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::PI;

/// `shape: u_pair`.
pub const KIND: ShapeKind = ShapeKind {
    word: "u_pair",
    about: "two U-shaped halves with the winding on one leg",
    keys: &[KEYS, PAIR_KEYS, DRAWN_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required("width", Takes::Quantity(LENGTH), "width over both legs"),
    Key::required(
        "height",
        Takes::Quantity(LENGTH),
        "height of one half, back included",
    ),
    Key::required("depth", Takes::Quantity(LENGTH), "depth of the legs"),
    Key::required(
        "window_depth",
        Takes::Quantity(LENGTH),
        "depth of the window in one half",
    ),
    Key::required("window_width", Takes::Quantity(LENGTH), "from leg to leg"),
];

#[derive(Debug)]
struct UPair {
    width: Value,
    height: Value,
    depth: Value,
    window_depth: Value,
    window_width: Value,
    gapping: Gapping,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let (width, height) = (fields.positive("width"), fields.positive("height"));
    let depth = fields.positive("depth");
    let (window_depth, window_width) = (
        fields.positive("window_depth"),
        fields.positive("window_width"),
    );
    let gapping = Gapping::read(fields, true, rule(fields)?, true);
    ordered(fields, "window_depth", "height")?;
    ordered(fields, "window_width", "width")?;
    Some(Box::new(UPair {
        width: width?,
        height: height?,
        depth: depth?,
        window_depth: window_depth?,
        window_width: window_width?,
        gapping: gapping?,
    }))
}

impl Shape for UPair {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let [width, height, depth, window_depth, window] = [
            self.width,
            self.height,
            self.depth,
            self.window_depth,
            self.window_width,
        ]
        .map(|value| values[value]);
        let (leg, back) = (0.5 * (width - window), height - window_depth);
        super::above_zero(&[leg, back, window, window_depth, depth])?;
        let (legs_area, backs) = (leg * depth, back * depth);
        let parts = [
            Part::straight(4.0 * window_depth, legs_area),
            Part::straight(2.0 * window, backs),
            Part::corners(4, (0.5 * leg, legs_area), (0.5 * back, backs)),
        ];
        let leg_of = |place| Leg {
            place,
            section: Section::Rectangle(leg, depth),
            area: legs_area,
            window_height: Some(2.0 * window_depth),
            leg_height: None,
        };
        let legs = Legs {
            ground: leg_of("wound leg"),
            others: &[leg_of("other leg")],
        };
        let closed = sections::path(&parts);
        let mut geometry = self
            .gapping
            .derive(values, closed, &legs, around.permeability)?;
        // The winding fills the window from leg to leg.
        geometry.mean_turn = Some(2.0 * (leg + depth) + PI * window);
        geometry.layer_breadth = Some(2.0 * window_depth);
        geometry.wind(
            Window {
                area: 2.0 * window * window_depth,
                practical_fill: BOBBIN_FILL,
            },
            around.winding,
        );
        Ok(geometry)
    }
}
