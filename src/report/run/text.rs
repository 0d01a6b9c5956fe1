//! A run on the terminal: the answer first, then tables; digits no finer than they are worth.

use crate::analysis::Found;
use crate::report::coil;
use crate::report::engineering::{duration, engineering, engineering_or_dash, margin, percent};
use crate::report::tables::{Align, Cell, Screen, Table, Tone};
use crate::run::{LimitResult, Outcome};
use std::fmt::Write as _;

/// Digits of a reading: what an accuracy of 1e-4 is worth.
const DIGITS: usize = 4;

/// The whole text of `run`.
pub fn run(outcome: &Outcome, screen: Screen) -> String {
    let mut text = String::new();
    if outcome.interrupted() {
        let _ = writeln!(
            text,
            "Interrupted after {} of {}: what follows is over what was simulated.",
            duration(outcome.reached),
            duration(outcome.duration)
        );
    }
    let _ = writeln!(text, "{}", answer(outcome));
    if let Some(found) = &outcome.steady {
        let _ = writeln!(text, "{}", periodic(found));
    }
    section(&mut text, "Limits", &limits(outcome), screen);
    section(&mut text, "Readings", &readings(outcome), screen);
    section(&mut text, "Sensitivities", &sensitivities(outcome), screen);
    section(&mut text, "Ratings used", &ratings(outcome), screen);
    section(&mut text, "Where the energy went", &ledger(outcome), screen);
    if !outcome.accounts.is_empty() {
        let _ = writeln!(
            text,
            "The ledger closes to {}.",
            percent(outcome.ledger.imbalance)
        );
    }
    section(
        &mut text,
        "Estimated core loss, beside the ledger (improved generalised Steinmetz)",
        &core_losses(outcome),
        screen,
    );
    section(
        &mut text,
        "Coils",
        &coil::text::coils(&outcome.coils),
        screen,
    );
    let _ = writeln!(text, "\n{CAUTION}");
    text
}

/// The periodic state in a line.
fn periodic(found: &Found) -> String {
    let period = duration(found.period);
    let slowest = found.multiplier.map_or(String::new(), |multiplier| {
        format!("; a deviation is multiplied by {multiplier:.4} per period")
    });
    format!(
        "Periodic state of {period}, found after {} periods{slowest}.",
        found.periods
    )
}

/// The caution under every result.
pub const CAUTION: &str = "Figures are predictions: confirm them on the bench with rated probes. Interrupted coils make voltages that \
injure;\nenergy remains after switch-off. `ground` is not protective earth. Mains and safety circuits follow the local code\nand a \
licensed practitioner.";

fn section(text: &mut String, heading: &str, table: &Table, screen: Screen) {
    if !table.is_empty() {
        let _ = write!(text, "\n{heading}\n{}", table.render(screen));
    }
}

/// The answer in a line: what, against which limit, margin, holds or not.
pub fn answer(outcome: &Outcome) -> String {
    let worst = outcome
        .limits
        .iter()
        .min_by(|a, b| slack(a).total_cmp(&slack(b)));
    let over = outcome
        .ratings
        .iter()
        .filter(|rating| !rating.used.holds())
        .max_by(|a, b| {
            a.used
                .used
                .partial_cmp(&b.used.used)
                .unwrap_or(std::cmp::Ordering::Equal)
        });
    let name = if outcome.title.is_empty() {
        String::new()
    } else {
        format!("{}: ", outcome.title)
    };
    if let (Some(rating), true) = (over, worst.is_none_or(|limit| limit.verdict.holds)) {
        return format!(
            "{name}{} of {} reaches {} against a rating of {}: it DOES NOT HOLD ({} of the rating).",
            rating.rating,
            rating.element,
            engineering_or_dash(rating.used.peak, rating.kind.symbol, DIGITS),
            engineering(rating.used.rated, rating.kind.symbol, DIGITS),
            rating.used.used.map_or("—".into(), percent),
        );
    }
    match worst {
        Some(limit) => {
            let bound = engineering(limit.verdict.bound, limit.kind.symbol, DIGITS);
            let value = engineering_or_dash(limit.verdict.value, limit.kind.symbol, DIGITS);
            let side = if limit.at_most { "at most" } else { "at least" };
            let verdict = if limit.verdict.holds {
                "holds"
            } else {
                "DOES NOT HOLD"
            };
            let others = outcome.limits.len() - 1;
            let rest = match (limit.verdict.holds, others) {
                (_, 0) => String::new(),
                (true, _) => format!("; all {} limits hold", others + 1),
                (false, _) => {
                    let failing = outcome
                        .limits
                        .iter()
                        .filter(|limit| !limit.verdict.holds)
                        .count();
                    format!("; {failing} of {} limits fail", others + 1)
                }
            };
            format!(
                "{name}{} is {value} against {side} {bound}: margin {} (asked {}), {verdict}{rest}.",
                limit.name,
                margin(limit.verdict.margin),
                percent(limit.verdict.asked),
            )
        }
        None => match outcome.readings.first() {
            Some(reading) => format!(
                "{name}{} is {}; the netlist sets no limit.",
                reading.name,
                engineering_or_dash(reading.value, reading.kind.symbol, DIGITS)
            ),
            None => format!("{name}done; the netlist asks for no reading."),
        },
    }
}

