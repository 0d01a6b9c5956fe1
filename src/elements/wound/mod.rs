//! Windings on the legs of a core: what `transformer` and `magnetic_circuit` have in common.
//!
//! Unknowns are the current of each winding and the flux of each loop of legs ([`crate::magnetics::network`]); a leg's
//! flux is a sum of loops'. A winding's row is d(N flux + Σ S i)/dt + R i - v = 0, S being the leakage inductances; a loop's row
//! is Σ ± (force of a leg - Σ N i on it) = 0. Shells of conducting iron belong to the legs. Capacitances lie across a whole
//! winding, or between two: half of it joins their first ends, half the second ones (common practice).

mod account;
mod leakage;
mod stamps;

pub use leakage::{Concentric, Leakage};

use super::claims::{Claims, Measure, Wanted};
use super::element::{
    CoreFigures, Element, Energy, Path, PathKind, Point, Quantity, Terms, Unknown, Unsound, WHOLE,
    WindingFigures, of_leg,
};
use super::leg::Leg;
use super::pairs::Pair;
use super::skin::Skin;
use super::stamper::Stamper;
use super::winding::{Winding, unsound};
use crate::magnetics::{Core, Fault, Geometry, Linkage, Losses, Network, Seen, Wound};
use crate::netlist::{Value, Values};
use leakage::Beside;
use nalgebra::DMatrix;
use std::sync::Arc;

/// One winding as read.
pub struct Turns {
    /// Its name.
    pub name: String,
    /// What it is made of.
    pub winding: Winding,
    /// The leg that it is on.
    pub leg: usize,
    /// False for a ring that is closed upon itself; such rings come last.
    pub has_ends: bool,
    /// Capacitance across it.
    pub self_capacitance: Option<Value>,
    /// Current at a zero start.
    pub initial: Option<Value>,
}

/// Where the legs lie.
pub enum Layout {
    /// One leg that closes upon itself.
    Ring,
    /// Legs between numbered magnetic nodes.
    Between(Vec<(usize, usize)>),
}

/// A capacitance between two terminals.
struct Capacitor {
    from: usize,
    to: usize,
    value: Value,
    /// The part of the value that lies here.
    share: f64,
    capacitance: f64,
}

/// What carries a terminal's current: the row that its share goes to.
#[derive(Clone, Copy)]
struct Port {
    node: Unknown,
    /// The current as an unknown, where a charge is part of it and somebody asks for it.
    current: Option<Unknown>,
}

impl Port {
    fn row(&self) -> Unknown {
        self.current.unwrap_or(self.node)
    }
}

/// Windings on legs.
pub struct WoundLegs {
    windings: Vec<Turns>,
    cores: Vec<Arc<Core>>,
    /// Names of the legs; empty where there is one that closes upon itself.
    leg_names: Vec<String>,
    /// Volume [m³] and losses of each leg's material.
    materials: Vec<(f64, Losses)>,
    layout: Layout,
    network: Network,
    leakage: Leakage,
    capacitors: Vec<Capacitor>,
    legs: Vec<Leg>,
    /// Leakage inductances [H].
    matrix: DMatrix<f64>,
    resistances: Vec<f64>,
    /// Skin and proximity effect of each winding.
    skins: Vec<Skin>,
    initial: Vec<f64>,
    made: Vec<Wound>,
    inductances_at_zero: Vec<f64>,
    ports: Vec<Port>,
    currents: Vec<Unknown>,
    loops: Vec<Unknown>,
    /// Flux linkages as unknowns, where another element follows them.
    linkages: Vec<Option<Unknown>>,
}

impl WoundLegs {
    /// Windings on legs of these cores; `between` is the capacitance of each pair of windings.
    pub fn new(
        windings: Vec<Turns>,
        cores: Vec<Arc<Core>>,
        layout: Layout,
        leakage: Leakage,
        between: &[Pair],
    ) -> Self {
        let capacitor = |from: usize, to: usize, value: Value, share: f64| Capacitor {
            from,
            to,
            value,
            share,
            capacitance: 0.0,
        };
        let own = windings.iter().enumerate().filter_map(|(k, turns)| {
            let value = turns.self_capacitance.filter(|_| turns.has_ends)?;
            Some(capacitor(2 * k, 2 * k + 1, value, 1.0))
        });
        let joining = between.iter().flat_map(|&(j, k, value)| {
            [0, 1].map(|end| capacitor(2 * j + end, 2 * k + end, value, 0.5))
        });
        let capacitors = own.chain(joining).collect();
        let network = match &layout {
            Layout::Ring => Network::ring(),
            Layout::Between(ends) => Network::new(ends),
        };
        let count = windings.len();
        WoundLegs {
            legs: cores.iter().map(|_| Leg::default()).collect(),
            matrix: DMatrix::zeros(count, count),
            resistances: vec![0.0; count],
            skins: (0..count).map(|_| Skin::default()).collect(),
            initial: vec![0.0; count],
            made: Vec::new(),
            inductances_at_zero: Vec::new(),
            ports: Vec::new(),
            currents: Vec::new(),
            loops: Vec::new(),
            linkages: Vec::new(),
            leg_names: vec![String::new(); cores.len()],
            materials: Vec::new(),
            windings,
            cores,
            layout,
            network,
            leakage,
            capacitors,
        }
    }

