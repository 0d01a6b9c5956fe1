//! Eddy currents in iron: its section in nested shells, each with a flux density of its own, and the sheets of
//! current between them.
//!
//! ```text
//!  surface ─┬─ sheet 0 ─┬─ sheet 1 ─┬─ ... the field H falls from shell to shell by the current of the sheet
//!        shell 0     shell 1     shell 2     between them: l (H0 - H1) = G0 d(flux within sheet 0)/dt
//! ```
//!
//! A ladder for the diffusion of the field, dH/dt ∝ curl curl H, that every material law can stand in. For a straight
//! material it meets the exact flux over surface field, tanh(z)/z of a sheet (z = thickness/2 · √(s mu/rho)) and
//! 2 I1(z)/(z I0(z)) of a round bar (z = radius · √(s mu/rho)), within 0.3 % from rest to a hundred times the corner
//! frequency, that of the slowest mode: rho pi²/(mu thickness²) and rho 2.405²/(mu radius²). Both are classic (Stoll,
//! *The Analysis of Eddy Currents*, 1974, from memory); the shells' shares are a least-largest-error fit of ours to them,
//! begun from a grid that grows inward. Every element is positive, so the ladder only ever loses energy. A front that
//! saturates the iron on its way inward is followed within a twentieth of the flux.

use std::f64::consts::PI;

/// Number of shells.
pub const SHELLS: usize = 5;

/// Shares of the area of a sheet's shells, from the surface inward.
const SHEET_AREAS: [f64; SHELLS] = [0.01613, 0.07658, 0.13986, 0.24377, 0.52366];
/// Sheets of current: conductance in units of length/(2 depth), the flux per unit of the section.
const SHEET_CURRENTS: [f64; SHELLS - 1] = [0.04724, 0.10616, 0.18316, 0.33489];
/// The same of a round bar.
const ROUND_AREAS: [f64; SHELLS] = [0.02335, 0.10670, 0.18621, 0.29619, 0.38755];
const ROUND_CURRENTS: [f64; SHELLS - 1] = [0.01732, 0.04180, 0.08744, 0.23545];

/// How the section of the iron is divided.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Section {
    /// One round bar of the whole area.
    Round,
    /// Sheets insulated from each other, of this thickness [m].
    Sheets(f64),
}

/// The shells of a path. SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shells {
    /// Area of each shell [m²], the outermost first; together the path's area.
    pub areas: [f64; SHELLS],
    /// Between each shell and the next: the current [A] around what lies within, along the whole path, per volt of
    /// -d(flux within)/dt [S].
    pub sheets: [f64; SHELLS - 1],
}

impl Shells {
    /// Shells of `length` [m] of iron with an `area` [m²] and a `resistivity` [Ω m].
    pub fn new(section: Section, length: f64, area: f64, resistivity: f64) -> Self {
        let (areas, sheets, depth) = match section {
            Section::Round => (ROUND_AREAS, ROUND_CURRENTS, (area / PI).sqrt()),
            Section::Sheets(thickness) => (SHEET_AREAS, SHEET_CURRENTS, 0.5 * thickness),
        };
        let whole = length * depth * depth / (resistivity * area);
        Shells {
            areas: areas.map(|share| share * area),
            sheets: sheets.map(|share| share * whole),
        }
    }

    /// Area [m²] within sheet `k`.
    pub fn within(&self, k: usize) -> f64 {
        self.areas[k + 1..].iter().sum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_shares_make_up_the_whole() {
        for section in [Section::Round, Section::Sheets(0.5e-3)] {
            let shells = Shells::new(section, 0.1, 2e-5, 1e-7);
            assert!((shells.areas.iter().sum::<f64>() / 2e-5 - 1.0).abs() < 1e-12);
            assert!(shells.areas.iter().chain(&shells.sheets).all(|&x| x > 0.0));
            assert!((shells.within(0) + shells.areas[0] - 2e-5).abs() < 1e-17);
        }
    }
}