/// Margin beyond what is asked; nothing is worse than no value.
fn slack(limit: &LimitResult) -> f64 {
    limit
        .verdict
        .margin
        .map_or(f64::NEG_INFINITY, |margin| margin - limit.verdict.asked)
}

fn verdict(holds: bool) -> Cell {
    if holds {
        Cell::toned("holds", Tone::Good)
    } else {
        Cell::toned("FAILS", Tone::Bad)
    }
}

fn limits(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("limit", Align::Left)
        .column("value", Align::Right)
        .column("bound", Align::Right)
        .column("margin", Align::Right)
        .column("asked", Align::Right)
        .column("", Align::Left);
    for limit in &outcome.limits {
        let sign = if limit.at_most { "≤" } else { "≥" };
        table.row([
            Cell::from(limit.name.as_str()),
            engineering_or_dash(limit.verdict.value, limit.kind.symbol, DIGITS).into(),
            format!(
                "{sign} {}",
                engineering(limit.verdict.bound, limit.kind.symbol, DIGITS)
            )
            .into(),
            margin(limit.verdict.margin).into(),
            percent(limit.verdict.asked).into(),
            verdict(limit.verdict.holds),
        ]);
    }
    table
}

fn readings(outcome: &Outcome) -> Table {
    if outcome
        .readings
        .iter()
        .any(|reading| reading.error.is_some())
    {
        return verified(outcome);
    }
    let mut table = Table::new()
        .column("reading", Align::Left)
        .column("value", Align::Right)
        .column("at", Align::Right)
        .column("", Align::Left);
    for reading in &outcome.readings {
        table.row([
            reading.name.clone(),
            engineering_or_dash(reading.value, reading.kind.symbol, DIGITS),
            reading
                .time
                .map_or(String::new(), |time| engineering(time, "s", 5)),
            reading.remark.unwrap_or("").to_owned(),
        ]);
    }
    table
}

/// Digits that are printed of a verified reading at most.
const MOST_DIGITS: usize = 9;

/// Readings with their numerical errors: every digit that stands, and the error in the reading's unit.
fn verified(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("reading", Align::Left)
        .column("value", Align::Right)
        .column("error", Align::Right)
        .column("digits", Align::Right)
        .column("at", Align::Right)
        .column("error", Align::Right)
        .column("", Align::Left);
    for reading in &outcome.readings {
        let digits = reading
            .value
            .zip(reading.error)
            .map(|(value, error)| digits_that_stand(value, error));
        let shown = |digits: Option<usize>| digits.unwrap_or(DIGITS).clamp(2, MOST_DIGITS);
        let at = reading
            .time
            .zip(reading.time_error)
            .map(|(time, error)| digits_that_stand(time, error));
        let or_nothing = |value: Option<f64>, symbol: &str, digits: usize| {
            value.map_or(String::new(), |value| engineering(value, symbol, digits))
        };
        table.row([
            reading.name.clone(),
            engineering_or_dash(reading.value, reading.kind.symbol, shown(digits)),
            engineering_or_dash(reading.error, reading.kind.symbol, 2),
            digits.map_or("—".into(), |digits| digits.to_string()),
            or_nothing(reading.time, "s", shown(at)),
            or_nothing(reading.time_error, "s", 2),
            reading.remark.unwrap_or("").to_owned(),
        ]);
    }
    table
}

