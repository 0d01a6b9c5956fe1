//! The `limits:` of a netlist.

use super::{RatingUse, Sense, Verdict};
use crate::diag::{Diagnostic, Span};
use crate::netlist::{Fields, Key, Named, Takes, Value, Values, nearest};
use crate::readings::{self, Outcome, Reading};
use crate::signals::{RatingKind, Ratings};
use crate::units::{self, Kind};

/// The netlist's key for limits.
pub const KEY: Key = Key::optional(
    "limits",
    Takes::Other("a mapping from names to limits"),
    "bounds that readings and ratings must keep",
);

const BOUND: Takes = Takes::Other("a quantity of the reading's kind");

/// The keys of one limit.
pub const KEYS: &[Key] = &[
    Key::optional(
        "reading",
        Takes::Name("a reading"),
        "the reading that is judged",
    ),
    Key::optional("at_most", BOUND, "what it may reach"),
    Key::optional("at_least", BOUND, "what it must reach"),
    Key::optional(
        "rating",
        Takes::Other("`ELEMENT.RATING`"),
        "the rating that is judged, instead of a reading and a bound",
    ),
    Key::default(
        "margin",
        Takes::Quantity(units::RATIO),
        "0 %",
        "the distance to keep, as a share of the bound",
    ),
];

/// A limit as written.
#[derive(Clone, Debug)]
pub struct Limit {
    /// Its name.
    pub name: Named,
    /// What it judges.
    pub on: On,
    /// The margin asked for.
    pub margin: Value,
}

/// What a limit judges.
#[derive(Clone, Debug)]
pub enum On {
    /// A reading against a bound.
    Reading {
        /// Place among the netlist's readings.
        index: usize,
        /// The reading's name.
        name: String,
        /// On which side of the bound.
        sense: Sense,
        /// The bound.
        bound: Value,
        /// What the bound measures.
        kind: Kind,
    },
    /// An element's stress against its rating.
    Rating {
        /// The element; a contact of a relay as `k1.main`.
        element: String,
        /// Which rating.
        rating: &'static RatingKind,
    },
}

impl Limit {
    /// Judges a reading's outcome; None for a limit on a rating. An outcome of another kind than the bound's (a
    /// current where a time was asked for, at an operating point) counts as no value.
    pub fn judge_reading(&self, outcome: &Outcome, values: &Values) -> Option<Verdict> {
        let On::Reading {
            sense, bound, kind, ..
        } = self.on
        else {
            return None;
        };
        let value = outcome
            .taken
            .filter(|_| outcome.kind.dimension == kind.dimension);
        Some(Verdict::of(
            value.map(|taken| taken.value),
            values[bound],
            sense,
            values[self.margin],
        ))
    }

    /// Judges a rating's use; None for a limit on a reading.
    pub fn judge_rating(&self, used: &RatingUse, values: &Values) -> Option<Verdict> {
        matches!(self.on, On::Rating { .. })
            .then(|| Verdict::of(used.peak, used.rated, Sense::AtMost, values[self.margin]))
    }
}

/// Reads all of `limits:` of the netlist at the top, whose table must hold [`KEY`] and the readings' key. What is
/// wrong goes to the sink; what is right is returned, in the order of the file.
pub fn read_limits(top: &Fields<'_>, readings: &[Reading], ratings: &[Ratings]) -> Vec<Limit> {
    let known = Known {
        top,
        readings,
        ratings,
    };
    let read = top.entries(KEY.name).into_iter().filter_map(|entry| {
        let fields = Fields::new(entry.node, entry.path.clone(), KEYS, top.reader());
        // `margin: 20` means 2000 %, which nobody does.
        let margin = fields.checked("margin", "between 0 and 10, such as `20 %`", |margin| {
            margin.low >= 0.0 && margin.high <= 10.0
        });
        let on = known.read(&fields);
        fields.finish();
        Some(Limit {
            name: entry.name,
            on: on?,
            margin: margin?,
        })
    });
    read.collect()
}

/// What a limit may refer to.
struct Known<'a> {
    top: &'a Fields<'a>,
    readings: &'a [Reading],
    ratings: &'a [Ratings],
}

