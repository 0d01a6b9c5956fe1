//! The program as a process, and folders for what it leaves.

use serde_json::Value;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

/// What a call came to.
pub struct Called {
    /// Exit code; None where a signal ended it.
    pub code: Option<i32>,
    /// Standard output.
    pub out: String,
    /// Error stream.
    pub err: String,
}

impl Called {
    /// The one JSON object on standard output; the test fails where there is anything else.
    pub fn json(&self) -> Value {
        let value: Value = serde_json::from_str(&self.out).unwrap_or_else(|error| {
            panic!("not one JSON value: {error}\n{}\n{}", self.out, self.err)
        });
        assert!(value.is_object(), "{value}");
        value
    }
}

/// The program, run in the package's folder, with its output caught.
pub fn command(arguments: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_coilbreak"));
    command
        .args(arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .stdin(Stdio::null())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped());
    command
}

/// Calls the program.
pub fn call(arguments: &[&str]) -> Called {
    caught(command(arguments))
}

/// Calls the program with a text on standard input.
pub fn call_with_input(arguments: &[&str], input: &[u8]) -> Called {
    let mut child = command(arguments)
        .stdin(Stdio::piped())
        .spawn()
        .expect("the program starts");
    let mut stdin = child.stdin.take().expect("its standard input is piped");
    // The program may end before it has read everything.
    let _ = stdin.write_all(input);
    drop(stdin);
    gathered(&child.wait_with_output().expect("it ends"))
}

/// Runs a prepared command.
pub fn caught(mut command: Command) -> Called {
    gathered(&command.output().expect("the program starts"))
}

fn gathered(output: &std::process::Output) -> Called {
    let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).expect("the program writes UTF-8");
    let called = Called {
        code: output.status.code(),
        out: text(&output.stdout),
        err: text(&output.stderr),
    };
    assert!(!called.err.contains("panicked"), "{}", called.err);
    called
}

/// A folder that is gone when the test is over.
pub fn folder() -> tempfile::TempDir {
    tempfile::tempdir().expect("a folder for the test")
}

/// A path as an argument.
pub fn text(path: &Path) -> &str {
    path.to_str().expect("paths of tests are UTF-8")
}

/// The netlists in a folder of the package, sorted by name.
pub fn netlists_in(folder: &str) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join(folder))
        .unwrap_or_else(|error| panic!("{folder}: {error}"));
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry of the folder").path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "yaml"))
        .collect();
    paths.sort();
    paths
}