    /// With names of its legs.
    #[must_use]
    pub fn with_legs_named(self, leg_names: Vec<String>) -> Self {
        WoundLegs { leg_names, ..self }
    }

    /// Inductance of the field inside a winding's copper that its ladder holds, per turn squared [H].
    fn inside(&self, k: usize) -> f64 {
        let inside = self.made[k].inside.as_ref();
        inside.map_or(0.0, |inside| inside.inductance) / self.turns(k).powi(2)
    }

    fn turns(&self, k: usize) -> f64 {
        self.windings[k].winding.turns() as f64
    }

    /// The path that a winding on `leg` sees.
    fn seen(&self, leg: usize) -> crate::magnetics::Path {
        let paths = || {
            self.legs
                .iter()
                .map(|leg| leg.path().clone())
                .collect::<Vec<_>>()
        };
        let seen = match &self.layout {
            Layout::Ring => None,
            Layout::Between(ends) => Seen::new(ends, &paths(), leg),
        };
        seen.map_or_else(|| self.legs[leg].path().clone(), Seen::path)
    }

    /// Derives the legs; their geometries.
    fn derive_legs(&mut self, values: &Values) -> Result<Vec<Geometry>, Fault> {
        let mut geometries = Vec::new();
        self.materials.clear();
        for (k, core) in self.cores.iter().enumerate() {
            let mut on_it = self
                .windings
                .iter()
                .filter(|turns| turns.leg == k && turns.has_ends);
            let (only, more) = (on_it.next(), on_it.next());
            let plan = only
                .filter(|_| more.is_none())
                .map(|turns| turns.winding.plan(values));
            // A leg without a winding is as warm as the others.
            let temperature = self.windings[0].winding.temperature(values);
            let (path, geometry) = core.path(values, plan.as_ref(), temperature)?;
            let shells = core.shells(values, &path)?;
            self.materials.push((geometry.volume, core.losses(values)?));
            self.legs[k].derive(path, shells, None);
            geometries.push(geometry);
        }
        Ok(geometries)
    }

    fn derive_windings(&mut self, values: &Values, geometries: &[Geometry]) -> Result<(), Unsound> {
        self.made.clear();
        for (k, turns) in self.windings.iter().enumerate() {
            let geometry = &geometries[turns.leg];
            let plan = turns.winding.plan(values);
            let temperature = turns.winding.temperature(values);
            let of_wire = geometry
                .mean_turn
                .and_then(|turn| plan.resistance(turn, temperature));
            self.resistances[k] = turns.winding.resistance(values, of_wire)?;
            self.initial[k] = turns.initial.map_or(0.0, |value| values[value]);
            let first = self.windings[..k]
                .iter()
                .all(|other| other.leg != turns.leg);
            let mut wound = Wound {
                geometry: geometry.clone(),
                linkage: Linkage::new(self.seen(turns.leg), turns.winding.turns() as f64),
                shells: None,
                losses: self.materials[turns.leg].1,
                inside: None,
                resistance: of_wire,
                // What is said of the leg is said once.
                remarks: if first {
                    geometry.remarks.clone()
                } else {
                    Vec::new()
                },
            };
            let arranged = turns.winding.arranged(values, geometry)?;
            let impedance = arranged.as_ref().map(|arranged| arranged.impedance);
            self.skins[k].derive(impedance, self.resistances[k]);
            if let Some((arranged, ladder)) = arranged.zip(self.skins[k].ladder()) {
                wound
                    .count_inside(arranged, ladder, self.resistances[k])
                    .map_err(|fault| unsound(&fault))?;
            }
            self.made.push(wound);
        }
        Ok(())
    }

