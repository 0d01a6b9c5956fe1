//! A sizing on the terminal: the answer first, then one table of candidates, why the others are not taken, what was assumed.

use super::words::{answer, parts, tightest, why};
use crate::report::engineering::{engineering, engineering_or_dash, margin};
use crate::report::tables::{Align, Cell, Screen, Table, Tone};
use crate::sizing::{CAUTIONS, COARSE, Comparison, FINE};
use std::fmt::Write as _;

/// Columns of running text where the screen does not say.
const WIDTH: usize = 110;

/// The whole text of `size`. `command` is the command line that gives it again.
pub fn size(comparison: &Comparison, command: &str, screen: Screen) -> String {
    let width = screen.width.unwrap_or(WIDTH);
    let mut text = format!("{}\n", answer(comparison));
    let _ = write!(
        text,
        "\nCandidates\n{}",
        candidates(comparison).render(screen)
    );
    let _ = writeln!(text, "\nWhy");
    for (k, candidate) in comparison.candidates.iter().enumerate() {
        let mut words = format!("{}: {}.", candidate.suppressor.word, why(comparison, k));
        if let (Some(set_by), true) = (&candidate.set_by, comparison.standings[k].holds) {
            let _ = write!(words, " {}.", capital(&set_by.sentence));
        }
        text += &wrapped(&words, 2, width);
    }
    let _ = writeln!(text, "\nAssumed");
    for line in assumed(comparison) {
        text += &wrapped(&line, 2, width);
    }
    let _ = writeln!(text, "\nCautions");
    let always: Vec<String> = CAUTIONS
        .iter()
        .map(|caution| format!("{}.", capital(caution)))
        .collect();
    text += &wrapped(&always.join(" "), 2, width);
    let _ = writeln!(text, "\nAgain: {command}");
    text
}

/// A sentence with a capital at its start, unless that is a name in quotes or code.
fn capital(sentence: &str) -> String {
    let mut chars = sentence.chars();
    match chars.next() {
        // A part's name keeps its spelling.
        Some(first)
            if sentence
                .split(' ')
                .next()
                .is_some_and(|word| !word.contains('_')) =>
        {
            first.to_uppercase().chain(chars).collect()
        }
        _ => sentence.to_owned(),
    }
}

/// Words in lines of a width, the first indented by so much and the others by two more.
fn wrapped(words: &str, indent: usize, width: usize) -> String {
    let mut out = String::new();
    let mut line = " ".repeat(indent);
    let mut filled = false;
    for word in words.split(' ') {
        let long = line.chars().count() + 1 + word.chars().count() > width;
        if filled && long {
            out += &line;
            out.push('\n');
            line = " ".repeat(indent + 2);
            filled = false;
        }
        if filled {
            line.push(' ');
        }
        line += word;
        filled = true;
    }
    out += &line;
    out.push('\n');
    out
}

fn candidates(comparison: &Comparison) -> Table {
    let mut table = Table::new()
        .column("suppressor", Align::Left)
        .column("parts", Align::Left)
        .column("peak", Align::Right)
        .column("release", Align::Right)
        .column("slowest", Align::Right)
        .column("energy", Align::Right)
        .column("least to spare", Align::Left)
        .column("margin", Align::Right)
        .column("", Align::Left);
    for (k, candidate) in comparison.candidates.iter().enumerate() {
        let nominal = candidate.study.as_ref().map(|study| study.nominal());
        let tight = tightest(candidate);
        let (name, left) = match (tight, &candidate.study) {
            (Some(check), Some(study)) => (
                candidate.checks[check].name.clone(),
                margin(study.verdict(check).margin),
            ),
            _ => ("—".into(), "—".into()),
        };
        let standing = &comparison.standings[k];
        let verdict = match (standing.holds, comparison.recommended == Some(k)) {
            (true, true) => Cell::toned("recommended", Tone::Good),
            (true, false) => Cell::toned("holds", Tone::Good),
            (false, _) => Cell::toned("FAILS", Tone::Bad),
        };
        table.row([
            Cell::from(candidate.suppressor.word),
            parts(candidate).into(),
            engineering_or_dash(nominal.map(|reached| reached.peak_voltage), "V", 3).into(),
            engineering_or_dash(nominal.and_then(|reached| reached.release), "s", 3).into(),
            slowest(standing.slowest).into(),
            engineering_or_dash(nominal.map(|reached| reached.energy), "J", 3).into(),
            name.into(),
            left.into(),
            verdict,
        ]);
    }
    table
}

/// A release time that may never come.
fn slowest(seconds: f64) -> String {
    if seconds == f64::INFINITY {
        "never".into()
    } else {
        engineering(seconds, "s", 3)
    }
}

fn assumed(comparison: &Comparison) -> Vec<String> {
    let facts = &comparison.facts;
    let cycle = comparison.cycle;
    let seconds = |value: f64| engineering(value, "s", 3);
    let mut lines = vec![
        format!(
            "Closed, {} flows in {} and {} is stored; at worst {} and {}.",
            engineering(facts.nominal.current.abs(), "A", 3),
            facts.coil,
            engineering(facts.nominal.energy, "J", 3),
            engineering(facts.current_high, "A", 3),
            engineering(facts.energy_high, "J", 3)
        ),
        format!(
            "One operation is {} closed, {} open, {} closed again ({} opens from rest).",
            seconds(cycle.opens),
            seconds(cycle.off),
            seconds(cycle.on),
            facts.switch
        ),
    ];
    let spreads = comparison
        .candidates
        .iter()
        .map(|candidate| candidate.spreads.len())
        .max()
        .unwrap_or(0);
    lines.push(if spreads == 0 {
        "Nothing in the netlist has a spread: all figures are nominal.".into()
    } else {
        format!("Margins are those at the worst of the corners of up to {spreads} spreads, the candidates' own tolerances included.")
    });
    if let Some((allowed, by)) = &facts.allowed_voltage {
        lines.push(format!(
            "The switch may see {} with every margin ({by}).",
            engineering(*allowed, "V", 3)
        ));
    }
    lines.push(format!(
        "{} simulations, searched at an accuracy of {COARSE:e}, close calls and reported corners at {FINE:e}.",
        comparison.runs
    ));
    lines
}
