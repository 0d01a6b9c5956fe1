//! Fringing: how much the field around a gap adds to its permeance. Published rules by name.
//!
//! The factor F is the gap's permeance over mu0 times the leg's section over the gap; the gap counts as gap/F. None of
//! the rules models the window, so none is better than about 10 % (checked against field solutions of round legs).

mod area_increase;
mod mclyman;
mod muehlethaler;
mod none;
pub mod spec;

/// The rules, in the order in which they are listed.
pub const RULES: &[Rule] = &[
    none::RULE,
    mclyman::RULE,
    area_increase::RULE,
    muehlethaler::RULE,
];

/// How near any of the rules comes, as a share: none knows the window.
pub const BAND: f64 = 0.1;

/// The rules' words.
pub const WORDS: [&str; RULES.len()] = {
    let mut words = [""; RULES.len()];
    let mut k = 0;
    while k < words.len() {
        words[k] = RULES[k].word;
        k += 1;
    }
    words
};

/// Section of the leg at the gap [m].
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Section {
    /// Width and depth.
    Rectangle(f64, f64),
    /// Diameter.
    Round(f64),
    /// Only its area [m²] is known.
    Area(f64),
}

/// A gap in a leg, as the rules see it [m].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LegGap {
    /// Length of the gap, above 0.
    pub gap: f64,
    /// The leg's section.
    pub section: Section,
    /// Height of the window, along the leg, gap included.
    pub window_height: Option<f64>,
    /// Length of the leg on one side of the gap.
    pub leg_height: Option<f64>,
}

/// A published rule.
pub struct Rule {
    /// The word as written.
    pub word: &'static str,
    /// What it does, in a phrase.
    pub about: &'static str,
    /// Where it comes from.
    pub source: &'static str,
    /// Whether it needs the leg's width and depth or diameter.
    pub needs_section: bool,
    /// Whether it needs the height of the window or of the leg.
    pub needs_height: bool,
    /// The factor, 1 or more; None beyond the range in which the formula means anything.
    pub factor: fn(&LegGap) -> Option<f64>,
}

/// A rule's result.
#[derive(Clone, Debug, PartialEq)]
pub struct Fringing {
    /// The rule's word.
    pub rule: &'static str,
    /// The factor, 1 or more.
    pub factor: f64,
    /// Where the rule comes from.
    pub source: &'static str,
    /// False where the formula means nothing at this gap and the factor is 1 for want of a better.
    pub within: bool,
    /// A caution where the gap is long for any rule.
    pub remark: Option<super::Remark>,
}

impl Section {
    /// Area [m²].
    pub fn area(self) -> f64 {
        match self {
            Section::Rectangle(width, depth) => width * depth,
            Section::Round(diameter) => std::f64::consts::FRAC_PI_4 * diameter * diameter,
            Section::Area(area) => area,
        }
    }

    /// The smallest extent across the leg [m].
    pub fn narrowest(self) -> f64 {
        match self {
            Section::Rectangle(width, depth) => width.min(depth),
            Section::Round(diameter) => diameter,
            Section::Area(area) => area.sqrt(),
        }
    }
}

impl LegGap {
    /// Height of the window, or what a centred gap makes of the leg's.
    pub fn window(&self) -> Option<f64> {
        self.window_height
            .or(self.leg_height.map(|height| 2.0 * height))
    }

    /// Height of the leg beside the gap, or half of the window for a centred gap.
    pub fn leg(&self) -> Option<f64> {
        self.leg_height
            .or(self.window_height.map(|height| 0.5 * height))
    }
}

impl std::fmt::Debug for Rule {
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        out.write_str(self.word)
    }
}

impl Rule {
    /// Applies the rule. Beyond its range the factor is 1 and the remark says so.
    pub fn apply(&self, leg: &LegGap) -> Fringing {
        let found = (self.factor)(leg).filter(|factor| factor.is_finite() && *factor >= 1.0);
        Fringing {
            rule: self.word,
            factor: found.unwrap_or(1.0),
            source: self.source,
            within: found.is_some(),
            remark: self.remark(leg, found),
        }
    }

    fn remark(&self, leg: &LegGap, found: Option<f64>) -> Option<super::Remark> {
        let share = leg.gap / leg.section.narrowest();
        if self.word == none::RULE.word {
            return None;
        }
        if found.is_none() {
            let text = format!(
                "fringing by {} means nothing at this gap; counted as none",
                self.word
            );
            return Some(super::Remark::new("fringing-range", text));
        }
        // Common practice: fringing formulas are for gaps that are small against the leg.
        (share > 0.25).then(|| {
            let text = format!(
                "the gap is {:.0} % of the leg's narrowest side; fringing by {} is made for small gaps",
                100.0 * share,
                self.word
            );
            super::Remark::new("fringing-range", text)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_rule_goes_to_one_with_the_gap_and_grows_with_it() {
        for rule in RULES {
            let at = |gap: f64| {
                let section = Section::Rectangle(0.012, 0.012);
                let leg = LegGap {
                    gap,
                    section,
                    window_height: Some(0.026),
                    leg_height: None,
                };
                rule.apply(&leg).factor
            };
            assert!((at(1e-9) - 1.0).abs() < 1e-5, "{}", rule.word);
            let mut last = 1.0;
            for k in 1..30 {
                let factor = at(1e-4 * f64::from(k));
                assert!(factor >= last, "{} at {k}", rule.word);
                last = factor;
            }
        }
    }

    #[test]
    fn a_gap_beyond_all_sense_counts_as_none_and_says_so() {
        let section = Section::Round(0.005);
        let leg = LegGap {
            gap: 0.2,
            section,
            window_height: Some(0.02),
            leg_height: None,
        };
        for rule in RULES {
            let fringing = rule.apply(&leg);
            assert!(fringing.factor >= 1.0);
            assert_eq!(
                fringing.remark.is_some(),
                rule.word != "none",
                "{}",
                rule.word
            );
        }
    }
}
