//! `size`: compare suppressors and recommend standard parts with margin.

use super::common::{self, Source};
use super::exit;
use super::interrupt::Interrupt;
use super::progress::Progress;
use super::run::draw;
use crate::report::files::{self, FileError, write};
use crate::report::size;
use crate::run::Outcome;
use crate::sizing::{Candidate, Comparison};
use std::path::{Path, PathBuf};

/// Arguments of `size`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
    /// Writes plots (SVG and PNG), the result (JSON) and the recommended netlist to this folder
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
    let interrupt = Interrupt::listen();
    let mut progress = Progress::new();
    let result = crate::sizing::size(&netlist, &mut |done, remark| {
        progress.show("sizing", done, remark);
        interrupt.flow()
    });
    drop(progress);
    let comparison = match result {
        Ok(comparison) => comparison,
        Err(failure) => return source.fail_simulation(&failure, &netlist),
    };
    let command = command(source);
    if let Some(folder) = &arguments.out
        && let Err(error) = leave(&comparison, &command, folder)
    {
        return source.fail_files(&error);
    }
    if source.json {
        common::print(&common::json_text(&size::json::size(&comparison, &command)));
    } else {
        common::print(&size::text::size(&comparison, &command, common::screen()));
        source.caution(&comparison.cautions, &netlist.sources);
        if let Some(folder) = &arguments.out {
            common::print(&format!("\nPlots are in {}.\n", folder.display()));
        }
    }
    if comparison.recommended.is_some() {
        exit::DONE
    } else {
        exit::FAILS
    }
}

/// The command line that gives this result again.
fn command(source: &Source) -> String {
    let mut words = vec![
        "coilbreak size".to_owned(),
        quoted(&source.file.display().to_string()),
    ];
    for set in &source.set {
        words.push(format!("--set {}", quoted(set)));
    }
    words.join(" ")
}

/// A word as a shell takes it.
fn quoted(word: &str) -> String {
    let plain = |c: char| c.is_ascii_alphanumeric() || "-_./=".contains(c);
    if !word.is_empty() && word.chars().all(plain) {
        word.to_owned()
    } else {
        format!("'{}'", word.replace('\'', r"'\''"))
    }
}

/// Leaves everything that a sizing gives in a folder.
fn leave(comparison: &Comparison, command: &str, folder: &Path) -> Result<(), FileError> {
    files::folder(folder)?;
    write(
        &folder.join("result.json"),
        common::json_text(&size::json::size(comparison, command)).as_bytes(),
    )?;
    if let Some(number) = comparison.recommended {
        let (document, _) = comparison.document(&comparison.candidates[number]);
        write(
            &folder.join("recommended.yaml"),
            document.to_yaml().as_bytes(),
        )?;
    }
    let run = |(number, candidate): (usize, &Candidate)| {
        candidate.study.as_ref()?;
        // What was simulated for the table can be simulated again; a picture does without what cannot.
        Some((number, comparison.run(candidate).ok()?))
    };
    let candidates = comparison.candidates.iter().enumerate();
    let outcomes: Vec<(usize, Outcome)> = candidates.filter_map(run).collect();
    for named in size::charts::charts(comparison, &outcomes) {
        draw(&named.chart, folder, &named.file)?;
    }
    Ok(())
}
