//! The kick: a switch's voltage around an interruption, with its peak and its limits, and the coils' currents.
//!
//! Where the peak comes long before the coil has let go (a cable's own kick before a diode), it is drawn twice: first
//! on a time of its own, then over the whole release.

use super::{curve, level_lines, limit_lines, of_kind, peak, title};
use crate::report::chart::{Axis, Chart, CurvePanel, Instant, Mark, Panel};
use crate::report::engineering::engineering;
use crate::run::{Netlist, Outcome};
use crate::signals::{Happening, Owner, Side, Trace};

/// The line under every picture of a voltage.
const CAUTION: &str = "Prediction, to be confirmed on the bench with rated probes. Interrupted coils make voltages that injure.";
/// A peak within this share of the picture is drawn on a time of its own,
const TOO_NARROW: f64 = 0.02;
/// which is so many times as long as the peak took.
const CLOSE_UP: f64 = 8.0;
/// Time before the opening, as a share of the time after it.
const BEFORE: f64 = 0.08;
/// A coil has let go when its current stays below this share of what was interrupted.
const LET_GO: f64 = 0.02;

/// The first opening that was recorded, and the end of what is worth looking at [s].
struct Interruption {
    opens: f64,
    until: f64,
}

/// The switch's voltage and the coils' currents around its first recorded opening.
pub(super) fn kick(netlist: &Netlist, outcome: &Outcome, switch: &str) -> Option<Chart> {
    let signal = format!("voltage across {switch}");
    let recorded = outcome.trace(&signal)?;
    let coils: Vec<(&str, &Trace)> = of_kind(netlist, "coil")
        .into_iter()
        .filter_map(|coil| Some((coil, outcome.trace(&format!("winding current of {coil}"))?)))
        .collect();
    let Interruption { opens, until } = interruption(outcome, switch, recorded, &coils)?;
    let until = until - opens;
    let trace = shifted(recorded, opens);
    let coils: Vec<(&str, Trace)> = coils
        .into_iter()
        .map(|(coil, trace)| (coil, shifted(trace, opens)))
        .collect();
    let (at, value) = peak(&trace, 0.0, until)?;
    let node = &netlist.circuit.find(switch)?.terminals.first()?.node.text;
    let limits = limit_lines(netlist, outcome, &[&signal, &format!("voltage at {node}")]);
    let opening = Instant {
        label: format!("{switch} opens at {}", engineering(opens, "s", 4)),
        at: 0.0,
    };
    let voltage = |from: f64, until: f64| CurvePanel {
        x: after_opening(from, until),
        y: Axis::new(&signal, "V"),
        curves: vec![curve(&trace, switch, from, until)],
        limits: limits.clone(),
        instants: vec![opening.clone()],
        marks: vec![Mark {
            x: at,
            y: value,
            label: format!(
                "peak {}, {} after opening",
                engineering(value, "V", 4),
                engineering(at, "s", 3)
            ),
        }],
    };
    let from = |until: f64| -(BEFORE * until).min(opens);
    let mut panels = Vec::new();
    if at > 0.0 && at < TOO_NARROW * until {
        let close = CLOSE_UP * at;
        panels.push(Panel::Curves(voltage(from(close), close)));
    }
    let mut over_all = voltage(from(until), until);
    if !panels.is_empty() {
        // Told once, where there is room for it.
        over_all.marks.clear();
    }
    panels.push(Panel::Curves(over_all));
    if !coils.is_empty() {
        panels.push(Panel::Curves(currents(netlist, &coils, from(until), until)));
    }
    let answer = super::super::text::answer(outcome);
    let subtitle = answer
        .strip_prefix(&format!("{}: ", outcome.title))
        .unwrap_or(&answer)
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
pub(in crate::report) fn shifted(trace: &Trace, instant: f64) -> Trace {
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

/// The switch's first recorded opening; it is worth looking at until the coils have let go and a third longer, at
/// most until the switch closes again.
fn interruption(
    outcome: &Outcome,
    switch: &str,
    recorded: &Trace,
    coils: &[(&str, &Trace)],
) -> Option<Interruption> {
    let owner = Owner {
        element: switch.to_owned(),
        winding: None,
    };
    let (start, _) = recorded.span()?;
    let all = |what| outcome.events.all(&owner, what);
    let opens = all(Happening::Opens).find(|&time| time >= start)?;
    let end = all(Happening::Closes)
        .find(|&time| time > opens)
        .unwrap_or(outcome.reached);
    let settled = coils
        .iter()
        .map(|(_, trace)| let_go(trace, opens, end))
        .fold(opens, f64::max);
    let wanted = opens + 1.33 * (settled - opens);
    Some(Interruption {
        opens,
        until: if wanted > opens { wanted.min(end) } else { end },
    })
}

/// The last instant at which a coil's current exceeds a share of what it was at the opening [s].
fn let_go(trace: &Trace, opens: f64, end: f64) -> f64 {
    let interrupted = trace.value_at(opens, Side::Before).unwrap_or(0.0).abs();
    let exceeds = |value: f64| value.abs() > LET_GO * interrupted;
    trace
        .within(opens, end)
        .filter(|piece| piece.extremes().any(|(_, value)| exceeds(value)))
        .map(|piece| piece.to)
        .last()
        .unwrap_or(opens)
}
