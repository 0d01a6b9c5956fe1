//! Coil on a core: its state is the flux linkage. d(linkage)/dt + R i(linkage) = v, the self-capacitance lies across the
//! whole coil, winding resistance included. Iron that conducts adds the states of its shells, on which the current then
//! hangs too.

use super::claims::{Claims, Measure, Wanted};
use super::element::{
    Branch, Element, Energy, Path, PathKind, Point, Quantity, Unknown, Unsound, WindingFigures,
};
use super::kind::{ElementKind, Made, NODES, Surroundings, Terminal, pair, reference_temperature};
use super::leg::Leg;
use super::skin::Skin;
use super::stamper::Stamper;
use super::winding::{
    LAYER_BREADTH, LAYERS, RESISTANCE, SKIN_AND_PROXIMITY, TEMPERATURE_COEFFICIENT, TURNS, WIRE,
    Winding, unsound,
};
use crate::magnetics::{Core, Linkage, MU0, MovingGap, Wound};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;
use std::sync::Arc;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "coil",
    about: "A winding on a core built from geometry and material, saturation counted.",
    keys: &[
        NODES,
        Key::required("core", Takes::Name("core"), "the core that it is wound on"),
        TURNS,
        WIRE,
        RESISTANCE,
        SELF_CAPACITANCE,
        Key::default(
            "initial_current",
            Takes::Quantity(units::CURRENT),
            "0 A",
            "winding current at a zero start",
        ),
        TEMPERATURE_COEFFICIENT,
        SKIN_AND_PROXIMITY,
        LAYERS,
        LAYER_BREADTH,
    ],
    read,
};

/// The key of the capacitance across a coil.
pub const SELF_CAPACITANCE: Key = Key::required(
    "self_capacitance",
    Takes::Quantity(units::CAPACITANCE),
    "capacitance across the whole coil",
);

/// A winding on a core; a relay has one whose gap moves.
pub(super) struct Coil {
    core: Arc<Core>,
    winding: Winding,
    capacitance_key: Value,
    initial_key: Option<Value>,
    made: Option<Wound>,
    pub(super) leg: Leg,
    pub(super) turns: f64,
    resistance: f64,
    skin: Skin,
    capacitance: f64,
    initial: f64,
    branch: Branch,
    linkage: Unknown,
    /// The winding current as an unknown, where another element follows it.
    winding_current: Option<Unknown>,
    /// Length of a gap that moves.
    gap: Option<Unknown>,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let (terminals, coil) = Coil::read(fields, around, false)?;
    Some(Made::new(terminals, coil))
}

impl Coil {
    /// Reads a coil, or that of a relay, which starts without current.
    pub(super) fn read(
        fields: &Fields<'_>,
        around: &Surroundings<'_>,
        of_relay: bool,
    ) -> Option<(Vec<Terminal>, Self)> {
        let terminals = pair(fields);
        let reference = reference_temperature(fields, around);
        let core = around.library.core(fields, "core");
        let winding =
            reference.and_then(|reference| Winding::read(fields, around, reference, "a coil"));
        let winding = winding.and_then(|winding| winding.with_lay(fields));
        let capacitance = fields.non_negative("self_capacitance");
        let initial = if of_relay {
            Some(None)
        } else {
            fields.value("initial_current").map(Some)
        };
        let element = Coil {
            core: core?,
            winding: winding?,
            capacitance_key: capacitance?,
            initial_key: initial?,
            made: None,
            leg: Leg::default(),
            turns: 1.0,
            resistance: 0.0,
            skin: Skin::default(),
            capacitance: 0.0,
            initial: 0.0,
            branch: Branch::default(),
            linkage: Unknown::GROUND,
            winding_current: None,
            gap: None,
        };
        Some((terminals?, element))
    }

    /// Re-derives the numbers; of a gap that moves, `seated` is the least length [m], at which the coil is told.
    pub(super) fn derive_around(
        &mut self,
        values: &Values,
        seated: Option<f64>,
    ) -> Result<(), Unsound> {
        let mut wound = self
            .core
            .wound(
                values,
                &self.winding.plan(values),
                self.winding.temperature(values),
            )
            .map_err(|fault| unsound(&fault))?;
        self.resistance = self.winding.resistance(values, wound.resistance)?;
        let arranged = self.winding.arranged(values, &wound.geometry)?;
        let impedance = arranged.as_ref().map(|arranged| arranged.impedance);
        self.skin.derive(impedance, self.resistance);
        if let Some((arranged, ladder)) = arranged.zip(self.skin.ladder()) {
            wound
                .count_inside(arranged, ladder, self.resistance)
                .map_err(|fault| unsound(&fault))?;
        }
        self.turns = wound.linkage.turns();
        let whole = wound.linkage.path().clone();
        match seated {
            None => self.leg.derive(whole, wound.shells, None),
            Some(gap) => {
                // A yoke's air is that of its moving gap; another core's stays beside a plain one.
                let moving = wound.geometry.moving.clone();
                let moving = moving.unwrap_or_else(|| MovingGap::plain(&whole));
                let path = whole.without_air();
                let of_gap = MU0 * path.area() * moving.reluctance(gap).0;
                wound.linkage = Linkage::new(path.with_gap(of_gap), self.turns);
                self.leg.derive(path, wound.shells, Some(moving));
            }
        }
        self.made = Some(wound);
        self.capacitance = values[self.capacitance_key];
        self.initial = self.initial_key.map_or(0.0, |key| values[key]);
        Ok(())
    }

