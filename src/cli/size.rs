//! `size`: compare suppressors and recommend standard parts with margin.

use super::common::Source;
use super::exit;

/// Arguments of `size`.
#[derive(clap::Args)]
pub struct Arguments {
    #[command(flatten)]
    source: Source,
}

/// Runs the command.
pub fn main(arguments: &Arguments) -> u8 {
    match arguments.source.read() {
        Ok(_) => exit::DONE,
        Err(code) => code,
    }
}
