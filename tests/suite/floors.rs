//! Guards: the house stands on its floors. A room imports only from rooms below it, and only the room that may do so
//! knows the terminal or the plotting library.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

/// Every room, from the top, with the rooms that it rests on directly. What those rest on is open to it too.
const ROOMS: &[(&str, &[&str])] = &[
    ("cli", &["report"]),
    ("report", &["sizing"]),
    ("sizing", &["studies"]),
    ("studies", &["run"]),
    ("run", &["analysis", "readings", "limits", "circuit"]),
    ("limits", &["readings", "signals"]),
    ("analysis", &["circuit", "dae", "signals"]),
    ("readings", &["signals"]),
    ("circuit", &["elements", "dae", "signals"]),
    ("elements", &["magnetics", "signals", "dae"]),
    ("magnetics", &["netlist", "math"]),
    ("signals", &["netlist", "math"]),
    ("netlist", &["units", "diag"]),
    ("dae", &["math"]),
    ("units", &[]),
    ("diag", &[]),
    ("math", &[]),
];

/// Rooms that the table announces before they are built.
const TO_COME: &[&str] = &[];

/// A word of the sources that only one room may use.
const KEPT: &[(&str, &str)] = &[
    ("plotters::", "report"),
    ("clap::", "cli"),
    ("println!", "cli"),
    ("print!", "cli"),
    ("process::exit", "cli"),
    ("HashMap", "nowhere: its order differs from run to run"),
    ("HashSet", "nowhere: its order differs from run to run"),
    (
        "SystemTime",
        "nowhere: results must not depend on the clock",
    ),
    ("unsafe ", "nowhere"),
];

fn sources() -> Vec<(String, PathBuf, String)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut found = Vec::new();
    let mut folders = vec![root.clone()];
    while let Some(folder) = folders.pop() {
        for entry in std::fs::read_dir(&folder).expect("a folder of the sources") {
            let path = entry.expect("an entry of the sources").path();
            if path.is_dir() {
                folders.push(path);
                continue;
            }
            let below = path
                .strip_prefix(&root)
                .expect("it was found below the root");
            let mut parts = below.components();
            let first = parts.next().expect("a file has a name");
            if parts.next().is_some() {
                let room = first.as_os_str().to_string_lossy().into_owned();
                let text = std::fs::read_to_string(&path).expect("sources are text");
                found.push((room, path, text));
            }
        }
    }
    found.sort();
    found
}

/// Lines without comments; a `//` inside a text would cut it too, which hides no import.
fn code(text: &str) -> String {
    text.lines()
        .map(|line| line.split("//").next().unwrap_or(""))
        .collect::<Vec<&str>>()
        .join("\n")
}

/// The rooms that a source names: `crate::ROOM`, also in a group `crate::{a, b::c}`.
fn named(code: &str) -> BTreeSet<String> {
    let word = |text: &str| -> String {
        text.chars()
            .take_while(|c| c.is_alphanumeric() || *c == '_')
            .collect()
    };
    let mut names = BTreeSet::new();
    for (at, start) in code.match_indices("crate::") {
        let rest = &code[at + start.len()..];
        match rest.strip_prefix('{') {
            None => drop(names.insert(word(rest))),
            Some(group) => {
                let (mut depth, mut begins) = (0, true);
                for (at, c) in group.char_indices() {
                    match c {
                        '{' => depth += 1,
                        '}' if depth == 0 => break,
                        '}' => depth -= 1,
                        ',' if depth == 0 => begins = true,
                        c if begins && !c.is_whitespace() => {
                            names.insert(word(&group[at..]));
                            begins = false;
                        }
                        _ => {}
                    }
                }
            }
        }
    }
    names
}

fn below(room: &str, table: &BTreeMap<&str, &[&str]>) -> BTreeSet<String> {
    let mut open: BTreeSet<String> = BTreeSet::new();
    let mut waiting: Vec<&str> = table[room].to_vec();
    while let Some(next) = waiting.pop() {
        if open.insert(next.to_owned()) {
            waiting.extend(table[next]);
        }
    }
    // The ground floor and the netlist serve every room but `dae`, which sees `math` alone.
    let above_ground = !["dae", "units", "diag", "math", "netlist"].contains(&room);
    if above_ground {
        open.extend(["units", "diag", "math", "netlist"].map(str::to_owned));
    }
    open
}

#[test]
fn a_room_imports_only_from_rooms_below_it() {
    let table: BTreeMap<&str, &[&str]> = ROOMS.iter().copied().collect();
    let mut faults = Vec::new();
    for (room, path, text) in sources() {
        let open = below(&room, &table);
        for name in named(&code(&text)) {
            let is_room = table.contains_key(name.as_str());
            if is_room && name != room && !open.contains(&name) {
                faults.push(format!("{} imports {name}", path.display()));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn the_table_names_every_room_and_no_other() {
    let built: BTreeSet<String> = sources().into_iter().map(|(room, ..)| room).collect();
    let table: BTreeSet<String> = ROOMS
        .iter()
        .map(|(room, _)| (*room).to_owned())
        .filter(|room| !TO_COME.contains(&room.as_str()) || built.contains(room))
        .collect();
    assert_eq!(built, table);
}

#[test]
fn a_kept_word_stays_in_its_room() {
    let mut faults = Vec::new();
    for (room, path, text) in sources() {
        let tests = path.to_string_lossy().contains("tests");
        for (word, keeper) in KEPT {
            if code(&text).contains(word) && room != *keeper && !tests {
                faults.push(format!("{}: `{word}` belongs to {keeper}", path.display()));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn every_file_says_first_what_it_is() {
    let silent: Vec<String> = sources()
        .into_iter()
        .filter(|(_, path, text)| {
            !text.starts_with("//!")
                && !path.ends_with("tests.rs")
                && !path.ends_with("tests/mod.rs")
        })
        .map(|(_, path, _)| path.display().to_string())
        .collect();
    assert!(silent.is_empty(), "{}", silent.join("\n"));
}

#[test]
fn imports_are_found_in_every_spelling() {
    let text = "use crate::dae::Point;\nuse crate::{units, netlist::{Key, Node}, run};\nfn f() { crate::math::root() }";
    let found: Vec<String> = named(text).into_iter().collect();
    assert_eq!(found, ["dae", "math", "netlist", "run", "units"]);
}
