//! `shape: e_pair`: two E-shaped halves, the winding on the centre leg.
//!
//! IEC 60205, five sections: outer legs (both in parallel), backs, centre leg, outer and inner corners (the scheme from
//! memory). A round centre leg keeps it, with its own section and the centre of area of half a disc.
//!
//! ```text
//!   +---------------------+ -
//!   |   +-----+ +-----+   |      width, height, depth (into the page) of one half;
//!   |   |     | |     |   | h    window_depth, window_width between the outer legs;
//!   +---+     +-+     +---+ -    leg_width or leg_diameter of the centre leg
//! ```

use super::sections::{self, Part};
use super::{Around, BOBBIN_FILL, Shape, ShapeKind, ordered};
use crate::magnetics::fringing::Section;
use crate::magnetics::fringing::spec::{DRAWN_KEYS, rule};
use crate::magnetics::gaps::{Gapping, Leg, Legs, PAIR_KEYS};
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::PI;

/// `shape: e_pair`.
pub const KIND: ShapeKind = ShapeKind {
    word: "e_pair",
    about: "two E-shaped halves with a square or round centre leg",
    keys: &[KEYS, PAIR_KEYS, DRAWN_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required(
        "width",
        Takes::Quantity(LENGTH),
        "width over the outer legs",
    ),
    Key::required(
        "height",
        Takes::Quantity(LENGTH),
        "height of one half, back included",
    ),
    Key::required("depth", Takes::Quantity(LENGTH), "depth of the outer legs"),
    Key::required(
        "window_depth",
        Takes::Quantity(LENGTH),
        "depth of the window in one half",
    ),
    Key::required(
        "window_width",
        Takes::Quantity(LENGTH),
        "from inner face to inner face of the outer legs",
    ),
    Key::optional(
        "leg_width",
        Takes::Quantity(LENGTH),
        "width of a rectangular centre leg",
    ),
    Key::optional(
        "leg_diameter",
        Takes::Quantity(LENGTH),
        "diameter of a round centre leg",
    ),
];

#[derive(Debug)]
struct EPair {
    width: Value,
    height: Value,
    depth: Value,
    window_depth: Value,
    window_width: Value,
    leg: Value,
    round: bool,
    gapping: Gapping,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let key = leg_key(fields);
    let (width, height) = (fields.positive("width"), fields.positive("height"));
    let depth = fields.positive("depth");
    let (window_depth, window_width) = (
        fields.positive("window_depth"),
        fields.positive("window_width"),
    );
    let leg = fields.positive(key?);
    let gapping = Gapping::read(fields, true, rule(fields)?, true);
    ordered(fields, "window_depth", "height")?;
    ordered(fields, "window_width", "width")?;
    ordered(fields, key?, "window_width")?;
    Some(Box::new(EPair {
        width: width?,
        height: height?,
        depth: depth?,
        window_depth: window_depth?,
        window_width: window_width?,
        leg: leg?,
        round: key? == "leg_diameter",
        gapping: gapping?,
    }))
}

/// The key that tells the centre leg.
fn leg_key(fields: &Fields<'_>) -> Option<&'static str> {
    let headline = match (fields.has("leg_width"), fields.has("leg_diameter")) {
        (true, false) => return Some("leg_width"),
        (false, true) => return Some("leg_diameter"),
        (true, true) => {
            "a centre leg is either rectangular (`leg_width`) or round (`leg_diameter`)"
        }
        (false, false) => "an e_pair needs `leg_width`, or `leg_diameter` of a round centre leg",
    };
    let (word, label) = if fields.has("leg_width") {
        ("conflicting-keys", "both are written")
    } else {
        ("missing-key", "the centre leg is missing")
    };
    fields.error("leg_diameter", word, headline, label, None);
    None
}

impl Shape for EPair {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let [width, height, depth, window_depth, window_width, leg] = [
            self.width,
            self.height,
            self.depth,
            self.window_depth,
            self.window_width,
            self.leg,
        ]
        .map(|value| values[value]);
        let (outer, back) = (0.5 * (width - window_width), height - window_depth);
        let window = 0.5 * (window_width - leg);
        super::above_zero(&[outer, back, window, window_depth, leg, depth])?;
        let (section, centre) = if self.round {
            (Section::Round(leg), sections::half_disc(0.5 * leg))
        } else {
            (Section::Rectangle(leg, depth), 0.25 * leg)
        };
        let (outers, backs, inner) = (2.0 * outer * depth, 2.0 * back * depth, section.area());
        let parts = [
            Part::straight(2.0 * window_depth, outers),
            Part::straight(2.0 * window, backs),
            Part::straight(2.0 * window_depth, inner),
            Part::corners(2, (0.5 * outer, outers), (0.5 * back, backs)),
            Part::corners(2, (centre, inner), (0.5 * back, backs)),
        ];
        let high = Some(2.0 * window_depth);
        let leg_of = |place, section: Section, area| Leg {
            place,
            section,
            area,
            window_height: high,
            leg_height: None,
        };
        let legs = Legs {
            ground: leg_of("centre leg", section, inner),
            others: &[leg_of(
                "outer legs",
                Section::Rectangle(outer, depth),
                outers,
            )],
        };
        let closed = sections::path(&parts);
        let mut geometry = self
            .gapping
            .derive(values, closed, &legs, around.permeability)?;
        geometry.mean_turn = Some(if self.round {
            PI * (leg + window)
        } else {
            2.0 * (leg + depth) + PI * window
        });
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
