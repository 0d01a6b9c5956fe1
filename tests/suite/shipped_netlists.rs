//! Guards: every netlist that is shipped runs, ends as its comment says, and closes its ledger, the better the finer
//! the accuracy; a loss law that is off by one per cent would be found.

use crate::binary::netlists_in;
use coilbreak::circuit::Entry;
use coilbreak::elements::element::{Energy, Path, WindingFigures};
use coilbreak::elements::{
    Claims, Element, Follower, Point, Quantity, Stamper, Switching, Unknown, Unsound,
};
use coilbreak::netlist::{Input, Values};
use coilbreak::report::chart::Size;
use coilbreak::report::plots;
use coilbreak::report::run::charts::charts;
use coilbreak::run::{Netlist, Outcome, read, run};
use std::ops::ControlFlow;

/// Bound on the ledger's imbalance at the default accuracy.
const CLOSES: f64 = 1e-3;

fn netlist(path: &std::path::Path, overrides: &[&str]) -> Netlist {
    let overrides: Vec<String> = overrides.iter().map(|text| (*text).to_owned()).collect();
    read(&Input::File(path.to_path_buf()), &overrides).unwrap_or_else(|error| {
        let failure = error.failure();
        let paint = coilbreak::diag::Paint::Plain;
        panic!(
            "{}",
            coilbreak::diag::draw_all(&failure.diagnostics, &failure.sources, paint)
        )
    })
}

fn outcome(netlist: &Netlist) -> Outcome {
    run(netlist, &mut |_, _| ControlFlow::Continue(()))
        .unwrap_or_else(|failure| panic!("{}: {failure:?}", netlist.title))
}

#[test]
fn every_shipped_netlist_ends_as_its_comment_says() {
    let files = netlists_in("netlists");
    assert!(files.len() >= 6);
    for path in files {
        let text = std::fs::read_to_string(&path).expect("a netlist is text");
        let mut lines = text.lines();
        let purpose = lines.next().unwrap_or("");
        assert!(
            purpose.starts_with("# ") && purpose.ends_with('.'),
            "{}: {purpose}",
            path.display()
        );
        let expected = match lines.next() {
            Some("# expect: holds") => true,
            Some("# expect: fails") => false,
            other => panic!("{}: {other:?} does not say how it ends", path.display()),
        };
        let netlist = netlist(&path, &[]);
        assert!(
            !netlist.title.is_empty() && !netlist.limits.is_empty(),
            "{}",
            path.display()
        );
        assert_eq!(outcome(&netlist).holds(), expected, "{}", path.display());
    }
}

#[test]
fn the_ledger_closes_and_closes_better_at_a_finer_accuracy() {
    for path in netlists_in("netlists") {
        let usual = outcome(&netlist(&path, &[]));
        let set = match usual.analysis {
            "steady_state" => "analysis.steady_state.accuracy=1e-5",
            _ => "analysis.transient.accuracy=1e-5",
        };
        let usual = usual.ledger.imbalance;
        let fine = outcome(&netlist(&path, &[set])).ledger.imbalance;
        assert!(usual < CLOSES, "{}: {usual:e}", path.display());
        // Four decades below the bound it is chance whether the next steps close the ledger better still.
        assert!(
            fine < usual || fine < 1e-4 * CLOSES,
            "{}: {usual:e} at 1e-4, {fine:e} at 1e-5",
            path.display()
        );
    }
}

/// The pictures of a shipped netlist as SVG text, by file name.
fn pictures(name: &str) -> Vec<(String, String)> {
    let path = netlists_in("netlists")
        .into_iter()
        .find(|path| path.ends_with(format!("{name}.yaml")))
        .expect("it is shipped");
    let netlist = netlist(&path, &[]);
    charts(&netlist, &outcome(&netlist))
        .into_iter()
        .map(|named| {
            let svg = plots::svg(&named.chart, Size::default()).expect("it can be drawn");
            (named.file, svg)
        })
        .collect()
}

fn picture(name: &str, file: &str) -> String {
    let all = pictures(name);
    let found = all.into_iter().find(|(known, _)| known == file);
    found.unwrap_or_else(|| panic!("{name} has no {file}")).1
}

