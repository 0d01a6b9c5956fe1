//! A hundred random circuits end in a result whose ledger closes, or in a named error; thousands are run by hand with
//! `cargo test --release --test random`.

use super::random::circuit;
use super::random::judge::{End, judge, netlist};

/// As in the binary that is run by hand.
const SEED: u64 = 1;
const COUNT: u64 = 100;

#[test]
fn random_circuits_give_a_result_whose_ledger_closes_or_a_named_error() {
    let (mut sound, mut good) = (0, 0);
    for number in 0..COUNT {
        let text = circuit::netlist(SEED, number);
        let end = match netlist(&text) {
            Err(words) => End::Refused(words),
            Ok(netlist) => judge(&netlist).0,
        };
        match end {
            End::Refused(_) => {}
            End::Result(_) => (sound, good) = (sound + 1, good + 1),
            End::Stopped(_) => sound += 1,
            End::Defect(what) => panic!("{number}: {what}"),
        }
    }
    assert!(20 * good >= 19 * sound, "{good} of {sound}");
}
