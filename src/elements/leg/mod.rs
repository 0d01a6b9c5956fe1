//! A leg of a magnetic circuit joined to the equations: iron and air in series that carry one flux.
//!
//! F = H(B) l + (reluctance of the air) · flux is the magnetomotive force across it. In iron that conducts, F is that of
//! the outermost shell; each further shell s has an unknown, the flux within the sheet of current outside it, and the
//! row  l H(s + 1) - l H(s) + d(G(s) · flux within s)/dt = 0. Where a gap x moves, all that is not iron has the
//! reluctance R(x) ([`MovingGap`]) in place of the path's own air; it pulls with the energy's slope at constant flux,
//! flux²/2 dR/dx.

use super::claims::{Claims, Measure};
use super::element::{Terms, Unknown, sum};
use super::stamper::Stamper;
use crate::magnetics::eddy::Shells;
use crate::magnetics::moving::MovingGap;
use crate::magnetics::{MU0, Path};

/// A value that hangs on the leg's flux and on few unknowns more.
#[derive(Clone, Copy, Debug)]
pub struct OfFlux {
    /// The value.
    pub value: f64,
    /// Its slope over the flux of the leg.
    pub by_flux: f64,
    others: [(Unknown, f64); 2],
    count: usize,
}

impl OfFlux {
    fn new(value: f64, by_flux: f64) -> Self {
        OfFlux {
            value,
            by_flux,
            others: [(Unknown::GROUND, 0.0); 2],
            count: 0,
        }
    }

    fn and(&mut self, unknown: Unknown, slope: f64) {
        self.others[self.count] = (unknown, slope);
        self.count += 1;
    }

    /// Its slopes over unknowns that are not part of the flux.
    pub fn others(&self) -> &[(Unknown, f64)] {
        &self.others[..self.count]
    }
}

/// A leg. Its flux is a linear form of unknowns of the element that it belongs to, over a number of turns: 1 where these
/// are fluxes, a coil's own where its state is the flux linkage.
pub struct Leg {
    path: Option<Path>,
    shells: Option<Shells>,
    /// The gap that moves, where there is one.
    moving: Option<MovingGap>,
    flux: Terms,
    turns: f64,
    /// Length of the moving gap [m].
    gap: Option<Unknown>,
    /// The flux within each sheet of eddy current, from the outermost.
    inner: Vec<Unknown>,
}

impl Default for Leg {
    fn default() -> Self {
        Leg {
            path: None,
            shells: None,
            moving: None,
            flux: Terms::new(),
            turns: 1.0,
            gap: None,
            inner: Vec::new(),
        }
    }
}

impl Leg {
    /// Takes the numbers: the path, its shells where its iron conducts, the gap that an armature moves.
    pub fn derive(&mut self, path: Path, shells: Option<Shells>, moving: Option<MovingGap>) {
        self.path = Some(path);
        self.shells = shells;
        self.moving = moving;
    }

    /// Claims the shells' unknowns. `flux` over `turns` makes up the leg's flux [Wb]; `gap` is the moving gap's length.
    pub fn claim(
        &mut self,
        claims: &mut Claims<'_>,
        flux: Terms,
        turns: f64,
        gap: Option<Unknown>,
    ) {
        (self.flux, self.turns) = (flux, turns);
        self.gap = gap;
        let sheets = self.shells.map_or(0, |shells| shells.sheets.len());
        self.inner.clear();
        for _ in 0..sheets {
            self.inner
                .push(claims.unknown("flux within a shell", Measure::Flux));
        }
    }

    /// True where eddy currents in its iron are counted.
    pub fn has_shells(&self) -> bool {
        self.shells.is_some()
    }

    /// The path.
    pub fn path(&self) -> &Path {
        self.path
            .as_ref()
            .expect("a leg is derived before anything is asked of it")
    }

    /// The unknowns that make up its flux times the turns, with their factors.
    pub fn terms(&self) -> &Terms {
        &self.flux
    }

    /// Its flux [Wb].
    #[inline]
    pub fn flux(&self, x: &[f64]) -> f64 {
        sum(&self.flux, x) / self.turns
    }

    /// Reluctance of all that is not iron [1/H] and its slope over the moving gap [1/(H m)].
    fn air(&self, x: &[f64]) -> (f64, f64) {
        match self.gap.zip(self.moving.as_ref()) {
            Some((gap, moving)) => moving.reluctance(gap.of(x)),
            None => (self.path().reluctance_of_air(), 0.0),
        }
    }

    /// The path with the moving gap as it stands.
    pub fn path_now(&self, x: &[f64]) -> Path {
        let path = self.path().without_air();
        path.with_gap(MU0 * path.area() * self.air(x).0)
    }

    /// Magnetomotive force across it [A].
    #[inline]
    pub fn force(&self, x: &[f64]) -> OfFlux {
        let (path, flux) = (self.path(), self.flux(x));
        if self.shells.is_none() && self.moving.is_none() {
            let (value, slope) = path.magnetomotive(flux);
            return OfFlux::new(value, slope);
        }
        let (air, by_gap) = self.air(x);
        let (drop, slope) = self.drop(0, x);
        let mut force = OfFlux::new(drop + air * flux, slope + air);
        if let Some(&within) = self.inner.first() {
            force.and(within, -slope);
        }
        if let Some(gap) = self.gap {
            force.and(gap, by_gap * flux);
        }
        force
    }

