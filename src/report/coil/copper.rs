//! A winding's copper over frequency: the law of skin and proximity effect beside the ladder that the equations have.

use crate::report::chart::{Axis, Chart, Curve, CurvePanel, Instant, Panel, Style};
use crate::report::engineering::{engineering, fixed};
use crate::report::json::Object;
use crate::report::tables::{Align, Screen, Table};
use crate::run::{CoilReport, Copper};
use serde_json::Value;

/// Every so many points make a row of the printed table.
const EVERY: usize = 5;

/// The table under a heading; empty where skin and proximity effect are not counted.
pub fn text(coil: &CoilReport, screen: Screen) -> String {
    let Some(copper) = &coil.copper else {
        return String::new();
    };
    let mut table = Table::new()
        .column("frequency", Align::Right)
        .column("resistance", Align::Right)
        .column("over that at rest", Align::Right)
        .column("of the ladder", Align::Right)
        .column("inductance inside", Align::Right);
    for point in copper.points.iter().step_by(EVERY) {
        table.row([
            engineering(point.frequency, "Hz", 3),
            engineering(point.resistance, "Ω", 4),
            fixed(point.resistance / coil.resistance, 2),
            engineering(point.ladder_resistance, "Ω", 4),
            engineering(point.inductance, "H", 4),
        ]);
    }
    format!(
        "\n{}: copper over frequency, {} sections up to {}\n{}",
        coil.name,
        copper.sections,
        engineering(copper.up_to, "Hz", 3),
        table.render(screen)
    )
}

/// `{sections, up_to, points: [...]}`; null where skin and proximity effect are not counted.
pub fn json(coil: &CoilReport) -> Value {
    let Some(copper) = &coil.copper else {
        return Value::Null;
    };
    let points = copper.points.iter().map(|point| {
        Object::new()
            .number("frequency", point.frequency)
            .number("resistance", point.resistance)
            .number("inductance", point.inductance)
            .number("ladder_resistance", point.ladder_resistance)
            .number("ladder_inductance", point.ladder_inductance)
    });
    Object::new()
        .value("sections", copper.sections)
        .number("up_to", copper.up_to)
        .list("points", points)
        .into()
}

/// Resistance and inductance over frequency, law and ladder in one picture; None where they are not counted.
pub fn chart(coil: &CoilReport) -> Option<Chart> {
    let copper = coil.copper.as_ref()?;
    let x = Axis::new("frequency", "Hz").logarithmic();
    let end = Instant {
        label: format!("ladder fitted up to {}", engineering(copper.up_to, "Hz", 3)),
        at: copper.up_to,
    };
    let unnamed = Instant {
        label: String::new(),
        ..end.clone()
    };
    let panel = |label: &str, unit: &str, instant: Instant, of: [Pick; 2]| {
        let curve = |name: &str, style: Style, pick: Pick| Curve {
            name: name.into(),
            points: copper
                .points
                .iter()
                .map(|point| (point.frequency, pick(point)))
                .collect(),
            style,
        };
        Panel::Curves(CurvePanel {
            x: x.clone(),
            y: Axis::new(label, unit).logarithmic(),
            curves: vec![
                curve("law", Style::Line, of[0]),
                curve("ladder", Style::Dashed, of[1]),
            ],
            instants: vec![instant],
            ..CurvePanel::default()
        })
    };
    Some(Chart {
        title: format!("{}: copper over frequency", coil.name),
        subtitle: subtitle(coil, copper),
        panels: vec![
            panel(
                "resistance",
                "Ω",
                end,
                [|point| point.resistance, |point| point.ladder_resistance],
            ),
            panel(
                "inductance inside the copper",
                "H",
                unnamed,
                [|point| point.inductance, |point| point.ladder_inductance],
            ),
        ],
        caution: None,
    })
}

type Pick = fn(&crate::run::CopperPoint) -> f64;

fn subtitle(coil: &CoilReport, copper: &Copper) -> String {
    format!(
        "{} to direct current; a ladder of {} sections follows the law within 2 % up to {}",
        engineering(coil.resistance, "Ω", 4),
        copper.sections,
        engineering(copper.up_to, "Hz", 3)
    )
}
