//! The pictures of a run: the kick zoomed on the interruption, the whole run, flux density, where the energy went.

use crate::report::chart::{
    Axis, Bar, BarPanel, Chart, Curve, CurvePanel, Instant, LimitLine, Mark, Panel, Style,
};
use crate::report::engineering::engineering;
use crate::run::{CoilReport, LimitResult, Netlist, Outcome};
use crate::signals::{Happening, Owner, Trace, resample::thinned};

/// Points of one curve: four per pixel column of the widest picture.
const POINTS: usize = 5_000;

/// The line under every picture of a voltage.
const CAUTION: &str = "Prediction, to be confirmed on the bench with rated probes. Interrupted coils make voltages that injure.";

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
    let switches: Vec<&str> = of_kind(netlist, "switch");
    let several = switches.len() > 1;
    for switch in &switches {
        if let Some(chart) = kick(netlist, outcome, switch) {
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

fn curve(trace: &Trace, name: &str, from: f64, to: f64) -> Curve {
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

/// The limits on readings of one signal, as lines.
fn limit_lines(netlist: &Netlist, outcome: &Outcome, signals: &[&str]) -> Vec<LimitLine> {
    let of_signal = |limit: &&LimitResult| {
        netlist.readings.iter().any(|reading| {
            reading.name.text == limit.subject
                && signals.contains(&reading.signal.phrase.to_string().as_str())
                && reading.result().symbol == limit.kind.symbol
                && reading.signal.phrase.kind().symbol == limit.kind.symbol
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

/// The switch's voltage and the coils' currents around the first opening.
fn kick(netlist: &Netlist, outcome: &Outcome, switch: &str) -> Option<Chart> {
    let owner = Owner {
        element: switch.to_owned(),
        winding: None,
    };
    let opens = *outcome.events.all(&owner, Happening::Opens).first()?;
    let coils: Vec<(&str, &Trace)> = of_kind(netlist, "coil")
        .into_iter()
        .filter_map(|coil| Some((coil, outcome.trace(&format!("winding current of {coil}"))?)))
        .collect();
    let until = interruption_end(outcome, &coils, opens);
    let from = (opens - 0.08 * (until - opens)).max(0.0);
    let signal = format!("voltage across {switch}");
    let trace = &shifted(outcome.trace(&signal)?, opens);
    let coils: Vec<(&str, Trace)> = coils
        .into_iter()
        .map(|(coil, trace)| (coil, shifted(trace, opens)))
        .collect();
    let (from, until) = (from - opens, until - opens);
    let node = netlist
        .circuit
        .find(switch)?
        .terminals
        .first()?
        .node
        .text
        .clone();
    let mut voltage = CurvePanel {
        x: after_opening(from, until),
        y: Axis::new(&signal, "V"),
        curves: vec![curve(trace, switch, from, until)],
        limits: limit_lines(netlist, outcome, &[&signal, &format!("voltage at {node}")]),
        instants: vec![Instant {
            label: format!("{switch} opens at {}", engineering(opens, "s", 4)),
            at: 0.0,
        }],
        marks: Vec::new(),
    };
    let (at, value) = peak(trace, 0.0, until)?;
    voltage.marks.push(Mark {
        x: at,
        y: value,
        label: format!(
            "peak {}, {} after opening",
            engineering(value, "V", 4),
            engineering(at, "s", 3)
        ),
    });
    let mut panels = vec![Panel::Curves(voltage)];
    if !coils.is_empty() {
        panels.push(Panel::Curves(currents(netlist, &coils, from, until)));
    }
    let subtitle = super::text::answer(outcome);
    let subtitle = subtitle
        .strip_prefix(&format!("{}: ", outcome.title))
        .unwrap_or(&subtitle)
        .to_owned();
    Some(Chart {
        title: title(outcome, "the kick"),
        subtitle,
        panels,
        caution: Some(CAUTION.into()),
    })
}

/// The axis of a zoomed interruption: its zero is the opening.
fn after_opening(from: f64, until: f64) -> Axis {
    Axis::new("time after opening", "s").between(from, until)
}

/// A trace whose time counts from an instant.
fn shifted(trace: &Trace, instant: f64) -> Trace {
    let mut shifted = trace.clone();
    for piece in &mut shifted.pieces {
        piece.from -= instant;
        piece.to -= instant;
    }
    shifted
}

fn currents(netlist: &Netlist, coils: &[(&str, Trace)], from: f64, until: f64) -> CurvePanel {
    let limits = coils
        .iter()
        .flat_map(|(coil, _)| level_lines(netlist, &format!("winding current of {coil}")))
        .collect();
    CurvePanel {
        x: after_opening(from, until),
        y: Axis::new("winding current", "A"),
        curves: coils
            .iter()
            .map(|(coil, trace)| curve(trace, coil, from, until))
            .collect(),
        limits,
        ..CurvePanel::default()
    }
}

/// Until when the interruption is worth looking at: the last instant at which a coil's current exceeds a fiftieth of
/// what it was at the opening, and a third more.
fn interruption_end(outcome: &Outcome, coils: &[(&str, &Trace)], opens: f64) -> f64 {
    let end = outcome.reached;
    let settles = |trace: &Trace| {
        let at_opening = trace
            .value_at(opens, crate::signals::Side::Before)
            .unwrap_or(0.0)
            .abs();
        trace
            .within(opens, end)
            .filter(|piece| {
                piece
                    .extremes()
                    .any(|(_, value)| value.abs() > 0.02 * at_opening)
            })
            .map(|piece| piece.to)
            .last()
            .unwrap_or(opens)
    };
    let settled = coils
        .iter()
        .map(|(_, trace)| settles(trace))
        .fold(opens, f64::max);
    let closes = outcome
        .events
        .in_order()
        .into_iter()
        .find(|(time, _, what)| *time > opens && *what == Happening::Closes)
        .map_or(end, |(time, _, _)| time);
    let wanted = opens + 1.33 * (settled - opens);
    let wanted = if wanted > opens { wanted } else { end };
    wanted
        .min(end)
        .min(closes.max(opens + 1e-3 * (end - opens)))
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
        let found = panels
            .iter_mut()
            .position(|panel| panel.y.unit == kind.symbol && panel.y.label == kind.noun());
        let k = found.unwrap_or_else(|| {
            panels.push(CurvePanel {
                x: Axis::new("time", "s").between(from, until),
                y: Axis::new(kind.noun(), kind.symbol),
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
    Some(Chart {
        title: title(outcome, "the whole run"),
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

/// Flux linkage and inductance over current, for `coil`.
pub fn coil(report: &CoilReport) -> Chart {
    let over = |value: fn(&crate::run::CurvePoint) -> f64| {
        report
            .curve
            .iter()
            .map(|point| (point.current, value(point)))
            .collect::<Vec<(f64, f64)>>()
    };
    let x = Axis::new("winding current", "A");
    let mut linkage = CurvePanel {
        x: x.clone(),
        y: Axis::new("flux linkage", "Wb"),
        curves: vec![Curve {
            name: report.name.clone(),
            points: over(|point| point.flux_linkage),
            style: Style::Line,
        }],
        ..CurvePanel::default()
    };
    if let Some(current) = report.operating_current {
        linkage.instants.push(Instant {
            label: format!("at rest {}", engineering(current, "A", 3)),
            at: current.abs(),
        });
    }
    if let Some(knee) = report.current_at_70_percent {
        linkage.instants.push(Instant {
            label: format!("70 % left at {}", engineering(knee, "A", 3)),
            at: knee,
        });
    }
    let inductance = CurvePanel {
        x,
        y: Axis::new("incremental inductance", "H"),
        curves: vec![Curve {
            name: report.name.clone(),
            points: over(|point| point.inductance),
            style: Style::Line,
        }],
        instants: linkage
            .instants
            .iter()
            .map(|instant| Instant {
                label: String::new(),
                at: instant.at,
            })
            .collect(),
        ..CurvePanel::default()
    };
    Chart {
        title: format!("{}: flux linkage and inductance", report.name),
        subtitle: format!(
            "{} at zero current, {} turns, {}",
            engineering(report.inductance_at_zero, "H", 4),
            report.turns,
            engineering(report.resistance, "Ω", 4)
        ),
        panels: vec![Panel::Curves(linkage), Panel::Curves(inductance)],
        caution: None,
    }
}
