//! Coil on a core: its state is the flux linkage. d(linkage)/dt + R i(linkage) = v, the self-capacitance lies across the
//! whole coil, winding resistance included. Iron that conducts adds the states of its shells, on which the current then
//! hangs too.

use super::claims::{Claims, Measure, Wanted};
use super::element::{
    Branch, Element, Energy, Path, PathKind, Point, Quantity, Unknown, Unsound, WindingFigures,
};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair, reference_temperature};
use super::leg::Leg;
use super::skin::Skin;
use super::stamper::Stamper;
use super::winding::{
    LAYER_BREADTH, LAYERS, RESISTANCE, SKIN_AND_PROXIMITY, TEMPERATURE_COEFFICIENT, TURNS, WIRE,
    Winding, unsound,
};
use crate::magnetics::{Core, Linkage, Wound};
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
        Key::required(
            "self_capacitance",
            Takes::Quantity(units::CAPACITANCE),
            "capacitance across the whole coil",
        ),
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

struct Coil {
    core: Arc<Core>,
    winding: Winding,
    capacitance_key: Value,
    initial_key: Value,
    made: Option<Wound>,
    leg: Leg,
    turns: f64,
    resistance: f64,
    skin: Skin,
    capacitance: f64,
    initial: f64,
    branch: Branch,
    linkage: Unknown,
    /// The winding current as an unknown, where another element follows it.
    winding_current: Option<Unknown>,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let reference = reference_temperature(fields, around);
    let core = around.library.core(fields, "core");
    let winding =
        reference.and_then(|reference| Winding::read(fields, around, reference, "a coil"));
    let winding = winding.and_then(|winding| winding.with_lay(fields));
    let capacitance = fields.non_negative("self_capacitance");
    let initial = fields.value("initial_current");
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
    };
    Some(Made::new(terminals?, element))
}

impl Coil {
    fn law(&self) -> &Linkage {
        &self
            .made
            .as_ref()
            .expect("a coil is derived before anything is asked of it")
            .linkage
    }

    /// Winding current [A].
    fn current(&self, x: &[f64]) -> f64 {
        self.leg.force(x).value / self.turns
    }
}

impl Element for Coil {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
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
        self.leg
            .derive(wound.linkage.path().clone(), wound.shells, None);
        self.made = Some(wound);
        self.capacitance = values[self.capacitance_key];
        self.initial = values[self.initial_key];
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let hidden = claims.probed && self.capacitance > 0.0;
        self.branch = Branch::claim(claims, hidden);
        self.linkage = claims.unknown("flux linkage", Measure::FluxLinkage);
        self.leg
            .claim(claims, vec![(self.linkage, 1.0)], self.turns, None);
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
