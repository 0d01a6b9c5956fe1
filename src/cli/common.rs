//! What all commands share: where the netlist comes from, how results and messages leave, exit codes.

use super::exit;
use crate::analysis::Failure;
use crate::diag::{Diagnostic, Paint, Sources, draw_all, to_json};
use crate::netlist::Input;
use crate::report::files::FileError;
use crate::report::tables::Screen;
use crate::run::{Netlist, ReadError};
use serde_json::Value;
use std::io::{IsTerminal, Read, Write};
use std::path::PathBuf;

/// Arguments of every command that reads a netlist.
#[derive(clap::Args)]
pub struct Source {
    /// The netlist; `-` reads standard input
    pub file: PathBuf,
    /// Overrides a value of the netlist, such as `elements.catch.series_resistance=2 Ω`
    #[arg(long = "set", value_name = "PATH=VALUE")]
    pub set: Vec<String>,
    /// Prints one JSON object and nothing else
    #[arg(long)]
    pub json: bool,
}

impl Source {
    /// Reads the netlist, or prints why not and gives the exit code.
    pub fn read(&self) -> Result<Netlist, u8> {
        self.read_by(crate::run::read)
    }

    /// Reads a netlist of which only the coils matter: nothing else has to be there.
    pub fn read_coils(&self) -> Result<Netlist, u8> {
        self.read_by(crate::run::read_coils)
    }

    fn read_by(
        &self,
        read: fn(&Input, &[String]) -> Result<Netlist, ReadError>,
    ) -> Result<Netlist, u8> {
        let input = if self.file.as_os_str() == "-" {
            let mut bytes = Vec::new();
            if let Err(error) = std::io::stdin().read_to_end(&mut bytes) {
                let diagnostic =
                    Diagnostic::error("unreadable", format!("standard input: {error}"));
                return Err(self.fail(exit::FILES, &[diagnostic], &Sources::new()));
            }
            Input::Text {
                name: "standard input".into(),
                bytes,
                folder: None,
            }
        } else {
            Input::File(self.file.clone())
        };
        read(&input, &self.set).map_err(|error| {
            let code = match error {
                ReadError::Unreadable(_) => exit::FILES,
                ReadError::Wrong(_) => exit::WRONG,
            };
            let failure = error.failure();
            self.fail(code, &failure.diagnostics, &failure.sources)
        })
    }

    /// Prints diagnostics where they belong and returns the exit code.
    pub fn fail(&self, code: u8, diagnostics: &[Diagnostic], sources: &Sources) -> u8 {
        if self.json {
            print(&format!("{}\n", json_text(&to_json(diagnostics, sources))));
        } else {
            complain(&draw_all(diagnostics, sources, paint()));
        }
        code
    }

    /// Prints why a simulation ended and returns the exit code.
    pub fn fail_simulation(&self, failure: &Failure, netlist: &Netlist) -> u8 {
        let (code, diagnostic) = match failure {
            Failure::Refused(diagnostic) => (exit::WRONG, (**diagnostic).clone()),
            Failure::Interrupted => (
                exit::INTERRUPTED,
                Diagnostic::error("interrupted", "interrupted before there was a result"),
            ),
            Failure::Stopped {
                headline,
                help,
                span,
                ..
            } => {
                let diagnostic =
                    Diagnostic::error("not-completed", headline.clone()).help(help.clone());
                let diagnostic = match span {
                    Some(span) => diagnostic.at(*span, "here"),
                    None => diagnostic,
                };
                (exit::INCOMPLETE, diagnostic)
            }
        };
        self.fail(code, &[diagnostic], &netlist.sources)
    }

    /// Prints a file error and returns the exit code.
    pub fn fail_files(&self, error: &FileError) -> u8 {
        let diagnostic = Diagnostic::error("unwritable", error.to_string());
        self.fail(exit::FILES, &[diagnostic], &Sources::new())
    }

    /// Prints cautions on the error stream; with JSON they are in the object.
    pub fn caution(&self, cautions: &[Diagnostic], sources: &Sources) {
        if !self.json && !cautions.is_empty() {
            complain(&draw_all(cautions, sources, paint()));
        }
    }
}

/// A command line that clap refused, or asked-for help.
pub fn usage(error: &clap::Error) -> std::process::ExitCode {
    let wants_json = std::env::args_os().any(|argument| argument == "--json");
    if wants_json && error.use_stderr() {
        let text = error.to_string();
        let headline = text
            .lines()
            .next()
            .unwrap_or("wrong command")
            .trim_start_matches("error: ")
            .to_owned();
        let diagnostic = Diagnostic::error("wrong-command", headline).help("coilbreak --help");
        print(&format!(
            "{}\n",
            json_text(&to_json(&[diagnostic], &Sources::new()))
        ));
    } else {
        // Nothing better can be done where even this cannot be printed.
        let _ = error.print();
    }
    std::process::ExitCode::from(if error.use_stderr() {
        exit::WRONG
    } else {
        exit::DONE
    })
}

/// Writes to standard output; a reader that has gone away ends the program quietly.
pub fn print(text: &str) {
    let mut out = std::io::stdout().lock();
    if let Err(error) = out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        let gone = error.kind() == std::io::ErrorKind::BrokenPipe;
        std::process::exit(if gone {
            i32::from(exit::DONE)
        } else {
            i32::from(exit::FILES)
        });
    }
}

/// Writes to the error stream.
pub fn complain(text: &str) {
    let mut out = std::io::stderr().lock();
    // A message that cannot be shown cannot be complained about either.
    let _ = out.write_all(text.as_bytes()).and_then(|()| out.flush());
}

/// JSON as text, one object.
pub fn json_text(value: &Value) -> String {
    crate::report::json::text(value)
}

fn colours(terminal: bool) -> bool {
    terminal && std::env::var_os("NO_COLOR").is_none()
}

fn paint() -> Paint {
    if colours(std::io::stderr().is_terminal()) {
        Paint::Colour
    } else {
        Paint::Plain
    }
}

/// How tables are drawn on standard output.
pub fn screen() -> Screen {
    let terminal = std::io::stdout().is_terminal();
    Screen {
        width: if terminal { width() } else { None },
        colour: colours(terminal),
    }
}

fn width() -> Option<usize> {
    std::env::var("COLUMNS")
        .ok()
        .and_then(|columns| columns.parse().ok())
}
