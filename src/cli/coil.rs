//! `coil`: flux linkage, inductance and saturation of the magnetics alone.

use super::common::{self, Source};
use super::exit;
use crate::diag::Diagnostic;
use crate::report::coil::{charts, copper, json, text};
use crate::report::files;
use crate::report::json::Object;
use crate::run::coil_reports;
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
                super::run::draw(&charts::coil(coil), folder, &format!("coil_{}", coil.name))?;
                copper::chart(coil).map_or(Ok(()), |chart| {
                    super::run::draw(&chart, folder, &format!("copper_{}", coil.name))
                })
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
        common::print(&text::page(&coils, common::screen()));
        source.caution(
            &crate::run::coil_cautions(&netlist.circuit),
            &netlist.sources,
        );
    }
    exit::DONE
}
