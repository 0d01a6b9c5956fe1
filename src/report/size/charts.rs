//! The pictures of a sizing: the candidates' switch voltage and winding current over each other, and release time
//! against switch voltage with the candidates that none beats.

use super::words::answer;
use crate::report::chart::{
    Axis, Chart, Curve, CurvePanel, Instant, LimitLine, Mark, Panel, Style,
};
use crate::report::engineering::engineering;
use crate::report::run::charts::curve;
use crate::report::run::charts::kick::shifted;
use crate::run::Outcome;
use crate::sizing::{Candidate, Comparison};

pub use crate::report::run::charts::Named;

/// A peak this many times the highest of the others (or of what is allowed) is drawn only in part.
const FAR_ABOVE: f64 = 3.0;

/// The line under every picture.
const CAUTION: &str = "Prediction at nominal values, to be confirmed on the bench with rated probes. Interrupted coils make voltages that injure.";

/// All pictures. `outcomes` are the runs of the candidates that have one, by number.
pub fn charts(comparison: &Comparison, outcomes: &[(usize, Outcome)]) -> Vec<Named> {
    let mut charts = Vec::new();
    if let Some(chart) = over_each_other(comparison, outcomes) {
        charts.push(Named {
            file: "candidates".into(),
            chart,
        });
    }
    if let Some(chart) = trade_off(comparison) {
        charts.push(Named {
            file: "trade_off".into(),
            chart,
        });
    }
    charts
}

fn title(comparison: &Comparison, what: &str) -> String {
    if comparison.title.is_empty() {
        what.to_owned()
    } else {
        format!("{}: {what}", comparison.title)
    }
}

fn subtitle(comparison: &Comparison) -> String {
    let answer = answer(comparison);
    let line = answer.lines().next().unwrap_or("");
    let name = format!("{}: ", comparison.title);
    line.strip_prefix(&name).unwrap_or(line).to_owned()
}

/// Switch voltage and winding current of all candidates over the time after the opening.
fn over_each_other(comparison: &Comparison, outcomes: &[(usize, Outcome)]) -> Option<Chart> {
    let facts = &comparison.facts;
    let until = (1.25 * slowest(comparison)?).max(1.05 * within(comparison).unwrap_or(0.0));
    let from = -0.08 * until;
    let voltage = format!("voltage across {}", facts.switch);
    let current = format!("winding current of {}", facts.coil);
    let axis = || Axis::new("time after opening", "s").between(from, until);
    let mut above = CurvePanel {
        x: axis(),
        y: Axis::new(&voltage, "V"),
        limits: voltage_limits(comparison),
        instants: vec![Instant {
            label: format!("{} opens", facts.switch),
            at: 0.0,
        }],
        ..CurvePanel::default()
    };
    let mut below = CurvePanel {
        x: axis(),
        y: Axis::new("winding current", "A"),
        ..CurvePanel::default()
    };
    let ceiling = ceiling(comparison);
    let mut beyond = Vec::new();
    for (k, outcome) in outcomes {
        let candidate = &comparison.candidates[*k];
        let opens = comparison.cycle_of(candidate).opens;
        let word = candidate.suppressor.word;
        let peak = peak(candidate);
        if peak > ceiling {
            // What leaves the panel would fill it from side to side: it is named instead of drawn.
            beyond.push(format!("{word} ({})", engineering(peak, "V", 3)));
        } else if let Some(trace) = outcome.trace(&voltage) {
            above
                .curves
                .push(curve(&shifted(trace, opens), word, from, until));
        }
        let found = outcome.trace(&current);
        let found = found.or_else(|| outcome.trace(&format!("current through {}", facts.coil)));
        if let Some(trace) = found {
            below
                .curves
                .push(curve(&shifted(trace, opens), word, from, until));
        }
    }
    if !beyond.is_empty() {
        above.y.range = Some((-0.08 * ceiling, ceiling));
        let left_out = format!("{} opens; not drawn: {}", facts.switch, beyond.join(", "));
        above.instants = vec![Instant {
            label: left_out,
            at: 0.0,
        }];
    }
    below.limits.push(LimitLine {
        label: format!("release current {}", engineering(comparison.level, "A", 3)),
        value: comparison.level * facts.nominal.current.signum(),
    });
    if let Some(within) = within(comparison) {
        below.instants.push(Instant {
            label: format!("release within {}", engineering(within, "s", 3)),
            at: within,
        });
    }
    Some(Chart {
        title: title(comparison, "the candidates"),
        subtitle: subtitle(comparison),
        panels: vec![Panel::Curves(above), Panel::Curves(below)],
        caution: Some(CAUTION.into()),
    })
}

