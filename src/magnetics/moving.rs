//! The gap between a pole and an armature, as numbers that whoever moves the armature works with.
//!
//! The reluctance at a gap x: fixed + 1/(mu0 A F(x)/(x + residual) + leakage). The leakage path bridges the moving gap:
//! its flux runs through the core, not through the armature. F is the fringing factor of a pole before a plate, which is
//! that of two poles twice as far apart.

use super::MU0;
use super::fringing::{Fringing, LegGap, RULES, Rule, Section};
use super::path::Path;

/// A gap that an armature closes. SI units.
#[derive(Clone, Debug, PartialEq)]
pub struct MovingGap {
    /// Pole face [m²].
    pub area: f64,
    /// The gap as drawn [m], without the residual gap.
    pub gap: f64,
    /// What stays between pole and armature when it is seated [m]: a shim or a stud.
    pub residual: f64,
    /// Permeance of the leakage path beside the gap [H].
    pub leakage: f64,
    /// Reluctance of the other gaps in series [1/H]: the hinge.
    pub fixed: f64,
    /// Diameter of the pole [m].
    pub pole_diameter: f64,
    /// Length of the pole behind its face [m].
    pub pole_height: f64,
    /// The fringing rule.
    pub rule: FringingRule,
}

/// A rule of [`super::fringing::RULES`] that compares by its word.
#[derive(Clone, Copy, Debug)]
pub struct FringingRule(pub &'static Rule);

impl PartialEq for FringingRule {
    fn eq(&self, other: &Self) -> bool {
        self.0.word == other.0.word
    }
}

impl MovingGap {
    /// A gap of a path's own section without fringing and leakage, beside the air that the path has.
    pub fn plain(path: &Path) -> Self {
        MovingGap {
            area: path.area(),
            gap: 0.0,
            residual: 0.0,
            leakage: 0.0,
            fixed: path.reluctance_of_air(),
            pole_diameter: 0.0,
            pole_height: 0.0,
            rule: FringingRule(
                RULES
                    .iter()
                    .find(|rule| rule.word == "none")
                    .expect("no fringing is one of the rules"),
            ),
        }
    }

    /// Fringing at a `gap` [m], residual gap included; None for no gap at all.
    pub fn fringing(&self, gap: f64) -> Option<Fringing> {
        let leg = LegGap {
            gap: 2.0 * gap,
            section: Section::Round(self.pole_diameter),
            window_height: None,
            leg_height: Some(self.pole_height),
        };
        (gap > 0.0).then(|| self.rule.0.apply(&leg))
    }

    /// Reluctance of everything that is not iron [1/H] at a `gap` [m] of zero or more, and its slope over the gap [1/(H m)].
    ///
    /// The pull at a flux Φ through the core is Φ²/2 times the slope. The slope of the fringing factor is taken by a
    /// central difference (relative error about 1e-9).
    pub fn reluctance(&self, gap: f64) -> (f64, f64) {
        let across = gap + self.residual;
        if across <= 0.0 {
            return (self.fixed, 1.0 / (MU0 * self.area));
        }
        let at = |across: f64| {
            let factor = self
                .fringing(across)
                .map_or(1.0, |fringing| fringing.factor);
            MU0 * self.area * factor / across
        };
        let permeance = at(across);
        // x P is as smooth as the factor and changes little: its slope loses fewer digits than that of P.
        let step = 1e-4 * across;
        let product = |across: f64| across * at(across);
        let slope = (product(across + step) - product(across - step)) / (2.0 * step);
        let permeance_slope = (slope - permeance) / across;
        let whole = permeance + self.leakage;
        (self.fixed + 1.0 / whole, -permeance_slope / (whole * whole))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::FRAC_PI_4;

    fn gap(word: &str, residual: f64, leakage: f64) -> MovingGap {
        MovingGap {
            area: FRAC_PI_4 * 64e-6,
            gap: 1e-3,
            residual,
            leakage,
            fixed: 2e6,
            pole_diameter: 8e-3,
            pole_height: 25e-3,
            rule: FringingRule(
                RULES
                    .iter()
                    .find(|rule| rule.word == word)
                    .expect("a rule of the list"),
            ),
        }
    }

    #[test]
    fn without_fringing_and_leakage_it_is_the_plain_gap() {
        let plain = gap("none", 0.05e-3, 0.0);
        for x in [0.0, 0.2e-3, 1e-3] {
            let (reluctance, slope) = plain.reluctance(x);
            let of_air = 1.0 / (MU0 * plain.area);
            assert!((reluctance / (2e6 + (x + 0.05e-3) * of_air) - 1.0).abs() < 1e-14);
            assert!((slope / of_air - 1.0).abs() < 1e-10);
        }
        assert_eq!(gap("none", 0.0, 1e-8).reluctance(0.0).0, 2e6);
    }

    #[test]
    fn the_slope_is_the_derivative() {
        for rule in RULES {
            let moving = gap(rule.word, 0.05e-3, 30e-9);
            for x in [0.05e-3, 0.3e-3, 1e-3, 1.5e-3] {
                let h = 1e-3 * x;
                let at = |x: f64| moving.reluctance(x).0;
                let fine = (8.0 * (at(x + h) - at(x - h)) - at(x + 2.0 * h) + at(x - 2.0 * h))
                    / (12.0 * h);
                let slope = moving.reluctance(x).1;
                assert!(
                    (slope / fine - 1.0).abs() < 1e-8,
                    "{} at {x}: {slope} {fine}",
                    rule.word
                );
            }
        }
    }
}
