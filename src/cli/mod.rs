//! The command line: the only room that knows the terminal. One file per command.

mod check;
mod coil;
mod common;
mod interrupt;
mod progress;
mod run;
mod size;

use clap::{Parser, Subcommand};
use std::process::ExitCode;

/// Exit codes, as the README lists them.
pub mod exit {
    /// Done, every limit holds.
    pub const DONE: u8 = 0;
    /// Done, but a limit or a rating does not hold its margin, or no candidate does.
    pub const FAILS: u8 = 1;
    /// The netlist or the command is wrong.
    pub const WRONG: u8 = 2;
    /// The simulation could not be completed.
    pub const INCOMPLETE: u8 = 3;
    /// A file or folder could not be read or written.
    pub const FILES: u8 = 4;
    /// The person interrupted it.
    pub const INTERRUPTED: u8 = 130;
}

/// How high an interrupted coil kicks, how fast it lets go, and which part tames it.
#[derive(Parser)]
#[command(name = "coilbreak", version, about, disable_help_subcommand = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// Read and check a netlist; print what each coil came out as, and every default used
    Check(check::Arguments),
    /// Flux linkage, inductance and saturation of the coils alone
    Coil(coil::Arguments),
    /// Simulate: readings, limits, ledger; plots and waveforms to a folder
    Run(run::Arguments),
    /// Compare suppressors and recommend standard parts with margin
    Size(size::Arguments),
}

/// Runs the command line of this process.
pub fn main() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => return common::usage(&error),
    };
    let code = match arguments.command {
        Command::Check(arguments) => check::main(&arguments),
        Command::Coil(arguments) => coil::main(&arguments),
        Command::Run(arguments) => run::main(&arguments),
        Command::Size(arguments) => size::main(&arguments),
    };
    ExitCode::from(code)
}
