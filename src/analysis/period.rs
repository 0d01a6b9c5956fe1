//! Periods: what the clock makes of a circuit, and whether a period goes with it.

use crate::circuit::Circuit;
use crate::diag::{Diagnostic, Span};
use crate::elements::Rhythm;
use crate::units::{TIME, engineering};

/// A period is a whole number of another to this share.
const WHOLE: f64 = 1e-9;
/// Periods of different sources meet within so many of the longest.
const MOST_MULTIPLES: u32 = 1000;

/// Holds a period against all that the clock does: a diagnostic where they do not go together.
pub fn fits(circuit: &Circuit, period: f64, unknown: bool) -> Result<(), Diagnostic> {
    for entry in &circuit.entries {
        let Some(switching) = entry.element.switching() else {
            continue;
        };
        let Rhythm::Every(own) = switching.rhythm() else {
            continue;
        };
        let own_words = engineering(own, TIME, 6);
        if unknown {
            let text = format!(
                "the period is `unknown`, but `{}` repeats itself every {own_words}",
                entry.name
            );
            return Err(Diagnostic::error("period-given", text).help(format!(
                "the clock sets the period: `period: {own_words}`, or a multiple of it"
            )));
        }
        let times = period / own;
        if times < 0.5 || (times - times.round()).abs() > WHOLE * times {
            let text = format!(
                "the period {} is not a multiple of the {own_words} after which `{}` repeats itself",
                engineering(period, TIME, 6),
                entry.name
            );
            return Err(Diagnostic::error("period-mismatch", text).help(format!(
                "`period: {own_words}`, or a common multiple where several sources run"
            )));
        }
    }
    Ok(())
}

/// Refuses a periodic analysis of what happens once.
pub fn repeats(circuit: &Circuit) -> Result<(), Diagnostic> {
    let once = circuit.entries.iter().find(|entry| {
        let switching = entry.element.switching();
        switching.is_some_and(|switching| switching.rhythm() == Rhythm::Once)
    });
    match once {
        None => Ok(()),
        Some(entry) => {
            let text = format!(
                "`{}` follows instants of its own and never repeats itself",
                entry.name
            );
            Err(Diagnostic::error("not-periodic", text)
                .at(entry.span, "what happens once has no periodic state")
                .help("a `square` or a `sine` repeats itself; or run a `transient` with `start: steady_state`"))
        }
    }
}

/// The shortest time after which all that the clock does repeats itself [s].
pub fn common_period(circuit: &Circuit, span: Span) -> Result<f64, Diagnostic> {
    let periods: Vec<f64> = circuit
        .entries
        .iter()
        .filter_map(|entry| entry.element.switching())
        .filter_map(|switching| match switching.rhythm() {
            Rhythm::Every(period) => Some(period),
            Rhythm::None | Rhythm::Once => None,
        })
        .collect();
    let longest = periods.iter().copied().fold(0.0, f64::max);
    if longest == 0.0 {
        return Err(Diagnostic::error(
            "no-period",
            "nothing in this circuit runs periodically by the clock",
        )
        .at(span, "which period?")
        .help("`start: operating_point`, or drive the circuit with a `sine` or a `square`"));
    }
    let whole = |times: f64| (times - times.round()).abs() <= WHOLE * times;
    (1..=MOST_MULTIPLES)
        .map(|k| f64::from(k) * longest)
        .find(|period| periods.iter().all(|own| whole(period / own)))
        .ok_or_else(|| {
            let text = format!("the sources do not meet again within {MOST_MULTIPLES} of the longest period");
            Diagnostic::error("no-period", text)
                .at(span, "which period?")
                .help("give the sources frequencies with a common multiple, or `start: zero` and a longer run")
        })
}