    /// A linear form of the loops: the flux of a leg.
    fn flux_terms(&self, leg: usize) -> Terms {
        let form = self.network.form(leg).iter();
        form.map(|&(k, sign)| (self.loops[k], sign)).collect()
    }

    fn linkage(&self, k: usize, x: &[f64]) -> f64 {
        let leakage: f64 = (0..self.currents.len())
            .map(|j| self.matrix[(k, j)] * self.currents[j].of(x))
            .sum();
        self.turns(k) * self.legs[self.windings[k].leg].flux(x) + leakage
    }

    /// Incremental inductance of a winding [H], the others open, about fluxes of the loops.
    fn inductance(&self, k: usize, loops: &[f64]) -> f64 {
        let paths: Vec<_> = self.legs.iter().map(Leg::path).collect();
        let reluctances = self.network.reluctances(&paths, loops);
        let mut form = nalgebra::DVector::zeros(loops.len());
        for &(c, sign) in self.network.form(self.windings[k].leg) {
            form[c] = sign;
        }
        let permeance = reluctances
            .lu()
            .solve(&form)
            .map_or(0.0, |solved| form.dot(&solved));
        self.turns(k).powi(2) * permeance + self.matrix[(k, k)]
    }

    fn loop_fluxes(&self, x: &[f64]) -> Vec<f64> {
        self.loops.iter().map(|unknown| unknown.of(x)).collect()
    }
}

impl Element for WoundLegs {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let geometries = self.derive_legs(values).map_err(|fault| unsound(&fault))?;
        self.derive_windings(values, &geometries)?;
        let turns: Vec<f64> = (0..self.windings.len()).map(|k| self.turns(k)).collect();
        let inside: Vec<f64> = (0..self.windings.len()).map(|k| self.inside(k)).collect();
        let beside = Beside {
            turns: &turns,
            inside: &inside,
            shared: 1.0 / self.legs[0].path().magnetomotive(0.0).1,
            mean_turn: geometries[0].mean_turn,
        };
        self.matrix = self.leakage.matrix(values, &beside)?;
        for capacitor in &mut self.capacitors {
            capacitor.capacitance = capacitor.share * values[capacitor.value];
        }
        let rest = vec![0.0; self.network.loops()];
        self.inductances_at_zero = (0..self.windings.len())
            .map(|k| self.inductance(k, &rest))
            .collect();
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let charged = |t: usize| {
            let touching = |c: &Capacitor| c.capacitance > 0.0 && (c.from == t || c.to == t);
            self.capacitors.iter().any(touching)
        };
        self.ports = (0..claims.terminals.len())
            .map(|t| {
                let wanted = Wanted::Current(t);
                let asked = claims.probed || claims.wants(wanted);
                let current =
                    (asked && charged(t)).then(|| claims.unknown("current", Measure::Current));
                if let Some(current) = current {
                    claims.offer(wanted, current, 1.0);
                }
                Port {
                    node: claims.terminal(t),
                    current,
                }
            })
            .collect();
        self.currents.clear();
        self.linkages.clear();
        for (k, turns) in self.windings.iter().enumerate() {
            let current = claims.unknown("winding current", Measure::Current);
            if turns.has_ends {
                for (t, sign) in [(2 * k, 1.0), (2 * k + 1, -1.0)] {
                    if self.ports[t].current.is_none() {
                        claims.offer(Wanted::Current(t), current, sign);
                    }
                }
            }
            claims.offer(Wanted::Of(Quantity::WindingCurrent, k), current, 1.0);
            self.currents.push(current);
            self.skins[k].claim(claims);
            let wanted = Wanted::Of(Quantity::FluxLinkage, k);
            let linkage = claims
                .wants(wanted)
                .then(|| claims.unknown("flux linkage", Measure::FluxLinkage));
            if let Some(linkage) = linkage {
                claims.offer(wanted, linkage, 1.0);
            }
            self.linkages.push(linkage);
        }
        self.loops = (0..self.network.loops())
            .map(|_| claims.unknown("flux", Measure::Flux))
            .collect();
        for leg in 0..self.legs.len() {
            let terms = self.flux_terms(leg);
            self.legs[leg].claim(claims, terms, 1.0, None);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        for port in &self.ports {
            if let Some(i) = port.current {
                into.f(port.node, i.of(at.x));
                into.df(port.node, i, 1.0);
                into.f(i, -i.of(at.x));
                into.df(i, i, -1.0);
            }
        }
        for k in 0..self.windings.len() {
            self.stamp_winding(k, at.x, into);
        }
        for (leg, law) in self.legs.iter().enumerate() {
            self.stamp_leg(leg, law, at.x, into);
        }
        for capacitor in self.capacitors.iter().filter(|c| c.capacitance > 0.0) {
            let (a, b) = (&self.ports[capacitor.from], &self.ports[capacitor.to]);
            let c = capacitor.capacitance;
            let charge = c * (a.node.of(at.x) - b.node.of(at.x));
            for (port, sign) in [(a, 1.0), (b, -1.0)] {
                into.q(port.row(), sign * charge);
                into.dq(port.row(), a.node, sign * c);
                into.dq(port.row(), b.node, -sign * c);
            }
        }
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn quantity(&self, quantity: Quantity, winding: usize, at: Point<'_>) -> Option<f64> {
        let fullest = || {
            let density = |leg: &&Leg| leg.flux_density(at.x).abs();
            let legs = self.legs.iter();
            legs.max_by(|a, b| density(a).total_cmp(&density(b)))
        };
        let leg = match self.windings.get(winding) {
            Some(turns) => &self.legs[turns.leg],
            None if winding == WHOLE => fullest()?,
            None => self.legs.get(of_leg(winding))?,
        };
        let of_core = matches!(quantity, Quantity::FluxDensity | Quantity::FieldStrength);
        if winding >= self.windings.len() && !of_core {
            return None;
        }
        match quantity {
            Quantity::WindingCurrent => Some(self.currents[winding].of(at.x)),
            Quantity::FluxLinkage => Some(self.linkage(winding, at.x)),
            Quantity::FluxDensity => Some(leg.flux_density(at.x)),
            Quantity::FieldStrength => Some(leg.field_strength(at.x)),
            Quantity::Inductance => Some(self.inductance(winding, &self.loop_fluxes(at.x))),
            Quantity::Saturation => {
                let now = self.inductance(winding, &self.loop_fluxes(at.x));
                Some(1.0 - now / self.inductances_at_zero[winding])
            }
            _ => None,
        }
    }

    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        let mut ampere_turns = vec![0.0; self.legs.len()];
        for (k, turns) in self.windings.iter().enumerate() {
            ampere_turns[turns.leg] += self.turns(k) * self.initial[k];
        }
        let paths: Vec<_> = self.legs.iter().map(Leg::path).collect();
        let loops = self.network.loop_fluxes(&paths, &ampere_turns);
        for (k, turns) in self.windings.iter().enumerate() {
            let leakage: f64 = (0..self.initial.len())
                .map(|j| self.matrix[(k, j)] * self.initial[j])
                .sum();
            let flux = self.network.flux(turns.leg, &loops);
            q(self.currents[k], self.turns(k) * flux + leakage);
            self.skins[k].initial_charge(self.initial[k], q);
        }
        for (leg, law) in self.legs.iter().enumerate() {
            law.initial_charge(self.network.flux(leg, &loops), q);
        }
    }

