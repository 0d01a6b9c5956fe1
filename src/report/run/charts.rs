//! The pictures of a run: the kick zoomed on the interruption, the whole run, flux density, where the energy went.

pub(in crate::report) mod kick;

use crate::report::chart::{
    Axis, Bar, BarPanel, Chart, Curve, CurvePanel, LimitLine, Mark, Panel, Style,
};
use crate::report::engineering::engineering;
use crate::run::{CoilReport, LimitResult, Netlist, Outcome};
use crate::signals::{Trace, resample::thinned};

/// Points of one curve: four per pixel column of the widest picture.
const POINTS: usize = 5_000;

/// A picture with the name of its file.
pub struct Named {
    /// File name without ending.
    pub file: String,
    /// The picture.
    pub chart: Chart,
}

/// All pictures of a run.
pub fn charts(netlist: &Netlist, outcome: &Outcome) -> Vec<Named> {
    let mut charts = Vec::new();
    let entries = netlist.circuit.entries.iter();
    let switches: Vec<&str> = entries
        .filter(|entry| entry.kind.is_switch())
        .map(|entry| entry.name.as_str())
        .collect();
    let several = switches.len() > 1;
    for switch in &switches {
        if let Some(chart) = kick::kick(netlist, outcome, switch) {
            let file = if several {
                format!("kick_{switch}")
            } else {
                "kick".into()
            };
            charts.push(Named { file, chart });
        }
    }
    if let Some(chart) = whole(netlist, outcome) {
        charts.push(Named {
            file: "run".into(),
            chart,
        });
    }
    if let Some(chart) = flux(netlist, outcome) {
        charts.push(Named {
            file: "flux".into(),
            chart,
        });
    }
    if let Some(chart) = energy(outcome) {
        charts.push(Named {
            file: "energy".into(),
            chart,
        });
    }
    charts
}

fn of_kind<'a>(netlist: &'a Netlist, word: &str) -> Vec<&'a str> {
    let entries = netlist.circuit.entries.iter();
    entries
        .filter(|entry| entry.kind.word == word)
        .map(|entry| entry.name.as_str())
        .collect()
}

fn title(outcome: &Outcome, what: &str) -> String {
    if outcome.title.is_empty() {
        what.to_owned()
    } else {
        format!("{}: {what}", outcome.title)
    }
}

pub(in crate::report) fn curve(trace: &Trace, name: &str, from: f64, to: f64) -> Curve {
    let points = thinned(trace, from, to, POINTS)
        .into_iter()
        .map(|sample| (sample.time, sample.value))
        .collect();
    Curve {
        name: name.to_owned(),
        points,
        style: Style::Line,
    }
}

/// Takes whose results lie on the axis of their signal; a ripple is a difference and has no place there.
const ON_THE_AXIS: [&str; 7] = [
    "highest", "lowest", "peak", "mean", "rms", "final", "value_at",
];

/// The limits on readings of one signal, as lines.
fn limit_lines(netlist: &Netlist, outcome: &Outcome, signals: &[&str]) -> Vec<LimitLine> {
    let of_signal = |limit: &&LimitResult| {
        netlist.readings.iter().any(|reading| {
            reading.name.text == limit.subject
                && ON_THE_AXIS.contains(&reading.kind.word)
                && signals.contains(&reading.signal.phrase.to_string().as_str())
        })
    };
    outcome
        .limits
        .iter()
        .filter(of_signal)
        .map(|limit| LimitLine {
            label: format!(
                "{} {}",
                limit.name,
                engineering(limit.verdict.bound, limit.kind.symbol, 3)
            ),
            value: limit.verdict.bound,
        })
        .collect()
}

/// The levels that readings of a signal wait for, as lines: a release current.
fn level_lines(netlist: &Netlist, signal: &str) -> Vec<LimitLine> {
    let values = netlist.circuit.values();
    netlist
        .readings
        .iter()
        .filter(|reading| reading.signal.phrase.to_string() == signal)
        .filter_map(|reading| {
            let (level, _) = reading.level?;
            let kind = reading.signal.phrase.kind();
            let label = format!(
                "{} level {}",
                reading.name.text,
                engineering(values[level], kind.symbol, 3)
            );
            Some(LimitLine {
                label,
                value: values[level],
            })
        })
        .collect()
}

/// The largest magnitude of a trace within a window: where and what.
fn peak(trace: &Trace, from: f64, to: f64) -> Option<(f64, f64)> {
    trace
        .within(from, to)
        .flat_map(|piece| piece.extremes().collect::<Vec<(f64, f64)>>())
        .max_by(|a, b| a.1.abs().total_cmp(&b.1.abs()))
}