/// Release time against switch voltage, nominal.
fn trade_off(comparison: &Comparison) -> Option<Chart> {
    let figures: Vec<Option<(f64, f64)>> = comparison
        .candidates
        .iter()
        .map(|candidate| {
            let nominal = candidate.study.as_ref()?.nominal();
            let release = nominal.release.filter(|release| *release > 0.0)?;
            Some((release, nominal.peak_voltage))
        })
        .collect();
    let mut panel = CurvePanel {
        x: Axis::new("release time", "s").logarithmic(),
        y: Axis::new(
            &format!("peak voltage across {}", comparison.facts.switch),
            "V",
        )
        .logarithmic(),
        limits: voltage_limits(comparison),
        ..CurvePanel::default()
    };
    let mut front: Vec<(f64, f64)> = comparison
        .front
        .iter()
        .filter_map(|&k| figures[k])
        .collect();
    front.sort_by(|a, b| a.0.total_cmp(&b.0));
    if front.len() > 1 {
        panel.curves.push(Curve {
            name: "front: quicker costs voltage".into(),
            points: front,
            style: Style::Dashed,
        });
    }
    let points: Vec<(f64, f64)> = figures.iter().flatten().copied().collect();
    if points.is_empty() {
        return None;
    }
    panel.curves.push(Curve {
        name: "candidates".into(),
        points,
        style: Style::Points,
    });
    for (k, candidate) in comparison.candidates.iter().enumerate() {
        let Some((x, y)) = figures[k] else { continue };
        let mut label = candidate.suppressor.word.to_owned();
        if comparison.recommended == Some(k) {
            label += " (recommended)";
        } else if !comparison.standings[k].holds {
            label += " (fails)";
        }
        panel.marks.push(Mark { x, y, label });
    }
    if let Some(within) = within(comparison) {
        panel.instants.push(Instant {
            label: format!("release within {}", engineering(within, "s", 3)),
            at: within,
        });
    }
    Some(Chart {
        title: title(comparison, "release against switch voltage"),
        subtitle: subtitle(comparison),
        panels: vec![Panel::Curves(panel)],
        caution: Some(CAUTION.into()),
    })
}

fn peak(candidate: &Candidate) -> f64 {
    let study = candidate.study.as_ref();
    study.map_or(0.0, |study| study.nominal().peak_voltage)
}

/// The slowest nominal release [s].
fn slowest(comparison: &Comparison) -> Option<f64> {
    let releases = comparison
        .candidates
        .iter()
        .filter_map(|candidate| candidate.study.as_ref()?.nominal().release);
    let slowest = releases.fold(0.0, f64::max);
    (slowest > 0.0).then_some(slowest)
}

/// The highest voltage worth drawing: what is allowed and the peaks that are not far above all others.
fn ceiling(comparison: &Comparison) -> f64 {
    let mut peaks: Vec<f64> = comparison.candidates.iter().map(peak).collect();
    peaks.extend(voltage_limits(comparison).iter().map(|limit| limit.value));
    peaks.sort_by(f64::total_cmp);
    let mut ceiling = peaks.first().copied().unwrap_or(1.0);
    for peak in peaks {
        if ceiling > 0.0 && peak > FAR_ABOVE * ceiling {
            break;
        }
        ceiling = ceiling.max(peak);
    }
    1.15 * ceiling
}

/// The bounds on the voltage across the switch.
fn voltage_limits(comparison: &Comparison) -> Vec<LimitLine> {
    let mut lines: Vec<LimitLine> = Vec::new();
    let with_study = comparison.candidates.iter().find_map(|candidate| {
        let study = candidate.study.as_ref()?;
        Some((candidate, study))
    });
    let Some((candidate, study)) = with_study else {
        return lines;
    };
    for (k, check) in candidate
        .checks
        .iter()
        .enumerate()
        .filter(|(_, c)| c.on_switch)
    {
        let value = study.nominal().verdicts[k].bound;
        match lines.iter_mut().find(|line| line.value == value) {
            Some(line) => {
                let bound = format!(" {}", engineering(value, "V", 3));
                let names = line.label.strip_suffix(&bound).unwrap_or(&line.label);
                line.label = format!("{names}, {}{bound}", check.name);
            }
            None => lines.push(LimitLine {
                label: format!("{} {}", check.name, engineering(value, "V", 3)),
                value,
            }),
        }
    }
    lines
}

/// The longest release time that is asked for [s].
fn within(comparison: &Comparison) -> Option<f64> {
    comparison.candidates.iter().find_map(|candidate| {
        let study = candidate.study.as_ref()?;
        let checks = candidate.checks.iter();
        let release = checks
            .zip(&study.nominal().verdicts)
            .find(|(check, _)| check.name == crate::sizing::RELEASE);
        release.map(|(_, verdict)| verdict.bound)
    })
}
