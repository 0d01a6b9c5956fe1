//! `check`: read and check; print what each coil came out as, and every default used.

use super::common::{self, Source};
use super::exit;
use crate::report::coil;
use crate::report::json::Object;
use crate::report::run::json;
use crate::report::tables::{Align, Table};
use crate::run::coil_reports;

/// Arguments of `check`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
}

/// Runs the command.
pub fn main(arguments: &Arguments) -> u8 {
    let source = &arguments.source;
    let netlist = match source.read() {
        Ok(netlist) => netlist,
        Err(code) => return code,
    };
    let circuit = &netlist.circuit;
    let coils = coil_reports(circuit);
    if source.json {
        let object = Object::new()
            .text("title", Some(&netlist.title))
            .value("elements", circuit.entries.len())
            .value("nodes", circuit.node_names.len())
            .value("coils", coil::json::coils(&coils))
            .value("cautions", json::cautions(&netlist.cautions))
            .value("defaults", json::defaults_used(&netlist.defaults));
        common::print(&common::json_text(&object.into()));
        return exit::DONE;
    }
    let name = if netlist.title.is_empty() {
        String::new()
    } else {
        format!("{}: ", netlist.title)
    };
    let mut out = format!(
        "{name}sound, {} elements on {} nodes, {} unknowns.\n",
        circuit.entries.len(),
        circuit.node_names.len() + 1,
        circuit.unknowns.len()
    );
    let table = coil::text::coils(&coils);
    if !table.is_empty() {
        out += &format!("\nCoils\n{}", table.render(common::screen()));
    }
    if !netlist.defaults.is_empty() {
        let mut table = Table::new()
            .column("default used", Align::Left)
            .column("value", Align::Left);
        for used in &netlist.defaults {
            table.row([used.path.as_str(), used.text.as_str()]);
        }
        out += &format!("\nDefaults\n{}", table.render(common::screen()));
    }
    common::print(&out);
    source.caution(&netlist.cautions, &netlist.sources);
    exit::DONE
}
