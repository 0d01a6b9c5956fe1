//! `run`: simulate; readings, limits, ledger; plots and waveforms to a folder.

use super::common::{self, Source};
use super::exit;
use super::interrupt::Interrupt;
use super::progress::Progress;
use crate::report::files::{self, FileError, write};
use crate::report::{chart, plots, run};
use crate::run::{Netlist, Outcome, Request, Stage, parameter};
use std::path::{Path, PathBuf};

/// Arguments of `run`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
    /// Writes plots (SVG and PNG), waveforms (CSV) and the result (JSON) to this folder
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Repeats the run at a tenth of the accuracy and states the numerical error of each reading
    #[arg(long)]
    verify: bool,
    /// Differentiates every reading by these values, such as `elements.k1_coil.resistance`
    #[arg(long, value_name = "PATH", num_args = 1..)]
    sensitivity: Vec<String>,
}

/// Runs the command.
pub fn main(arguments: &Arguments) -> u8 {
    let source = &arguments.source;
    let mut netlist = match source.read() {
        Ok(netlist) => netlist,
        Err(code) => return code,
    };
    let mut request = Request {
        verify: arguments.verify,
        ..Request::default()
    };
    let mut unknown = Vec::new();
    for path in &arguments.sensitivity {
        match parameter(&mut netlist, path.trim()) {
            Ok(value) => request.sensitivity.push(value),
            Err(diagnostic) => unknown.push(*diagnostic),
        }
    }
    if !unknown.is_empty() {
        return source.fail(exit::WRONG, &unknown, &netlist.sources);
    }
    let interrupt = Interrupt::listen();
    let mut progress = Progress::new();
    let result = crate::run::perform(&netlist, &request, &mut |stage, time, duration| {
        progress.show(words(stage), time / duration, &so_far(time, duration));
        interrupt.flow()
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
    if outcome.interrupted() {
        exit::INTERRUPTED
    } else if outcome.holds() {
        exit::DONE
    } else {
        exit::FAILS
    }
}

/// What a run is at, for people.
fn words(stage: Stage) -> &'static str {
    match stage {
        Stage::Swings => "looking how far everything swings",
        Stage::Run => "simulating",
        Stage::Verification => "simulating at a tenth of the accuracy",
    }
}

/// Simulated time and duration, for people.
fn so_far(time: f64, duration: f64) -> String {
    use crate::report::engineering::duration as span;
    format!("{} of {}", span(time), span(duration))
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
