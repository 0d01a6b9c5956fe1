//! The README shows what the program prints.

use std::process::Command;

/// Every line that a command prints stands in the README.
fn shown(arguments: &[&str]) {
    let readme = include_str!("../../README.md");
    let output = Command::new(env!("CARGO_BIN_EXE_coilbreak"))
        .args(arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .expect("the program was built for the tests");
    let text = String::from_utf8(output.stdout).expect("the program prints UTF-8");
    assert!(
        text.lines().count() > 10,
        "{arguments:?} prints too little:\n{text}"
    );
    for line in text.lines() {
        assert!(
            readme.contains(line.trim_end()),
            "the README does not show this line of {arguments:?}:\n{line}"
        );
    }
}

#[test]
fn the_worked_example_is_what_run_prints() {
    shown(&["run", "netlists/relay_bare.yaml"]);
}

#[test]
fn the_worked_example_is_what_size_prints() {
    shown(&["size", "netlists/relay_bare.yaml"]);
}
