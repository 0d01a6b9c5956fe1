//! Netlists for the tests: from text or file to an outcome.

use coilbreak::netlist::Input;
use coilbreak::run::{Netlist, Outcome, read, run};
use std::ops::ControlFlow;
use std::path::Path;

/// Reads a netlist from text; panics with the messages where it is wrong.
pub fn from_text(text: &str, overrides: &[&str]) -> Netlist {
    let input = Input::Text {
        name: "test".into(),
        bytes: text.as_bytes().to_vec(),
        folder: None,
    };
    sound(read(&input, &owned(overrides)))
}

/// Reads a netlist below the package's folder.
pub fn from_file(path: &str, overrides: &[&str]) -> Netlist {
    let input = Input::File(Path::new(env!("CARGO_MANIFEST_DIR")).join(path));
    sound(read(&input, &owned(overrides)))
}

fn owned(overrides: &[&str]) -> Vec<String> {
    overrides.iter().map(|text| (*text).to_owned()).collect()
}

fn sound(read: Result<Netlist, coilbreak::run::ReadError>) -> Netlist {
    read.unwrap_or_else(|error| {
        let failure = error.failure();
        let text = coilbreak::diag::draw_all(
            &failure.diagnostics,
            &failure.sources,
            coilbreak::diag::Paint::Plain,
        );
        panic!("the netlist is wrong:\n{text}")
    })
}

/// Runs a netlist; panics where the simulation cannot be completed.
pub fn outcome(netlist: &Netlist) -> Outcome {
    run(netlist, &mut |_, _| ControlFlow::Continue(()))
        .unwrap_or_else(|failure| panic!("{failure:?}"))
}

/// The value of a reading.
pub fn value(outcome: &Outcome, name: &str) -> f64 {
    outcome
        .reading(name)
        .and_then(|reading| reading.value)
        .unwrap_or_else(|| panic!("reading {name} has no value: {:?}", outcome.reading(name)))
}

/// The instant of a reading.
pub fn time(outcome: &Outcome, name: &str) -> f64 {
    outcome
        .reading(name)
        .and_then(|reading| reading.time)
        .unwrap_or_else(|| panic!("reading {name} has no instant: {:?}", outcome.reading(name)))
}