impl Known<'_> {
    fn read(&self, fields: &Fields<'_>) -> Option<On> {
        match (fields.has("reading"), fields.has("rating")) {
            (true, false) => self.on_reading(fields),
            (false, true) => self.on_rating(fields),
            (true, true) => {
                let headline = "a limit takes a reading or a rating, got both";
                fields.error(
                    "rating",
                    "contradiction",
                    headline,
                    "the second one",
                    Some("make two limits of it"),
                );
                None
            }
            (false, false) => {
                let diagnostic =
                    Diagnostic::error("missing-key", "a limit needs `reading` or `rating`")
                        .at(fields.head(), "neither is there")
                        .help("for instance `{reading: kick, at_most: 60 V, margin: 20 %}`");
                fields.reader().sink.report(diagnostic);
                None
            }
        }
    }

    fn on_reading(&self, fields: &Fields<'_>) -> Option<On> {
        let named = fields.name("reading")?;
        let (key, sense) = match (fields.has("at_most"), fields.has("at_least")) {
            (true, false) => ("at_most", Sense::AtMost),
            (false, true) => ("at_least", Sense::AtLeast),
            (true, true) => {
                let headline = "a limit takes one of `at_most` and `at_least`, got both";
                fields.error(
                    "at_least",
                    "contradiction",
                    headline,
                    "the second one",
                    Some("make two limits of it"),
                );
                return None;
            }
            (false, false) => {
                let headline = format!("a limit on `{}` needs `at_most` or `at_least`", named.text);
                fields.reader().sink.report(
                    Diagnostic::error("missing-key", headline)
                        .at(fields.head(), "the bound is missing"),
                );
                return None;
            }
        };
        let Some(index) = self
            .readings
            .iter()
            .position(|reading| reading.name.text == named.text)
        else {
            self.unknown_reading(fields, &named);
            return None;
        };
        let kind = self.readings[index].result();
        let (node, path) = fields.node_and_path(key)?;
        let bound = fields.reader().value(node, &path, kind)?;
        Some(On::Reading {
            index,
            name: named.text,
            sense,
            bound,
            kind,
        })
    }

    /// A reading that is written but wrong was reported as such.
    fn unknown_reading(&self, fields: &Fields<'_>, named: &Named) {
        let written = self
            .top
            .node(readings::KEY.name)
            .map_or(&[][..], |node| node.entries());
        let names: Vec<&str> = written.iter().map(|entry| entry.key.as_str()).collect();
        if names.contains(&named.text.as_str()) {
            return;
        }
        let headline = format!("there is no reading `{}`", named.text);
        report_unknown(
            fields,
            "unknown-reading",
            headline,
            named.span,
            &named.text,
            &names,
            "readings",
        );
    }

    fn on_rating(&self, fields: &Fields<'_>) -> Option<On> {
        for key in ["at_most", "at_least"] {
            if fields.has(key) {
                let headline = format!("a limit on a rating does not use `{key}`");
                fields.error(
                    key,
                    "unused-key",
                    headline,
                    "the rating itself is the bound",
                    None,
                );
            }
        }
        let written = fields.text("rating")?;
        let found = written.text.rsplit_once('.').and_then(|(element, key)| {
            let ratings = self
                .ratings
                .iter()
                .find(|ratings| ratings.element == element)?;
            let rated = ratings.rated.iter().find(|rated| rated.rating.key == key)?;
            Some(On::Rating {
                element: element.into(),
                rating: rated.rating,
            })
        });
        if found.is_none() {
            let each = |ratings: &Ratings| -> Vec<String> {
                ratings
                    .rated
                    .iter()
                    .map(|rated| format!("{}.{}", ratings.element, rated.rating.key))
                    .collect()
            };
            let names: Vec<String> = self.ratings.iter().flat_map(each).collect();
            let names: Vec<&str> = names.iter().map(String::as_str).collect();
            let headline = format!("there is no rating `{}`", written.text);
            report_unknown(
                fields,
                "unknown-rating",
                headline,
                written.span,
                &written.text,
                &names,
                "ratings",
            );
        }
        found
    }
}

/// Reports a name that is not there with the nearest one, or with those that are.
fn report_unknown(
    fields: &Fields<'_>,
    word: &'static str,
    headline: String,
    span: Span,
    name: &str,
    known: &[&str],
    noun: &str,
) {
    let diagnostic = Diagnostic::error(word, headline);
    let diagnostic = match nearest(name, known.iter().copied()) {
        Some(near) => diagnostic.at(span, format!("did you mean `{near}`?")),
        None if known.is_empty() => diagnostic.at(span, format!("the netlist has no {noun}")),
        None => diagnostic
            .at(span, "unknown")
            .help(format!("{noun} here: {}", known.join(", "))),
    };
    fields.reader().sink.report(diagnostic);
}

#[cfg(test)]
mod tests;