/// How readings move with values: the derivative, and what a step of the value changes.
fn sensitivities(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("reading", Align::Left)
        .column("value moved", Align::Left)
        .column("derivative", Align::Right)
        .column("step", Align::Right)
        .column("changes it by", Align::Right)
        .column("", Align::Left);
    for reading in &outcome.readings {
        let own = outcome.sensitivities.iter();
        for sensitivity in own.filter(|sensitivity| sensitivity.reading == reading.name) {
            let (change, step) = sensitivity.step();
            let unit = sensitivity.unit();
            table.row([
                reading.name.clone(),
                sensitivity.path.clone(),
                engineering_or_dash(sensitivity.value, unit.as_str(), DIGITS),
                step.to_owned(),
                engineering_or_dash(change, sensitivity.kind.symbol, DIGITS),
                sensitivity.remark.unwrap_or("").to_owned(),
            ]);
        }
    }
    table
}

/// How many significant digits of a value stand: the last one is off by no more than half a unit. At most 15, what a
/// number holds.
pub fn digits_that_stand(value: f64, error: f64) -> usize {
    if value == 0.0 || !(value.is_finite() && error.is_finite()) {
        return 0;
    }
    let first = value.abs().log10().floor();
    let last = (2.0 * error).log10().ceil();
    (first - last + 1.0).clamp(0.0, 15.0) as usize
}

fn ratings(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("rating", Align::Left)
        .column("stress", Align::Right)
        .column("rated", Align::Right)
        .column("used", Align::Right)
        .column("at", Align::Right)
        .column("", Align::Left);
    for rating in &outcome.ratings {
        let last = if rating.used.not_evaluated_yet {
            Cell::from("not evaluated")
        } else {
            verdict(rating.used.holds())
        };
        table.row([
            Cell::from(format!("{}.{}", rating.element, rating.rating)),
            engineering_or_dash(rating.used.peak, rating.kind.symbol, DIGITS).into(),
            engineering(rating.used.rated, rating.kind.symbol, DIGITS).into(),
            rating.used.used.map_or("—".into(), percent).into(),
            rating
                .used
                .time
                .map_or(String::new(), |time| engineering(time, "s", 5))
                .into(),
            last,
        ]);
    }
    table
}

fn ledger(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("element", Align::Left)
        .column("absorbed", Align::Right)
        .column("dissipated", Align::Right)
        .column("stored", Align::Right);
    let joules = |value: f64| engineering(value, "J", DIGITS);
    for (name, account) in &outcome.accounts {
        let (dissipated, stored) = if account.is_source {
            (
                if account.dissipated == 0.0 {
                    "—".into()
                } else {
                    joules(account.dissipated)
                },
                "—".into(),
            )
        } else {
            (joules(account.dissipated), joules(account.stored))
        };
        table.row([name.clone(), joules(account.absorbed), dissipated, stored]);
    }
    table
}

fn core_losses(outcome: &Outcome) -> Table {
    let mut table = Table::new()
        .column("core of", Align::Left)
        .column("energy", Align::Right)
        .column("mean power", Align::Right);
    for core in &outcome.core_losses {
        table.row([
            core.name.clone(),
            engineering(core.energy, "J", DIGITS),
            engineering(core.mean_power, "W", DIGITS),
        ]);
    }
    table
}

#[cfg(test)]
mod tests {
    use super::digits_that_stand;

    #[test]
    fn the_last_digit_that_stands_is_off_by_half_a_unit_at_most() {
        for (value, error, digits) in [
            (1.2345, 4e-4, 4),
            (1.2345, 5.1e-4, 3),
            (-9.99, 0.004, 3),
            (24.0, 30.0, 0),
            (24.0, 1e-30, 15),
            (24.0, 0.0, 15),
            (0.0, 1e-9, 0),
            (3e-9, 1e-12, 3),
            (1.0, f64::NAN, 0),
        ] {
            assert_eq!(digits_that_stand(value, error), digits, "{value} {error}");
        }
    }
}
