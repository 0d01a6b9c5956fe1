//! `coil`: flux linkage, inductance and saturation of the magnetics alone.

use super::common::{self, Source};
use super::exit;
use crate::diag::Diagnostic;
use crate::report::engineering::{engineering, engineering_or_dash};
use crate::report::files;
use crate::report::json::Object;
use crate::report::run::{charts, json, text};
use crate::report::tables::{Align, Table};
use crate::run::{CoilReport, coil_reports};
use std::path::PathBuf;

/// Arguments of `coil`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
    /// The coil; all of them without
    name: Option<String>,
    /// Writes a plot of each coil (SVG and PNG) to this folder
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
}

/// Rows of the printed table.
const ROWS: usize = 13;

/// Runs the command.
pub fn main(arguments: &Arguments) -> u8 {
    let source = &arguments.source;
    let netlist = match source.read_coils() {
        Ok(netlist) => netlist,
        Err(code) => return code,
    };
    let mut coils = coil_reports(&netlist.circuit);
    if let Some(name) = &arguments.name {
        let known: Vec<String> = coils.iter().map(|coil| coil.name.clone()).collect();
        coils.retain(|coil| coil.name == *name || coil.name.starts_with(&format!("{name}.")));
        if coils.is_empty() {
            let diagnostic =
                Diagnostic::error("unknown-element", format!("there is no coil `{name}`"));
            let near = crate::netlist::nearest(name, known.iter().map(String::as_str));
            let help = match near {
                Some(near) => format!("did you mean `{near}`?"),
                None => format!("the coils are {}", known.join(", ")),
            };
            return source.fail(exit::WRONG, &[diagnostic.help(help)], &netlist.sources);
        }
    }
    if coils.is_empty() {
        let diagnostic = Diagnostic::error("no-coil", "the netlist has no coil")
            .help("add an element of kind `coil`");
        return source.fail(exit::WRONG, &[diagnostic], &netlist.sources);
    }
    if let Some(folder) = &arguments.out {
        let drawn = files::folder(folder).and_then(|()| {
            coils.iter().try_for_each(|coil| {
                super::run::draw(&charts::coil(coil), folder, &format!("coil_{}", coil.name))
            })
        });
        if let Err(error) = drawn {
            return source.fail_files(&error);
        }
    }
    if source.json {
        common::print(&common::json_text(
            &Object::new().value("coils", json::coils(&coils)).into(),
        ));
    } else {
        common::print(&page(&coils));
        source.caution(
            &crate::run::coil_cautions(&netlist.circuit),
            &netlist.sources,
        );
    }
    exit::DONE
}

fn page(coils: &[CoilReport]) -> String {
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
    out += &format!("\n{}", text::coils(coils).render(common::screen()));
    for coil in coils {
        out += &format!(
            "\n{}: path {}, area {} mm², volume {} mm³, mean turn {}{}\n",
            coil.name,
            engineering(coil.path_length, "m", 4),
            crate::report::engineering::fixed(1e6 * coil.path_area, 2),
            crate::report::engineering::fixed(1e9 * coil.path_volume, 0),
            engineering_or_dash(coil.mean_turn, "m", 4),
            fringing(coil),
        );
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
                crate::report::engineering::percent(point.inductance / coil.inductance_at_zero),
                engineering(point.flux_density, "T", 4),
            ]);
        }
        out += &table.render(common::screen());
    }
    out
}

/// What the field beside the gap adds, where a rule counts it.
fn fringing(coil: &CoilReport) -> String {
    match &coil.fringing {
        Some((rule, factor)) if rule != "none" => {
            format!(
                ", fringing by `{rule}`: factor {factor:.3} (any such rule is good to about 10 %)"
            )
        }
        Some(_) => ", fringing not counted".into(),
        None => String::new(),
    }
}