/// Every signal that a reading uses over the whole run, one panel per quantity.
fn whole(netlist: &Netlist, outcome: &Outcome) -> Option<Chart> {
    let (from, until) = outcome.traces.first()?.span()?;
    let mut panels: Vec<CurvePanel> = Vec::new();
    for reading in &netlist.readings {
        let name = reading.signal.phrase.to_string();
        let Some(trace) = outcome.trace(&name) else {
            continue;
        };
        let kind = trace.kind;
        // A ratio is known by what it is of: `saturation of l1` is drawn over saturation.
        let quantity = match name.split_once(" of ") {
            Some((quantity, _)) if kind.symbol.is_empty() => quantity,
            _ => kind.noun(),
        };
        let found = panels
            .iter_mut()
            .position(|panel| panel.y.unit == kind.symbol && panel.y.label == quantity);
        let k = found.unwrap_or_else(|| {
            panels.push(CurvePanel {
                x: Axis::new("time", "s").between(from, until),
                y: Axis::new(quantity, kind.symbol),
                ..CurvePanel::default()
            });
            panels.len() - 1
        });
        let panel = &mut panels[k];
        if panel.curves.iter().all(|curve| curve.name != name) {
            panel.curves.push(curve(trace, &name, from, until));
            panel.limits.extend(limit_lines(netlist, outcome, &[&name]));
        }
    }
    if panels.is_empty() {
        return None;
    }
    let panels = panels.into_iter().take(4).map(Panel::Curves).collect();
    let what = if from > 0.0 {
        format!("from {} on", engineering(from, "s", 4))
    } else {
        "the whole run".into()
    };
    Some(Chart {
        title: title(outcome, &what),
        panels,
        ..Chart::default()
    })
}

/// Flux density of each coil against the saturation of its core.
fn flux(netlist: &Netlist, outcome: &Outcome) -> Option<Chart> {
    let (from, until) = outcome.traces.first()?.span()?;
    let mut panel = CurvePanel {
        x: Axis::new("time", "s").between(from, until),
        y: Axis::new("flux density", "T"),
        ..CurvePanel::default()
    };
    for coil in of_kind(netlist, "coil") {
        let Some(trace) = outcome.trace(&format!("flux density in {coil}")) else {
            continue;
        };
        panel.curves.push(curve(trace, coil, from, until));
        let report = outcome.coils.iter().find(|report| report.name == coil);
        if let Some(line) = report.and_then(knee_line)
            && panel.limits.iter().all(|known| known.value != line.value)
        {
            panel.limits.push(line);
        }
        if let Some((at, value)) = peak(trace, from, until) {
            panel.marks.push(Mark {
                x: at,
                y: value,
                label: format!("peak {}", engineering(value, "T", 3)),
            });
        }
    }
    if panel.curves.is_empty() {
        return None;
    }
    Some(Chart {
        title: title(outcome, "flux density"),
        panels: vec![Panel::Curves(panel)],
        ..Chart::default()
    })
}

/// The flux density at which a coil has lost 30 % of its inductance.
fn knee_line(report: &CoilReport) -> Option<LimitLine> {
    let knee = report.current_at_70_percent?;
    let after = report
        .curve
        .iter()
        .position(|point| point.current >= knee)?;
    let (a, b) = (
        report.curve.get(after.checked_sub(1)?)?,
        report.curve.get(after)?,
    );
    let share = (knee - a.current) / (b.current - a.current);
    let value = a.flux_density + share * (b.flux_density - a.flux_density);
    Some(LimitLine {
        label: format!(
            "{}: 70 % of L left, {}",
            report.name,
            engineering(value, "T", 3)
        ),
        value,
    })
}

/// Dissipation of every element.
fn energy(outcome: &Outcome) -> Option<Chart> {
    let mut bars: Vec<Bar> = outcome
        .accounts
        .iter()
        .filter(|(_, account)| !account.is_source || account.dissipated > 0.0)
        .map(|(name, account)| Bar {
            name: name.clone(),
            value: account.dissipated,
        })
        .collect();
    // What dissipates nothing is no place where energy went.
    bars.retain(|bar| bar.value != 0.0);
    if bars.is_empty() {
        return None;
    }
    bars.sort_by(|a, b| b.value.total_cmp(&a.value));
    bars.truncate(16);
    let panel = BarPanel {
        label: "energy turned to heat over the run".into(),
        unit: "J".into(),
        bars,
    };
    Some(Chart {
        title: title(outcome, "where the energy went"),
        panels: vec![Panel::Bars(panel)],
        ..Chart::default()
    })
}
