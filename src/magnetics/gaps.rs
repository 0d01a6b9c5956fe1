//! Air gaps of a core: ground into a leg, opened by a spacer, or computed from an inductance factor.
//!
//! Each gap counts as its length over its fringing factor, at its own section. Several gaps in one leg are evenly spread
//! over it: each has its share of the leg's height to fringe into. Iron that is ground away no longer counts as iron;
//! a spacer takes none.

use super::MU0;
use super::fringing::{Fringing, LegGap, Rule, Section};
use super::geometry::{Fault, Geometry};
use crate::diag::Diagnostic;
use crate::math::root;
use crate::netlist::{Data, Fields, Key, Takes, Value, Values};
use crate::units::{INDUCTANCE_FACTOR, LENGTH};

/// Gaps of a core with one leg to cut.
pub const KEYS: &[Key] = &[
    Key::optional(
        "gap",
        Takes::Quantity(LENGTH),
        "air gap, or a list of several that share the leg evenly",
    ),
    FACTOR,
];

/// Gaps of a pair of halves.
pub const PAIR_KEYS: &[Key] = &[
    Key::optional(
        "gap",
        Takes::Quantity(LENGTH),
        "gap ground into the wound leg, or a list of several that share it evenly",
    ),
    Key::optional("centre_gap", Takes::Quantity(LENGTH), "the same as `gap`"),
    Key::optional(
        "spacer",
        Takes::Quantity(LENGTH),
        "thickness of a spacer that opens every leg",
    ),
    FACTOR,
];

const FACTOR: Key = Key::optional(
    "inductance_factor",
    Takes::Quantity(INDUCTANCE_FACTOR),
    "initial inductance per turn squared, from which the gap is computed",
);

/// One gap of a core, with numbers. SI units.
#[derive(Clone, Debug, PartialEq)]
pub struct Gap {
    /// The leg in which it stands: `centre leg`.
    pub place: &'static str,
    /// Its length [m].
    pub length: f64,
    /// The section of the iron beside it [m²], of all parallel legs together.
    pub area: f64,
    /// The fringing rule and its factor.
    pub fringing: Option<Fringing>,
}

/// A leg that gaps can stand in.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Leg {
    /// What it is called.
    pub place: &'static str,
    /// Section of one leg, as fringing sees it.
    pub section: Section,
    /// Section of all parallel legs of this kind together [m²].
    pub area: f64,
    /// Height of the window along the leg [m], where it is known.
    pub window_height: Option<f64>,
    /// Length of the leg on one side of a single gap [m], where it is known.
    pub leg_height: Option<f64>,
}

impl Leg {
    /// A `gap` [m] in this leg, one of `of` evenly spread.
    fn gap(&self, rule: &'static Rule, gap: f64, of: usize) -> Gap {
        let share = |height: Option<f64>| height.map(|height| height / of as f64);
        let seen = LegGap {
            gap,
            section: self.section,
            window_height: share(self.window_height),
            leg_height: share(self.leg_height),
        };
        Gap {
            place: self.place,
            length: gap,
            area: self.area,
            fringing: (gap > 0.0).then(|| rule.apply(&seen)),
        }
    }
}

/// Gaps as written.
#[derive(Clone, Debug)]
pub struct Gapping {
    ground: Vec<Value>,
    spacer: Option<Value>,
    factor: Option<Value>,
    rule: &'static Rule,
    /// Whether a ground gap shortens the iron: not where the iron's length is given beside the gap.
    cuts: bool,
}

/// The legs of a shape: the one that a gap is ground into, and those that a spacer opens besides, in series.
#[derive(Clone, Debug)]
pub struct Legs<'a> {
    /// The leg with the ground gaps.
    pub ground: Leg,
    /// The others in its circuit.
    pub others: &'a [Leg],
}

impl Gapping {
    /// Reads [`KEYS`] or [`PAIR_KEYS`]; what is wrong is reported. `cuts`: whether a ground gap shortens the iron.
    pub fn read(fields: &Fields<'_>, pair: bool, rule: &'static Rule, cuts: bool) -> Option<Self> {
        let own = one_name(fields, pair)?;
        let spacer = if pair && fields.has("spacer") {
            Some(fields.non_negative("spacer")?)
        } else {
            None
        };
        let ground = match own {
            Some(key) => lengths(fields, key)?,
            None => Vec::new(),
        };
        let factor = match fields.has("inductance_factor") {
            true => Some(fields.positive("inductance_factor")?),
            false => None,
        };
        if factor.is_some() && (own.is_some() || spacer.is_some()) {
            fields.error(
                "inductance_factor",
                "conflicting-keys",
                "a core has either gaps or an `inductance_factor`, from which the gap is computed",
                "both are written",
                None,
            );
            return None;
        }
        Some(Gapping {
            ground,
            spacer,
            factor,
            rule,
            cuts,
        })
    }

    /// Puts the gaps into a closed geometry whose material has a relative `permeability` at zero field.
    ///
    /// # Errors
    /// A gap that leaves no iron, or an inductance factor that no gap gives.
    pub fn derive(
        &self,
        values: &Values,
        closed: Geometry,
        legs: &Legs<'_>,
        permeability: f64,
    ) -> Result<Geometry, Fault> {
        if let Some(factor) = self.factor {
            return self.meeting(values[factor], &closed, legs, permeability);
        }
        let ground: Vec<f64> = self.ground.iter().map(|&gap| values[gap]).collect();
        let spacer = self.spacer.map_or(0.0, |spacer| values[spacer]);
        self.opened(&closed, legs, &ground, spacer).ok_or(Fault {
            word: "out-of-range",
            key: "gap",
            text: "the gaps leave no iron, or a gap is below zero".into(),
            help: "a gap is zero or more and shorter than its leg",
        })
    }

