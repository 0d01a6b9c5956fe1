//! Sentences on candidates that text, JSON and pictures share.

use crate::report::engineering::{engineering, engineering_or_dash, margin, percent};
use crate::sizing::{Candidate, Comparison};

/// A candidate's parts in a few words: `general_diode_1A_400V + 220 Ω 0.5 W`.
pub fn parts(candidate: &Candidate) -> String {
    let shown: Vec<String> = candidate
        .fitted
        .iter()
        .map(|fitted| fitted.filling.shown())
        .collect();
    if shown.is_empty() {
        "—".into()
    } else {
        shown.join(" + ")
    }
}

/// What a candidate is, with its parts: `zener_18V_0W5 ... (flyback diode ...)`.
pub fn whole(candidate: &Candidate) -> String {
    if candidate.fitted.is_empty() {
        return candidate.suppressor.about.to_owned();
    }
    format!("{}, {}", parts(candidate), candidate.suppressor.about)
}

/// Number of the check with the least beyond what is asked, at its worst corner.
pub fn tightest(candidate: &Candidate) -> Option<usize> {
    let study = candidate.study.as_ref()?;
    (0..candidate.checks.len())
        .min_by(|&a, &b| study.worst.margin(a).total_cmp(&study.worst.margin(b)))
}

/// A check at its worst corner in a sentence: `driver_voltage is 63.1 V against at most 60 V with supply high, cold`.
pub fn verdict(candidate: &Candidate, check: usize) -> String {
    let Some(study) = &candidate.study else {
        return String::new();
    };
    let (known, verdict) = (&candidate.checks[check], study.verdict(check));
    let side = if known.at_most { "at most" } else { "at least" };
    let unit = known.kind.symbol;
    let value = match verdict.value {
        Some(value) => engineering(value, unit, 3),
        None => "never reached".into(),
    };
    format!(
        "{} is {value} against {side} {} ({}), margin {} (asked {})",
        known.name,
        engineering(verdict.bound, unit, 3),
        candidate.corners[check],
        margin(verdict.margin),
        percent(verdict.asked)
    )
}

/// Why a candidate is what it is: recommended, holding but not taken, or failing.
pub fn why(comparison: &Comparison, number: usize) -> String {
    let candidate = &comparison.candidates[number];
    if let Some(trouble) = &candidate.trouble {
        return format!("could not be judged: {}", trouble.text());
    }
    let Some(study) = &candidate.study else {
        return "was not simulated".into();
    };
    if !comparison.standings[number].holds && study.holds() {
        return format!(
            "nothing bounds the voltage at `{}`, so a bare switch cannot be said to hold",
            comparison.facts.switch
        );
    }
    if !study.holds() {
        return failing(candidate);
    }
    if comparison.recommended == Some(number) {
        return reason(comparison, number);
    }
    beside(comparison, number)
}

/// What does not hold, the worst first.
fn failing(candidate: &Candidate) -> String {
    let Some(study) = &candidate.study else {
        return String::new();
    };
    let mut failing: Vec<usize> = (0..candidate.checks.len())
        .filter(|&check| !study.verdict(check).holds)
        .collect();
    failing.sort_by(|&a, &b| study.worst.margin(a).total_cmp(&study.worst.margin(b)));
    match failing.split_first() {
        None => "a check fails at a corner that is not its worst".into(),
        Some((&first, [])) => verdict(candidate, first),
        Some((&first, others)) => {
            let names: Vec<&str> = others
                .iter()
                .map(|&check| candidate.checks[check].name.as_str())
                .collect();
            let nor = if others.len() == 1 {
                "nor does"
            } else {
                "nor do"
            };
            format!(
                "{}; {nor} {} hold",
                verdict(candidate, first),
                names.join(", ")
            )
        }
    }
}

/// Why the recommended one is recommended.
fn reason(comparison: &Comparison, number: usize) -> String {
    let own = &comparison.standings[number];
    let holding = comparison
        .standings
        .iter()
        .filter(|standing| standing.holds)
        .count();
    let elements = match own.parts {
        0 => "no part at all".to_owned(),
        1 => "one part".to_owned(),
        many => format!("{many} parts"),
    };
    if holding == 1 {
        return format!("the only one that holds everything, with {elements}");
    }
    let equals = comparison
        .standings
        .iter()
        .filter(|standing| standing.holds && standing.parts == own.parts)
        .count();
    let among = match (equals, comparison.quickness_counts) {
        (1, _) => String::new(),
        (_, true) => ", and the quickest of those".into(),
        (_, false) => ", and the lowest voltage of those".into(),
    };
    format!("holds everything with the fewest parts, {elements}{among}")
}

/// Why one that holds is not the recommended one.
fn beside(comparison: &Comparison, number: usize) -> String {
    let Some(best) = comparison.recommended else {
        return "holds".into();
    };
    let (own, best_standing) = (&comparison.standings[number], &comparison.standings[best]);
    let word = comparison.candidates[best].suppressor.word;
    if own.parts > best_standing.parts {
        return format!(
            "holds too, with {} parts where {word} needs {}",
            own.parts, best_standing.parts
        );
    }
    if comparison.quickness_counts && own.slowest > best_standing.slowest {
        return format!(
            "holds too, but lets go after {} at worst, {word} after {}",
            engineering(own.slowest, "s", 3),
            engineering(best_standing.slowest, "s", 3)
        );
    }
    format!(
        "holds too, but the switch sees {} at worst, with {word} {}",
        engineering(own.highest, "V", 3),
        engineering(best_standing.highest, "V", 3)
    )
}

/// The answer in two lines.
pub fn answer(comparison: &Comparison) -> String {
    let name = if comparison.title.is_empty() {
        String::new()
    } else {
        format!("{}: ", comparison.title)
    };
    let Some(number) = comparison.recommended else {
        let count = comparison.candidates.len();
        return format!(
            "{name}none of {count} suppressors holds every limit and rating with its margin.\n{}",
            nearest_miss(comparison)
        );
    };
    let candidate = &comparison.candidates[number];
    let standing = &comparison.standings[number];
    let nominal = candidate.study.as_ref();
    let nominal = nominal.and_then(|study| study.nominal().release);
    let set_by = candidate.set_by.as_ref();
    let set_by = set_by.map_or(String::new(), |set| {
        format!("; its size is set by {}", set.rating)
    });
    let first = if candidate.fitted.is_empty() {
        format!("{name}no suppressor is needed.")
    } else {
        format!("{name}{}{set_by}.", whole(candidate))
    };
    let tight = tightest(candidate).map_or(String::new(), |check| {
        format!("Least to spare: {}, holds. ", verdict(candidate, check))
    });
    format!(
        "{first}\n{tight}Release after {}, {} at worst.",
        engineering_or_dash(nominal, "s", 3),
        engineering(standing.slowest, "s", 3)
    )
}

/// The candidate that comes closest, where none holds.
fn nearest_miss(comparison: &Comparison) -> String {
    let slack = |candidate: &Candidate| {
        candidate
            .study
            .as_ref()
            .map_or(f64::NEG_INFINITY, |study| study.slack())
    };
    let nearest = comparison
        .candidates
        .iter()
        .filter(|candidate| candidate.study.is_some() && !candidate.holds())
        .max_by(|a, b| slack(a).total_cmp(&slack(b)));
    nearest.map_or(String::new(), |candidate| {
        format!(
            "Nearest comes {}: {}.",
            whole(candidate),
            failing(candidate)
        )
    })
}