    /// Claims what a coil needs; `gap` is the length of a gap that moves.
    pub(super) fn claim_around(&mut self, claims: &mut Claims<'_>, gap: Option<Unknown>) {
        let hidden = claims.probed && self.capacitance > 0.0;
        self.branch = Branch::claim(claims, hidden);
        self.linkage = claims.unknown("flux linkage", Measure::FluxLinkage);
        self.leg
            .claim(claims, vec![(self.linkage, 1.0)], self.turns, gap);
        self.gap = gap;
        self.skin.claim(claims);
        let wanted = Wanted::Of(Quantity::WindingCurrent, 0);
        self.winding_current = claims
            .wants(wanted)
            .then(|| claims.unknown("winding current", Measure::Current));
        if let Some(current) = self.winding_current {
            claims.offer(wanted, current, 1.0);
        }
        claims.offer(Wanted::Of(Quantity::FluxLinkage, 0), self.linkage, 1.0);
    }

    fn law(&self) -> &Linkage {
        &self
            .made
            .as_ref()
            .expect("a coil is derived before anything is asked of it")
            .linkage
    }

    /// Incremental inductance [H] with the gap as it is.
    fn inductance(&self, x: &[f64]) -> f64 {
        let path = self.leg.path_now(x);
        self.turns * self.turns / path.magnetomotive(self.leg.flux(x)).1
    }

    /// 1 less the incremental inductance over that at no flux, with the gap as it is.
    fn saturation(&self, x: &[f64]) -> f64 {
        let path = self.leg.path_now(x);
        1.0 - path.magnetomotive(0.0).1 / path.magnetomotive(self.leg.flux(x)).1
    }

    /// Winding current [A].
    fn current(&self, x: &[f64]) -> f64 {
        self.leg.force(x).value / self.turns
    }
}

impl Element for Coil {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.derive_around(values, None)
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.claim_around(claims, None);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let force = self.leg.force(at.x);
        let current = force.value / self.turns;
        let slope = force.by_flux / (self.turns * self.turns);
        let others = force.others().iter();
        let slopes = std::iter::once((self.linkage, slope))
            .chain(others.map(|&(other, slope)| (other, slope / self.turns)));
        let (a, b) = (self.branch.a, self.branch.b);
        let voltage = self.branch.voltage(at.x);
        into.q(self.linkage, self.linkage.of(at.x));
        into.dq(self.linkage, self.linkage, 1.0);
        into.f(self.linkage, self.resistance * current - voltage);
        into.df(self.linkage, a, -1.0);
        into.df(self.linkage, b, 1.0);
        for (unknown, slope) in slopes.clone() {
            into.df(self.linkage, unknown, self.resistance * slope);
        }
        self.skin
            .stamp(at.x, current, slopes.clone(), self.linkage, into);
        match self.branch.current {
            None => {
                into.f(a, current);
                into.f(b, -current);
                for (unknown, slope) in slopes.clone() {
                    into.df(a, unknown, slope);
                    into.df(b, unknown, -slope);
                }
            }
            Some(i) => {
                into.carry(a, b, i, i.of(at.x));
                into.f(i, current - i.of(at.x));
                into.df(i, i, -1.0);
                for (unknown, slope) in slopes.clone() {
                    into.df(i, unknown, slope);
                }
            }
        }
        self.branch
            .store(self.capacitance * voltage, self.capacitance, into);
        if let Some(winding) = self.winding_current {
            into.f(winding, winding.of(at.x) - current);
            into.df(winding, winding, 1.0);
            for (unknown, slope) in slopes {
                into.df(winding, unknown, -slope);
            }
        }
        self.leg.stamp(at.x, into);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn quantity(&self, quantity: Quantity, _winding: usize, at: Point<'_>) -> Option<f64> {
        let linkage = self.linkage.of(at.x);
        let law = self.law();
        match quantity {
            Quantity::WindingCurrent => Some(self.current(at.x)),
            Quantity::FluxLinkage => Some(linkage),
            Quantity::FluxDensity => Some(law.flux_density(linkage)),
            Quantity::FieldStrength => Some(self.leg.field_strength(at.x)),
            Quantity::Inductance if self.gap.is_some() => Some(self.inductance(at.x)),
            Quantity::Saturation if self.gap.is_some() => Some(self.saturation(at.x)),
            Quantity::Inductance => Some(law.inductance(linkage)),
            Quantity::Saturation => Some(law.saturation(linkage)),
            _ => None,
        }
    }

    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        let linkage = self.law().linkage_at(self.initial);
        q(self.linkage, linkage);
        self.leg.initial_charge(linkage / self.turns, q);
        self.skin.initial_charge(self.initial, q);
    }

    fn paths(&self) -> Vec<Path> {
        let kind = if self.resistance > 0.0 {
            PathKind::InductiveWithResistance
        } else {
            PathKind::Inductive
        };
        vec![Path {
            from: 0,
            to: 1,
            kind,
        }]
    }

    fn quickest_of_ladder(&self, _winding: usize, at: Point<'_>) -> Option<[f64; 2]> {
        self.skin.ladder()?;
        Some(self.skin.quickest(at.x, self.current(at.x)))
    }

    fn windings(&self) -> Vec<WindingFigures<'_>> {
        self.made
            .iter()
            .map(|wound| WindingFigures {
                name: "",
                resistance: self.resistance,
                wound,
            })
            .collect()
    }
}

impl Energy for Coil {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = self
            .branch
            .current
            .map_or_else(|| self.current(at.x), |i| i.of(at.x));
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let current = self.current(at.x);
        self.resistance * current.powi(2) + self.skin.loss(at.x, current) + self.leg.loss(at.x)
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        self.leg.stored(at.x)
            + self.skin.stored(at.x)
            + 0.5 * self.capacitance * self.branch.voltage(at.x).powi(2)
    }
}