    /// Pull that closes the moving gap [N]; none where nothing moves. Its slope over the gap is taken by a central
    /// difference of the reluctance's.
    pub fn pull(&self, x: &[f64]) -> OfFlux {
        let Some((gap, moving)) = self.gap.zip(self.moving.as_ref()) else {
            return OfFlux::new(0.0, 0.0);
        };
        let (flux, length) = (self.flux(x), gap.of(x));
        let by_gap = moving.reluctance(length).1;
        let step = 1e-4 * (length.abs() + moving.residual).max(1e-6);
        let slopes = [length + step, length - step].map(|length| moving.reluctance(length).1);
        let mut pull = OfFlux::new(0.5 * flux * flux * by_gap, flux * by_gap);
        pull.and(gap, 0.25 * flux * flux * (slopes[0] - slopes[1]) / step);
        pull
    }

    /// The flux [Wb] of shell `k`.
    fn of_shell(&self, k: usize, x: &[f64]) -> f64 {
        let within = self.inner.get(k).map_or(0.0, |unknown| unknown.of(x));
        let outside = match k {
            0 => self.flux(x),
            _ => self.inner[k - 1].of(x),
        };
        outside - within
    }

    /// Magnetomotive force along shell `k`, or the whole iron where it has none [A], and its slope over the flux there.
    fn drop(&self, k: usize, x: &[f64]) -> (f64, f64) {
        let path = self.path();
        let area = self.shells.map_or(path.area(), |shells| shells.areas[k]);
        let (field, slope) = path.iron_field(self.of_shell(k, x) / area);
        (path.iron() * field, path.iron() * slope / area)
    }

    /// Stamps the rows of the shells; the row that holds the leg's force is the element's.
    pub fn stamp(&self, x: &[f64], into: &mut Stamper<'_>) {
        let Some(shells) = &self.shells else {
            return;
        };
        let mut outer = self.drop(0, x);
        for (k, &row) in self.inner.iter().enumerate() {
            let inner = self.drop(k + 1, x);
            into.q(row, shells.sheets[k] * row.of(x));
            into.dq(row, row, shells.sheets[k]);
            into.f(row, inner.0 - outer.0);
            into.df(row, row, inner.1 + outer.1);
            match k {
                0 => {
                    for &(unknown, factor) in &self.flux {
                        into.df(row, unknown, -outer.1 * factor / self.turns);
                    }
                }
                _ => into.df(row, self.inner[k - 1], -outer.1),
            }
            if let Some(&next) = self.inner.get(k + 1) {
                into.df(row, next, -inner.1);
            }
            outer = inner;
        }
    }

    /// Power of its eddy currents [W]: each sheet's current squared over its conductance.
    pub fn loss(&self, x: &[f64]) -> f64 {
        let Some(shells) = &self.shells else {
            return 0.0;
        };
        let mut outer = self.drop(0, x).0;
        let mut power = 0.0;
        for (k, conductance) in shells.sheets.iter().enumerate() {
            let inner = self.drop(k + 1, x).0;
            power += (outer - inner).powi(2) / conductance;
            outer = inner;
        }
        power
    }

    /// Energy of its field [J].
    pub fn stored(&self, x: &[f64]) -> f64 {
        let (path, flux) = (self.path(), self.flux(x));
        if self.shells.is_none() && self.moving.is_none() {
            return path.energy(flux);
        }
        let whole = path.area();
        let areas = self.shells.as_ref().map(|shells| shells.areas.as_slice());
        let areas = areas.unwrap_or(std::slice::from_ref(&whole));
        let mut energy = 0.5 * self.air(x).0 * flux * flux;
        for (k, area) in areas.iter().enumerate() {
            let density = path.iron_energy_density(self.of_shell(k, x) / area);
            energy += area * path.iron() * density;
        }
        energy
    }

    /// What a zero start at a `flux` [Wb] that has long been there adds to q of the shells' rows.
    pub fn initial_charge(&self, flux: f64, q: &mut dyn FnMut(Unknown, f64)) {
        let Some(shells) = &self.shells else {
            return;
        };
        let area: f64 = shells.areas.iter().sum();
        for (k, &row) in self.inner.iter().enumerate() {
            q(row, shells.sheets[k] * flux * shells.within(k) / area);
        }
    }

    /// Mean flux density [T].
    pub fn flux_density(&self, x: &[f64]) -> f64 {
        self.path().flux_density(self.flux(x))
    }

    /// Field strength at the surface of the material [A/m].
    pub fn field_strength(&self, x: &[f64]) -> f64 {
        match &self.shells {
            None => self.path().field_strength(self.flux(x)),
            Some(shells) => {
                let b = self.of_shell(0, x) / shells.areas[0];
                self.path().iron_field(b).0
            }
        }
    }
}

#[cfg(test)]
mod tests;
