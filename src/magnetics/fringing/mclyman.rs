//! F = 1 + (g/√A) ln(2 G/g), G the window's height: W. T. McLyman, Transformer and Inductor Design Handbook (from memory).

use super::{LegGap, Rule};

/// `fringing: mclyman`.
pub const RULE: Rule = Rule {
    word: "mclyman",
    about: "1 + gap/√area · ln(2 window_height/gap)",
    source: "W. T. McLyman, Transformer and Inductor Design Handbook",
    needs_section: false,
    needs_height: true,
    factor,
};

fn factor(leg: &LegGap) -> Option<f64> {
    let window = leg.window()?;
    // A gap as high as the window leaves no leg to fringe from.
    (leg.gap < window)
        .then(|| 1.0 + leg.gap / leg.section.area().sqrt() * (2.0 * window / leg.gap).ln())
}
