//! Guards: what the structure rules call handled is solved, and agrees with its closed form; what no values make
//! solvable is refused or ended by name. Odd circuits never make the program panic.
//!
//! The netlists in `tests/netlists/odd` say in their first line what is odd and what must come out, as limits, and in
//! the second how they end.

use crate::binary::{call, folder, netlists_in, text};

#[test]
fn odd_circuits_end_as_they_say() {
    let files = netlists_in("tests/netlists/odd");
    assert!(files.len() >= 40, "only {} files", files.len());
    let folder = folder();
    for path in files {
        let netlist = std::fs::read_to_string(&path).expect("an odd netlist is text");
        let said = netlist
            .lines()
            .nth(1)
            .and_then(|line| line.strip_prefix("# expect: "))
            .unwrap_or_else(|| panic!("{} does not say how it ends", path.display()));
        let (ends, word) = said.split_once(' ').unwrap_or((said, "not-completed"));
        let code = match ends {
            "holds" => 0,
            "fails" => 1,
            "refused" => 2,
            "stopped" => 3,
            _ => panic!("{}: `{ends}` is no end", path.display()),
        };
        let out = folder.path().join("out");
        let called = call(&["run", text(&path), "--out", text(&out), "--json"]);
        assert_eq!(
            called.code,
            Some(code),
            "{}: {}{}",
            path.display(),
            called.out,
            called.err
        );
        let json = called.json();
        if code >= 2 {
            let told = &json["diagnostics"][0];
            assert_eq!(told["word"], word, "{}: {json}", path.display());
            assert!(told["line"].is_u64(), "{}: {json}", path.display());
        } else {
            let imbalance = json["ledger"]["imbalance"].as_f64();
            let imbalance = imbalance.expect("every result has a ledger");
            assert!(imbalance < 1e-2, "{}: {imbalance:e}", path.display());
        }
    }
}
