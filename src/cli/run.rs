//! `run`: simulate; readings, limits, ledger; plots and waveforms to a folder.

use super::common::{self, Source};
use super::exit;
use super::progress::Progress;
use crate::report::files::{self, FileError, write};
use crate::report::{chart, plots, run};
use crate::run::{Netlist, Outcome};
use std::ops::ControlFlow;
use std::path::{Path, PathBuf};

/// Arguments of `run`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
    /// Writes plots (SVG and PNG), waveforms (CSV) and the result (JSON) to this folder
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
}

/// Runs the command.
pub fn main(arguments: &Arguments) -> u8 {
    let source = &arguments.source;
    let netlist = match source.read() {
        Ok(netlist) => netlist,
        Err(code) => return code,
    };
    let mut progress = Progress::new("simulating");
    let result = crate::run::run(&netlist, &mut |time, duration| {
        progress.show(time / duration, &crate::report::engineering::duration(time));
        ControlFlow::Continue(())
    });
    drop(progress);
    let outcome = match result {
        Ok(outcome) => outcome,
        Err(failure) => return source.fail_simulation(&failure, &netlist),
    };
    if let Some(folder) = &arguments.out
        && let Err(error) = leave(&netlist, &outcome, folder)
    {
        return source.fail_files(&error);
    }
    if source.json {
        common::print(&common::json_text(&run::json::run(&outcome)));
    } else {
        common::print(&run::text::run(&outcome, common::screen()));
        source.caution(&outcome.cautions, &netlist.sources);
        if let Some(folder) = &arguments.out {
            common::print(&format!(
                "\nPlots and waveforms are in {}.\n",
                folder.display()
            ));
        }
    }
    if outcome.holds() {
        exit::DONE
    } else {
        exit::FAILS
    }
}

/// Leaves everything that a run gives in a folder.
fn leave(netlist: &Netlist, outcome: &Outcome, folder: &Path) -> Result<(), FileError> {
    files::folder(folder)?;
    write(
        &folder.join("result.json"),
        common::json_text(&run::json::run(outcome)).as_bytes(),
    )?;
    if outcome.traces.is_empty() {
        return Ok(());
    }
    write(
        &folder.join("waveforms.csv"),
        run::waveforms::csv(outcome).as_bytes(),
    )?;
    for named in run::charts::charts(netlist, outcome) {
        draw(&named.chart, folder, &named.file)?;
    }
    Ok(())
}

/// Draws a chart as SVG and PNG.
pub fn draw(chart: &chart::Chart, folder: &Path, file: &str) -> Result<(), FileError> {
    let size = chart::Size::default();
    let failed = |error: plots::PlotError| FileError {
        path: folder.join(file),
        doing: "draw",
        cause: std::io::Error::other(error.to_string()),
    };
    let svg = plots::svg(chart, size).map_err(failed)?;
    write(&folder.join(format!("{file}.svg")), svg.as_bytes())?;
    let png = plots::png(chart, size).map_err(failed)?;
    write(&folder.join(format!("{file}.png")), &png)
}
