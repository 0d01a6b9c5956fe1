//! The picture of a coil: flux linkage and inductance over current.

use crate::report::chart::{Axis, Chart, Curve, CurvePanel, Instant, Panel, Style};
use crate::report::engineering::engineering;
use crate::run::CoilReport;

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