    fn paths(&self) -> Vec<Path> {
        let with_ends = self
            .windings
            .iter()
            .enumerate()
            .filter(|(_, turns)| turns.has_ends);
        let windings = with_ends.map(|(k, _)| Path {
            from: 2 * k,
            to: 2 * k + 1,
            kind: if self.resistances[k] > 0.0 {
                PathKind::InductiveWithResistance
            } else {
                PathKind::Inductive
            },
        });
        let across = |c: &&Capacitor| c.capacitance > 0.0;
        let capacitors = self.capacitors.iter().filter(across).map(|c| Path {
            from: c.from,
            to: c.to,
            kind: PathKind::Capacitive,
        });
        windings.chain(capacitors).collect()
    }

    fn windings(&self) -> Vec<WindingFigures<'_>> {
        let all = self.windings.iter().zip(&self.made).zip(&self.resistances);
        all.map(|((turns, wound), resistance)| WindingFigures {
            name: &turns.name,
            resistance: *resistance,
            wound,
        })
        .collect()
    }

    fn quickest_of_ladder(&self, winding: usize, at: Point<'_>) -> Option<[f64; 2]> {
        let skin = &self.skins[winding];
        skin.ladder()?;
        Some(skin.quickest(at.x, self.currents[winding].of(at.x)))
    }

    fn cores(&self) -> Vec<CoreFigures<'_>> {
        let materials = self.materials.iter().zip(&self.leg_names).zip(&self.legs);
        let legs = materials.enumerate();
        legs.map(|(k, ((&(volume, losses), name), leg))| CoreFigures {
            name,
            place: of_leg(k),
            volume,
            losses,
            eddy_currents: leg.has_shells(),
        })
        .collect()
    }
}
