//! F = (a + g)(b + g)/(a b), round (d + g)²/d²: the section grows by the gap all round. A classical rule of thumb; too
//! low by a quarter for common legs.

use super::{LegGap, Rule, Section};

/// `fringing: area_increase`.
pub const RULE: Rule = Rule {
    word: "area_increase",
    about: "the section grows by half the gap on every side",
    source: "classical rule of thumb",
    needs_section: true,
    needs_height: false,
    factor,
};

fn factor(leg: &LegGap) -> Option<f64> {
    match leg.section {
        Section::Rectangle(width, depth) => Some((1.0 + leg.gap / width) * (1.0 + leg.gap / depth)),
        Section::Round(diameter) => Some((1.0 + leg.gap / diameter).powi(2)),
        Section::Area(_) => None,
    }
}
