//! A run as the JSON object that the README fixes; SI units throughout.

use crate::diag::Diagnostic;
use crate::report::coil;
use crate::report::json::{Object, table};
use crate::run::Outcome;
use serde_json::Value;

/// The object of `run`.
pub fn run(outcome: &Outcome) -> Value {
    let counted = outcome.work.map(|work| work.counted).unwrap_or_default();
    let analysis = Object::new()
        .text("kind", Some(outcome.analysis))
        .number("duration", outcome.duration)
        .value("accepted_steps", counted.accepted)
        .value("rejected_steps", counted.rejected)
        .value("newton_iterations", counted.newton_iterations)
        .number("reached", outcome.reached)
        .value("interrupted", outcome.interrupted());
    Object::new()
        .text("title", Some(&outcome.title))
        .value("analysis", analysis)
        .value("readings", readings(outcome))
        .value("limits", limits(outcome))
        .value("ratings", ratings(outcome))
        .value("ledger", ledger(outcome))
        .value("estimated_core_loss", core_losses(outcome))
        .value("coils", coil::json::coils(&outcome.coils))
        .value("steady_state", steady_state(outcome))
        .value("cautions", cautions(&outcome.cautions))
        .value("defaults", defaults(outcome))
        .value("sensitivities", sensitivities(outcome))
        .into()
}

/// The periodic state; null where the run does not begin in one.
fn steady_state(outcome: &Outcome) -> Value {
    let Some(found) = &outcome.steady else {
        return Value::Null;
    };
    let work = found.counted.factorizations + found.counted.solves;
    Object::new()
        .number("period", found.period)
        .number("residual", found.residual)
        .optional("multiplier", found.multiplier)
        .value("periods", found.periods)
        .value("work", work)
        .value(
            "work_of_variations",
            found.varied.factorizations + found.varied.solves,
        )
        .into()
}

fn readings(outcome: &Outcome) -> Value {
    table(outcome.readings.iter().map(|reading| {
        let object = Object::new()
            .optional("value", reading.value)
            .text("unit", Some(reading.kind.symbol))
            .optional("time", reading.time)
            .optional("error", reading.error)
            .optional("time_error", reading.time_error);
        (reading.name.clone(), object)
    }))
}

/// Derivatives by reading and path; null where none was asked for.
fn sensitivities(outcome: &Outcome) -> Value {
    if outcome.sensitivities.is_empty() {
        return Value::Null;
    }
    table(outcome.readings.iter().map(|reading| {
        let own = outcome.sensitivities.iter();
        let own = own.filter(|sensitivity| sensitivity.reading == reading.name);
        let rows = own.map(|sensitivity| {
            let object = Object::new()
                .optional("value", sensitivity.value)
                .text("unit", Some(&sensitivity.unit()))
                .text("remark", sensitivity.remark);
            (sensitivity.path.clone(), object)
        });
        (reading.name.clone(), table(rows))
    }))
}

fn limits(outcome: &Outcome) -> Value {
    table(outcome.limits.iter().map(|limit| {
        let object = Object::new()
            .optional("value", limit.verdict.value)
            .number("bound", limit.verdict.bound)
            .optional("margin", limit.verdict.margin)
            .number("asked", limit.verdict.asked)
            .value("holds", limit.verdict.holds);
        (limit.name.clone(), object)
    }))
}

fn ratings(outcome: &Outcome) -> Value {
    let mut names: Vec<&str> = outcome
        .ratings
        .iter()
        .map(|rating| rating.element.as_str())
        .collect();
    names.dedup();
    table(names.into_iter().map(|name| {
        let own = outcome
            .ratings
            .iter()
            .filter(|rating| rating.element == name)
            .map(|rating| {
                let object = Object::new()
                    .optional("peak", rating.used.peak)
                    .number("rated", rating.used.rated)
                    .optional("used", rating.used.used)
                    .optional("time", rating.used.time)
                    .optional("error", rating.error);
                (rating.rating.clone(), object)
            });
        (name, table(own))
    }))
}

fn ledger(outcome: &Outcome) -> Value {
    let elements = outcome.accounts.iter().map(|(name, account)| {
        let object = Object::new()
            .number("absorbed", account.absorbed)
            .number("dissipated", account.dissipated)
            .number("stored", account.stored);
        (name.clone(), object)
    });
    Object::new()
        .table("elements", elements)
        .number("imbalance", outcome.ledger.imbalance)
        .into()
}

/// Core losses by core, outside the ledger's balance.
fn core_losses(outcome: &Outcome) -> Value {
    table(outcome.core_losses.iter().map(|core| {
        let object = Object::new()
            .number("energy", core.energy)
            .number("mean_power", core.mean_power);
        (core.name.clone(), object)
    }))
}

/// Cautions as objects.
pub fn cautions(cautions: &[Diagnostic]) -> Value {
    cautions
        .iter()
        .map(|caution| {
            Value::from(
                Object::new()
                    .text("word", Some(caution.word))
                    .text("headline", Some(&caution.headline))
                    .text("help", Some(&caution.help.join("; "))),
            )
        })
        .collect()
}

fn defaults(outcome: &Outcome) -> Value {
    self::defaults_used(&outcome.defaults)
}

/// Defaults as objects.
pub fn defaults_used(defaults: &[crate::netlist::DefaultUsed]) -> Value {
    defaults
        .iter()
        .map(|used| {
            Value::from(
                Object::new()
                    .text("path", Some(&used.path))
                    .text("value", Some(&used.text)),
            )
        })
        .collect()
}
