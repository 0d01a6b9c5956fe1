//! `shape: toroid`: a ring of rectangular section.
//!
//! IEC 60205: C1 = 2π/(h ln(D/d)), C2 = 4π (1/d - 1/D)/(h² ln³(D/d)), length C1²/C2, area C1/C2. Exact for a field that
//! follows circles; the length is not that of the mean circle. A gap is cut out of the ring: the iron keeps the
//! effective length less the gap, and the gap has the effective area. Its leg is the ring's section, a quarter of the
//! mean circle high: beyond that the two sides no longer face each other across the gap.

use super::{Around, Shape, ShapeKind, ordered};
use crate::magnetics::fringing::Section;
use crate::magnetics::fringing::spec::{DRAWN_KEYS, rule};
use crate::magnetics::gaps::{self, Gapping, Leg, Legs};
use crate::magnetics::geometry::{Fault, Geometry, Window};
use crate::magnetics::winding::WindingPlan;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;
use std::f64::consts::{FRAC_PI_4, PI};

/// `shape: toroid`.
pub const KIND: ShapeKind = ShapeKind {
    word: "toroid",
    about: "a ring of rectangular section",
    keys: &[KEYS, gaps::KEYS, DRAWN_KEYS],
    takes_material: true,
    read,
};

const KEYS: &[Key] = &[
    Key::required(
        "outer_diameter",
        Takes::Quantity(LENGTH),
        "outer diameter of the ring",
    ),
    Key::required(
        "inner_diameter",
        Takes::Quantity(LENGTH),
        "diameter of the hole",
    ),
    Key::required("height", Takes::Quantity(LENGTH), "height along the axis"),
];

/// The hole must leave room for the shuttle or the hand: common practice.
const PRACTICAL_FILL: f64 = 0.5;

#[derive(Debug)]
struct Toroid {
    outer: Value,
    inner: Value,
    height: Value,
    gapping: Gapping,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Shape>> {
    let (outer, inner) = (
        fields.positive("outer_diameter"),
        fields.positive("inner_diameter"),
    );
    let height = fields.positive("height");
    let gapping = Gapping::read(fields, false, rule(fields)?, true);
    let (outer, inner) = outer.zip(inner)?;
    ordered(fields, "inner_diameter", "outer_diameter")?;
    gap_leaves_iron(fields)?;
    Some(Box::new(Toroid {
        outer,
        inner,
        height: height?,
        gapping: gapping?,
    }))
}

/// The slit must fit into the inner circle.
fn gap_leaves_iron(fields: &Fields<'_>) -> Option<()> {
    if fields.node("gap").is_none_or(|node| node.text().is_none()) {
        return Some(());
    }
    let (gap, inner) = (fields.amount("gap")?, fields.amount("inner_diameter")?);
    if gap.high < PI * inner.low {
        return Some(());
    }
    fields.error(
        "gap",
        "out-of-range",
        "gap must be shorter than the inner circle",
        "no iron left",
        None,
    );
    None
}

/// Effective length [m] and area [m²] of a ring of rectangular section, IEC 60205.
pub fn effective(outer: f64, inner: f64, height: f64) -> (f64, f64) {
    let log = (outer / inner).ln();
    // length = C1²/C2 = π ln/(1/d - 1/D), area = C1/C2 = h ln²/(2 (1/d - 1/D)).
    let difference = 1.0 / inner - 1.0 / outer;
    (
        PI * log / difference,
        height * log * log / (2.0 * difference),
    )
}

impl Shape for Toroid {
    fn derive(&self, values: &Values, around: &Around<'_>) -> Result<Geometry, Fault> {
        let (outer, inner, height) = (values[self.outer], values[self.inner], values[self.height]);
        let width = 0.5 * (outer - inner);
        super::above_zero(&[width, inner, height])?;
        let (length, area) = effective(outer, inner, height);
        let leg = Leg {
            place: "ring",
            section: Section::Rectangle(width, height),
            area,
            window_height: None,
            leg_height: Some(PI * 0.5 * (outer + inner) / 4.0),
        };
        let legs = Legs {
            ground: leg,
            others: &[],
        };
        let closed = Geometry::closed(length, area);
        let mut geometry = self
            .gapping
            .derive(values, closed, &legs, around.permeability)?;
        geometry.mean_turn = Some(mean_turn(width, height, inner, around.winding));
        let window = Window {
            area: FRAC_PI_4 * inner * inner,
            practical_fill: PRACTICAL_FILL,
        };
        geometry.layer_breadth = Some(PI * inner);
        geometry.wind(window, around.winding);
        Ok(geometry)
    }
}

/// Mean length of a turn [m]: round the section at the middle of its layer, with round corners.
///
/// A layer holds as many turns as fit side by side round the hole; the next lies on it. Without a wire the turns lie on
/// the core itself. Outside the ring the layers are thinner than inside, so many layers come out a little long.
fn mean_turn(width: f64, height: f64, inner: f64, winding: Option<&WindingPlan>) -> f64 {
    let section = 2.0 * (width + height);
    let Some((turns, wire)) =
        winding.and_then(|winding| Some((winding.turns, winding.wire.as_ref()?)))
    else {
        return section;
    };
    let (mut left, mut off, mut sum) = (turns as f64, 0.5 * wire.outer, 0.0);
    while left > 0.0 {
        let room = (PI * (inner - 2.0 * off) / wire.outer).floor();
        // The hole is full: what does not fit is counted in the last layer, and the window is called overfilled.
        let count = if room < 1.0 { left } else { room.min(left) };
        sum += count * (section + 2.0 * PI * off);
        left -= count;
        off += wire.outer;
    }
    sum / turns as f64
}
