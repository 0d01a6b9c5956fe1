//! The keys of fringing, read from a core.

use super::{RULES, Rule, Section, WORDS};
use crate::magnetics::gaps::Leg;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;

const ABOUT: &str = "how the field around the gap is counted";

/// `fringing` of a shape given by its effective figures: none unless said, with the leg's dimensions beside it.
pub const EFFECTIVE_KEYS: &[Key] = &[
    Key::default("fringing", Takes::Word(&WORDS), "none", ABOUT),
    Key::optional(
        "leg_width",
        Takes::Quantity(LENGTH),
        "width of the leg at the gap",
    ),
    Key::optional(
        "leg_depth",
        Takes::Quantity(LENGTH),
        "depth of the leg at the gap",
    ),
    Key::optional(
        "leg_diameter",
        Takes::Quantity(LENGTH),
        "diameter of a round leg at the gap",
    ),
    Key::optional(
        "window_height",
        Takes::Quantity(LENGTH),
        "height of the window along the gapped leg",
    ),
    Key::optional(
        "leg_height",
        Takes::Quantity(LENGTH),
        "length of the leg on one side of the gap",
    ),
];

/// `fringing` of a drawn shape, whose dimensions give the leg.
pub const DRAWN_KEYS: &[Key] = &[Key::default(
    "fringing",
    Takes::Word(&WORDS),
    "muehlethaler",
    ABOUT,
)];

/// A rule and the written dimensions of the leg.
#[derive(Clone, Debug)]
pub struct Spec {
    rule: &'static Rule,
    section: Written,
    window_height: Option<Value>,
    leg_height: Option<Value>,
}

#[derive(Clone, Copy, Debug)]
enum Written {
    Rectangle(Value, Value),
    Round(Value),
    Unsaid,
}

impl Spec {
    /// Reads [`EFFECTIVE_KEYS`]; what the rule needs and nobody wrote is reported.
    pub fn read(fields: &Fields<'_>) -> Option<Spec> {
        let rule = rule(fields)?;
        let section = section(fields)?;
        if rule.needs_section && matches!(section, Written::Unsaid) {
            needed(
                fields,
                rule,
                "the leg's section",
                "`leg_width` and `leg_depth`, or `leg_diameter`",
            );
            return None;
        }
        let window_height = fields.positive("window_height");
        let leg_height = fields.positive("leg_height");
        if rule.needs_height && !fields.has("window_height") && !fields.has("leg_height") {
            needed(fields, rule, "a height", "`window_height` or `leg_height`");
            return None;
        }
        Some(Spec {
            rule,
            section,
            window_height,
            leg_height,
        })
    }

    /// The rule named.
    pub fn rule(&self) -> &'static Rule {
        self.rule
    }

    /// The leg of `area` [m²] that the gaps stand in.
    pub fn leg(&self, values: &Values, area: f64) -> Leg {
        let section = match self.section {
            Written::Rectangle(width, depth) => Section::Rectangle(values[width], values[depth]),
            Written::Round(diameter) => Section::Round(values[diameter]),
            Written::Unsaid => Section::Area(area),
        };
        let height = |value: Option<Value>| value.map(|value| values[value]);
        Leg {
            place: "gap",
            section,
            area,
            window_height: height(self.window_height),
            leg_height: height(self.leg_height),
        }
    }
}

/// The rule that `fringing` names.
pub fn rule(fields: &Fields<'_>) -> Option<&'static Rule> {
    let word = fields.word("fringing")?;
    RULES.iter().find(|rule| rule.word == word)
}

fn section(fields: &Fields<'_>) -> Option<Written> {
    let round = fields.has("leg_diameter");
    let (width, depth) = (fields.has("leg_width"), fields.has("leg_depth"));
    if round && (width || depth) {
        let headline = "a leg is either round (`leg_diameter`) or has `leg_width` and `leg_depth`";
        fields.error(
            "leg_diameter",
            "conflicting-keys",
            headline,
            "both are written",
            None,
        );
        return None;
    }
    if round {
        return Some(Written::Round(fields.positive("leg_diameter")?));
    }
    match (width, depth) {
        (true, true) => Some(Written::Rectangle(
            fields.positive("leg_width")?,
            fields.positive("leg_depth")?,
        )),
        (true, false) => {
            fields.missing("leg_depth");
            None
        }
        (false, true) => {
            fields.missing("leg_width");
            None
        }
        (false, false) => Some(Written::Unsaid),
    }
}

fn needed(fields: &Fields<'_>, rule: &Rule, what: &str, keys: &str) {
    let headline = format!("fringing by {} needs {what}", rule.word);
    let help = format!("write {keys} in {}", fields.path());
    fields.error(
        "fringing",
        "missing-key",
        headline,
        format!("{keys} missing"),
        Some(&help),
    );
}
