//! A sizing as the JSON object that the README fixes; SI units throughout.

use super::words::why;
use crate::report::json::{Object, number, table};
use crate::report::run::json::cautions;
use crate::sizing::{CAUTIONS, Candidate, Choice, Comparison, Reached, Study};
use crate::studies::Spread;
use serde_json::Value;

/// The object of `size`. `command` is the command line that gives it again.
pub fn size(comparison: &Comparison, command: &str) -> Value {
    let word = |k: usize| Value::from(comparison.candidates[k].suppressor.word);
    let candidates = (0..comparison.candidates.len()).map(|k| candidate(comparison, k));
    let facts = &comparison.facts;
    let circuit = Object::new()
        .text("coil", Some(&facts.coil))
        .text("switch", Some(&facts.switch))
        .number("current", facts.nominal.current.abs())
        .number("current_at_worst", facts.current_high)
        .number("supply", facts.nominal.open_voltage.abs())
        .number("supply_at_worst", facts.open_voltage_high)
        .number("inductance", facts.inductance)
        .number("stored_energy", facts.nominal.energy)
        .optional(
            "allowed_voltage",
            facts.allowed_voltage.as_ref().map(|allowed| allowed.0),
        );
    Object::new()
        .text("title", Some(&comparison.title))
        .value("circuit", circuit)
        .list("candidates", candidates)
        .value(
            "recommended",
            comparison.recommended.map_or(Value::Null, word),
        )
        .list("front", comparison.front.iter().map(|&k| word(k)))
        .text("command", Some(command))
        .value("simulations", comparison.runs)
        .value("cautions", cautions(&comparison.cautions))
        .list("always", CAUTIONS.iter().copied())
        .into()
}

fn candidate(comparison: &Comparison, k: usize) -> Object {
    let candidate = &comparison.candidates[k];
    let standing = &comparison.standings[k];
    let nominal = candidate.study.as_ref().map(Study::nominal);
    let set_by = candidate.set_by.as_ref().map_or(Value::Null, |set_by| {
        Object::new()
            .text("part", Some(&set_by.part))
            .text("rating", Some(&set_by.rating))
            .text("sentence", Some(&set_by.sentence))
            .into()
    });
    Object::new()
        .text("suppressor", Some(candidate.suppressor.word))
        .text(
            "place",
            Some(candidate.suppressor.place).filter(|place| !place.is_empty()),
        )
        .value("parts", parts(candidate))
        .optional("peak_voltage", nominal.map(|reached| reached.peak_voltage))
        .optional("release_time", nominal.and_then(|reached| reached.release))
        .optional(
            "energy_per_operation",
            nominal.map(|reached| reached.energy),
        )
        .value("worst", worst(candidate))
        .value("stress", stress(candidate))
        .value("limits", limits(candidate))
        .value("set_by", set_by)
        .value("holds", standing.holds)
        .text("why", Some(&why(comparison, k)))
}

fn parts(candidate: &Candidate) -> Value {
    table(candidate.fitted.iter().map(|fitted| {
        let (key, choice) = fitted.filling.choice();
        let value = match choice {
            Choice::Part(name) => Value::from(name),
            Choice::Value(value) => number(value),
        };
        (format!("elements.{}.{key}", fitted.element), value)
    }))
}

/// The worst of the three figures over all corners.
fn worst(candidate: &Candidate) -> Value {
    let Some(study) = &candidate.study else {
        return Value::Null;
    };
    let highest = |figure: fn(&Reached) -> f64| {
        study
            .reached
            .iter()
            .map(figure)
            .fold(f64::NEG_INFINITY, f64::max)
    };
    Object::new()
        .number("peak_voltage", highest(|reached| reached.peak_voltage))
        .number(
            "release_time",
            highest(|reached| reached.release.unwrap_or(f64::INFINITY)),
        )
        .number("energy_per_operation", highest(|reached| reached.energy))
        .into()
}

/// The highest stress of all corners on every rating that is evaluated.
fn stress(candidate: &Candidate) -> Value {
    let Some(study) = &candidate.study else {
        return table(Vec::<(String, Value)>::new());
    };
    let nominal = &study.nominal().stresses;
    let mut by_element: Vec<(String, Vec<(String, Value)>)> = Vec::new();
    for (k, stress) in nominal.iter().enumerate() {
        let over = |figure: fn(&crate::sizing::Stress) -> Option<f64>| {
            let values = study
                .reached
                .iter()
                .map(|reached| figure(&reached.stresses[k]));
            values.reduce(|a, b| Some(a?.max(b?))).flatten()
        };
        let share = |stress: &crate::sizing::Stress| Some(stress.counts? / stress.rated);
        let object = Object::new()
            .optional("peak", over(|stress| stress.peak))
            .optional("average", over(|stress| stress.average))
            .number("rated", stress.rated)
            .optional("used", over(share))
            .optional("nominal_used", share(stress));
        let name = &candidate.elements[stress.entry];
        let row = (stress.key.to_owned(), Value::from(object));
        match by_element.last_mut() {
            Some((known, rows)) if known == name => rows.push(row),
            _ => by_element.push((name.clone(), vec![row])),
        }
    }
    table(
        by_element
            .into_iter()
            .map(|(name, rows)| (name, table(rows))),
    )
}

fn limits(candidate: &Candidate) -> Value {
    let Some(study) = &candidate.study else {
        return table(Vec::<(String, Value)>::new());
    };
    table(candidate.checks.iter().enumerate().map(|(k, check)| {
        let (nominal, worst) = (&study.nominal().verdicts[k], study.verdict(k));
        let object = Object::new()
            .optional("value", worst.value)
            .optional("nominal_value", nominal.value)
            .number("bound", worst.bound)
            .number("asked", worst.asked)
            .optional("nominal_margin", nominal.margin)
            .optional("margin", worst.margin)
            .value("corner", corner(&candidate.spreads, study, k))
            .text("corner_in_words", Some(&candidate.corners[k]))
            .value("holds", worst.holds);
        (check.name.clone(), object)
    }))
}

fn corner(spreads: &[Spread], study: &Study, check: usize) -> Value {
    let sides = study.worst.corner(check);
    table(
        spreads
            .iter()
            .zip(sides)
            .map(|(spread, side)| (spread.path.clone(), number(spread.at(*side)))),
    )
}