#[test]
fn a_kick_that_is_over_at_once_is_drawn_on_a_time_of_its_own() {
    let kick = picture("valve_on_cable", "kick");
    for piece in [
        "time after opening [µs]",
        "time after opening [ms]",
        "peak 40.",
        "driver_voltage 60 V",
    ] {
        assert!(kick.contains(piece), "no `{piece}`");
    }
    // A kick that takes a good part of the release is seen in one picture.
    let slow = picture("relay_rc_snubber", "kick");
    assert_eq!(slow.matches("time after opening").count(), 1);
    assert!(slow.contains("release level 8 mA"));
}

#[test]
fn a_bound_on_a_difference_is_no_level() {
    let run = picture("buck_telemetry", "run");
    assert!(run.contains("voltage at out") && run.contains("saturation 0.3"));
    assert!(
        !run.contains("output_ripple"),
        "a ripple of 50 mV is not a potential of 50 mV"
    );
}

/// An element whose own loss law is off by a factor; everything else is the element's.
struct Misjudged {
    element: Box<dyn Element>,
    factor: f64,
}

impl Element for Misjudged {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.element.derive(values)
    }
    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.element.claim(claims);
    }
    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        self.element.stamp(at, into);
    }
    fn energy(&self) -> &dyn Energy {
        self
    }
    fn switching(&self) -> Option<&dyn Switching> {
        self.element.switching()
    }
    fn follower(&mut self) -> Option<&mut dyn Follower> {
        self.element.follower()
    }
    fn quantity(&self, quantity: Quantity, winding: usize, at: Point<'_>) -> Option<f64> {
        self.element.quantity(quantity, winding, at)
    }
    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        self.element.limit(x, dx)
    }
    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        self.element.initial_charge(q);
    }
    fn paths(&self) -> Vec<Path> {
        self.element.paths()
    }
    fn windings(&self) -> Vec<WindingFigures<'_>> {
        self.element.windings()
    }
}

impl Energy for Misjudged {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        self.element.energy().currents(at, out);
    }
    fn loss(&self, at: Point<'_>) -> f64 {
        self.factor * self.element.energy().loss(at)
    }
    fn stored(&self, at: Point<'_>) -> f64 {
        self.element.energy().stored(at)
    }
    fn is_source(&self) -> bool {
        self.element.energy().is_source()
    }
}

/// Replaces an element of a netlist by one whose loss law is off by a factor.
fn misjudge(netlist: &mut Netlist, name: &str, factor: f64) {
    let entries = &mut netlist.circuit.entries;
    let at = entries
        .iter()
        .position(|entry| entry.name == name)
        .expect("the element was in the outcome");
    let mut entry: Entry = entries.remove(at);
    entry.element = Box::new(Misjudged {
        element: entry.element,
        factor,
    });
    entries.insert(at, entry);
}

/// In each netlist the loss law of the element that dissipates most is taken one per cent too high and too low.
#[test]
fn a_loss_law_that_is_off_by_one_per_cent_is_found() {
    for path in netlists_in("netlists") {
        let right = outcome(&netlist(&path, &[]));
        let (name, _) = right
            .accounts
            .iter()
            .filter(|(_, account)| !account.is_source)
            .max_by(|a, b| a.1.dissipated.total_cmp(&b.1.dissipated))
            .expect("a netlist has elements that dissipate");
        for factor in [0.99, 1.01] {
            let mut netlist = netlist(&path, &[]);
            misjudge(&mut netlist, name, factor);
            let wrong = outcome(&netlist);
            assert!(
                wrong.ledger.imbalance > CLOSES,
                "{}: {name} taken by {factor} leaves {:e}",
                path.display(),
                wrong.ledger.imbalance
            );
            // What is asked of the run itself does not hang on the loss law.
            assert_eq!(
                wrong
                    .readings
                    .iter()
                    .map(|reading| reading.value)
                    .collect::<Vec<_>>(),
                right
                    .readings
                    .iter()
                    .map(|reading| reading.value)
                    .collect::<Vec<_>>()
            );
        }
    }
}