    /// The geometry with these gaps; None where they leave no iron.
    fn opened(
        &self,
        closed: &Geometry,
        legs: &Legs<'_>,
        ground: &[f64],
        spacer: f64,
    ) -> Option<Geometry> {
        if spacer < 0.0 || ground.iter().any(|&gap| gap < 0.0) {
            return None;
        }
        // The spacer lies where the halves meet, and so does a single ground gap or the first of several.
        let mut lengths = ground.to_vec();
        match lengths.first_mut() {
            Some(first) => *first += spacer,
            None if spacer > 0.0 => lengths.push(spacer),
            None => {}
        }
        let of = lengths.len();
        let mut gaps: Vec<Gap> = lengths
            .iter()
            .filter(|&&length| length > 0.0)
            .map(|&length| legs.ground.gap(self.rule, length, of))
            .collect();
        if spacer > 0.0 {
            gaps.extend(legs.others.iter().map(|leg| leg.gap(self.rule, spacer, 1)));
        }
        let cut = if self.cuts {
            ground.iter().sum::<f64>() * closed.area / legs.ground.area
        } else {
            0.0
        };
        let mut geometry = closed.clone().with_gaps(gaps);
        geometry.iron -= cut;
        (geometry.iron > 0.0).then_some(geometry)
    }

    /// The one ground gap at which the initial inductance per turn squared is `factor` [H].
    fn meeting(
        &self,
        factor: f64,
        closed: &Geometry,
        legs: &Legs<'_>,
        permeability: f64,
    ) -> Result<Geometry, Fault> {
        let at = |gap: f64| self.opened(closed, legs, &[gap], 0.0);
        let permeance = |geometry: &Geometry| {
            MU0 * geometry.area / (geometry.iron / permeability + geometry.air)
        };
        let most = permeance(closed);
        let reachable = factor <= most;
        if !reachable {
            return Err(unreachable(format!(
                "an inductance factor of {:.4} nH is above that of the core without a gap, {:.4} nH",
                1e9 * factor,
                1e9 * most
            )));
        }
        // Wider and wider, as far as there is iron and the rule knows what to do.
        let known = |gap: f64| {
            at(gap).filter(|geometry| {
                let fringing = geometry.gaps.iter().filter_map(|gap| gap.fringing.as_ref());
                fringing.clone().all(|fringing| fringing.within)
            })
        };
        let lacks = |gap: f64| known(gap).map(|geometry| permeance(&geometry) > factor);
        let mut high = 1e-6 * closed.length;
        while lacks(high) == Some(true) && high < 1e3 * closed.length {
            high *= 1.25;
        }
        if lacks(high) != Some(false) {
            return Err(unreachable(format!(
                "an inductance factor of {:.4} nH needs a gap beyond the range of fringing by {}",
                1e9 * factor,
                self.rule.word
            )));
        }
        let gap = root::halving(
            |gap| known(gap).map_or(1.0, |geometry| factor - permeance(&geometry)),
            0.0,
            high,
        );
        at(gap).ok_or_else(|| unreachable("the gap leaves no iron".into()))
    }
}

/// `gap` or `centre_gap`, whichever is written.
fn one_name(fields: &Fields<'_>, pair: bool) -> Option<Option<&'static str>> {
    match (fields.has("gap"), pair && fields.has("centre_gap")) {
        (true, true) => {
            fields.error(
                "centre_gap",
                "conflicting-keys",
                "`gap` and `centre_gap` are two words for one thing",
                "both are written",
                None,
            );
            None
        }
        (true, false) => Some(Some("gap")),
        (false, true) => Some(Some("centre_gap")),
        (false, false) => Some(None),
    }
}

/// A length, or a list of several.
fn lengths(fields: &Fields<'_>, key: &str) -> Option<Vec<Value>> {
    let (node, path) = fields.node_and_path(key)?;
    let Data::List(items) = &node.data else {
        return Some(vec![fields.non_negative(key)?]);
    };
    if items.is_empty() {
        fields.error(
            key,
            "wrong-length",
            format!("{key} takes a length, or a list of lengths"),
            "an empty list",
            None,
        );
        return None;
    }
    let reader = fields.reader();
    let read = |(k, item)| {
        let amount = reader.amount(item, key, LENGTH)?;
        if amount.low < 0.0 {
            let headline = format!("{key} must be zero or more");
            let place = Diagnostic::error("out-of-range", headline).at(item.span, "below zero");
            reader.sink.report(place);
            return None;
        }
        reader.value(item, &format!("{path}.{k}"), LENGTH)
    };
    let values: Vec<Option<Value>> = items.iter().enumerate().map(read).collect();
    values.into_iter().collect()
}

fn unreachable(text: String) -> Fault {
    Fault {
        word: "out-of-range",
        key: "inductance_factor",
        text,
        help: "it is the inductance of one turn: inductance over the square of the turns",
    }
}
