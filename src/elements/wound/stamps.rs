//! Shares of the windings and of the legs in the equations.

use super::WoundLegs;
use crate::elements::leg::Leg;
use crate::elements::stamper::Stamper;

impl WoundLegs {
    pub(super) fn stamp_winding(&self, k: usize, x: &[f64], into: &mut Stamper<'_>) {
        let (row, turns) = (self.currents[k], self.turns(k));
        let current = row.of(x);
        into.f(row, self.resistances[k] * current);
        into.df(row, row, self.resistances[k]);
        let slopes = std::iter::once((row, 1.0));
        self.skins[k].stamp(x, current, slopes, row, into);
        if self.windings[k].has_ends {
            let (a, b) = (&self.ports[2 * k], &self.ports[2 * k + 1]);
            into.f(row, b.node.of(x) - a.node.of(x));
            into.df(row, a.node, -1.0);
            into.df(row, b.node, 1.0);
            into.f(a.row(), current);
            into.df(a.row(), row, 1.0);
            into.f(b.row(), -current);
            into.df(b.row(), row, -1.0);
        }
        let leg = &self.legs[self.windings[k].leg];
        into.q(row, turns * leg.flux(x));
        for &(flux, factor) in leg.terms() {
            into.dq(row, flux, turns * factor);
        }
        if self.leakage.is_there() {
            for (j, &other) in self.currents.iter().enumerate() {
                into.q(row, self.matrix[(k, j)] * other.of(x));
                into.dq(row, other, self.matrix[(k, j)]);
            }
        }
        if let Some(linkage) = self.linkages[k] {
            into.f(linkage, linkage.of(x) - self.linkage(k, x));
            into.df(linkage, linkage, 1.0);
            for &(flux, factor) in leg.terms() {
                into.df(linkage, flux, -turns * factor);
            }
            for (j, &other) in self.currents.iter().enumerate() {
                into.df(linkage, other, -self.matrix[(k, j)]);
            }
        }
    }

    /// A leg's share of the rows of its loops, and its shells.
    pub(super) fn stamp_leg(&self, leg: usize, law: &Leg, x: &[f64], into: &mut Stamper<'_>) {
        let force = law.force(x);
        for &(row, sign) in law.terms() {
            into.f(row, sign * force.value);
            for &(flux, factor) in law.terms() {
                into.df(row, flux, sign * factor * force.by_flux);
            }
            for &(other, slope) in force.others() {
                into.df(row, other, sign * slope);
            }
            for (k, winding) in self.windings.iter().enumerate() {
                if winding.leg == leg {
                    let turns = sign * self.turns(k);
                    into.f(row, -turns * self.currents[k].of(x));
                    into.df(row, self.currents[k], -turns);
                }
            }
        }
        law.stamp(x, into);
    }
}
