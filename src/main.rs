//! The command line of coilbreak.

use std::process::ExitCode;

fn main() -> ExitCode {
    coilbreak::cli::main()
}
