//! Coils for people: the table of all, and for each its magnetics and its inductance over current.

use crate::magnetics::fringing::BAND;
use crate::report::engineering::{duration, engineering, engineering_or_dash, fixed, percent};
use crate::report::tables::{Align, Screen, Table};
use crate::run::CoilReport;

/// Rows of the table over current.
const ROWS: usize = 13;

/// What is told of each coil below the table of all, part by part; an empty part is left out.
const PARTS: &[fn(&CoilReport, Screen) -> String] = &[magnetics, over_current, super::copper::text];

/// The answer in a line for each coil, the table of all, and the parts of each.
pub fn page(coils: &[CoilReport], screen: Screen) -> String {
    let mut out = String::new();
    for coil in coils {
        let knee = match coil.current_at_70_percent {
            Some(knee) => format!("falls to 70 % at {}", engineering(knee, "A", 4)),
            None => "does not saturate".into(),
        };
        out += &format!(
            "{}: {} at zero current, {knee}.\n",
            coil.name,
            engineering(coil.inductance_at_zero, "H", 4)
        );
    }
    out += &format!("\n{}", self::coils(coils).render(screen));
    for coil in coils {
        out += &format!("\n{}: ", coil.name);
        for part in PARTS {
            out += &part(coil, screen);
        }
    }
    out
}

/// The coils of `check`, `coil` and `run`.
pub fn coils(reports: &[CoilReport]) -> Table {
    let mut table = Table::new()
        .column("coil", Align::Left)
        .column("turns", Align::Right)
        .column("L at zero", Align::Right)
        .column("I at 70 %", Align::Right)
        .column("R", Align::Right)
        .column("L/R", Align::Right)
        .column("I at rest", Align::Right)
        .column("energy", Align::Right)
        .column("B peak", Align::Right);
    for coil in reports {
        table.row([
            coil.name.clone(),
            format!("{}", coil.turns),
            engineering(coil.inductance_at_zero, "H", 4),
            engineering_or_dash(coil.current_at_70_percent, "A", 4),
            engineering(coil.resistance, "Ω", 4),
            coil.time_constant.map_or("—".into(), duration),
            engineering_or_dash(coil.operating_current, "A", 4),
            engineering_or_dash(coil.stored_energy, "J", 4),
            engineering_or_dash(coil.peak_flux_density, "T", 4),
        ]);
    }
    table
}

/// Path, areas, mean turn and window in a line, each gap and the fringing rule in one of their own.
fn magnetics(coil: &CoilReport, _: Screen) -> String {
    let geometry = &coil.geometry;
    let square = |area: f64| format!("{} mm²", fixed(1e6 * area, 2));
    let mut out = format!(
        "path {}, area {}",
        engineering(geometry.length, "m", 4),
        square(geometry.area)
    );
    if geometry.minimum_area < geometry.area * (1.0 - 1e-9) {
        out += &format!(" (smallest {})", square(geometry.minimum_area));
    }
    out += &format!(
        ", volume {} mm³, mean turn {}",
        fixed(1e9 * geometry.volume, 0),
        engineering_or_dash(geometry.mean_turn, "m", 4)
    );
    if let Some(window) = geometry.window {
        out += &format!(", window {}", square(window.area));
    }
    out.push('\n');
    for gap in &geometry.gaps {
        let factor = gap
            .fringing
            .as_ref()
            .filter(|fringing| fringing.rule != "none");
        out += &format!(
            "  {} of {} at {}{}\n",
            if gap.place == "gap" {
                "gap".into()
            } else {
                format!("gap in the {}", gap.place)
            },
            engineering(gap.length, "m", 4),
            square(gap.area),
            factor.map_or(String::new(), |fringing| format!(
                ", factor {:.3}",
                fringing.factor
            ))
        );
    }
    if let Some(moving) = &geometry.moving {
        out += &format!(
            "  leakage beside the moving gap {}\n",
            engineering(moving.leakage, "H", 4)
        );
    }
    out + &fringing(coil)
}

/// What the field beside the gaps adds, where a rule counts it.
fn fringing(coil: &CoilReport) -> String {
    match &coil.geometry.fringing {
        Some(fringing) if fringing.rule != "none" => format!(
            "  fringing by `{}`: factor {:.3}, good to about {} ({})\n",
            fringing.rule,
            fringing.factor,
            percent(BAND),
            fringing.source
        ),
        Some(_) => "  fringing not counted\n".into(),
        None => String::new(),
    }
}

fn over_current(coil: &CoilReport, screen: Screen) -> String {
    let mut table = Table::new()
        .column("current", Align::Right)
        .column("flux linkage", Align::Right)
        .column("inductance", Align::Right)
        .column("of that at zero", Align::Right)
        .column("flux density", Align::Right);
    let every = (coil.curve.len().max(2) - 1).div_ceil(ROWS - 1).max(1);
    for point in coil.curve.iter().step_by(every) {
        table.row([
            engineering(point.current, "A", 4),
            engineering(point.flux_linkage, "Wb", 4),
            engineering(point.inductance, "H", 4),
            percent(point.inductance / coil.inductance_at_zero),
            engineering(point.flux_density, "T", 4),
        ]);
    }
    table.render(screen)
}
