//! The one door of every check against the outside: it asserts, and keeps subject, source, bound and the largest
//! deviation reached in target/checks/SUBJECT.json.

use std::cell::RefCell;
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;
use std::sync::{Mutex, PoisonError};

/// How far a reached value may lie from the expected one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Bound {
    /// Of the expected value.
    Relative(f64),
    /// In the value's unit.
    Absolute(f64),
}

/// What is kept of all checks of one subject against one source within one bound.
#[derive(Clone, Copy, Debug)]
struct Record {
    checks: usize,
    deviation: f64,
}

type Key = (&'static str, &'static str, String);

/// Subjects that a thread has checked; their files are written once, when the test's thread ends.
#[derive(Default)]
struct Touched(BTreeSet<&'static str>);

thread_local! {
    static TOUCHED: RefCell<Touched> = RefCell::default();
}

impl Drop for Touched {
    fn drop(&mut self) {
        let records = RECORDS.lock().unwrap_or_else(PoisonError::into_inner);
        for subject in &self.0 {
            write(subject, &records);
        }
    }
}

static RECORDS: Mutex<BTreeMap<Key, Record>> = Mutex::new(BTreeMap::new());

/// Asserts that `reached` lies within `bound` of `expected`, and records the deviation.
#[track_caller]
pub fn check(
    subject: &'static str,
    source: &'static str,
    reached: f64,
    expected: f64,
    bound: Bound,
) {
    let (deviation, holds) = weigh(reached, expected, bound);
    keep(subject, source, bound, deviation);
    assert!(
        holds,
        "{subject} ({source}): {reached:e} for {expected:e}, off by {deviation:.2e}, allowed {bound:?}"
    );
}

/// The deviation in the bound's own measure, and whether it holds; what is no number does not.
fn weigh(reached: f64, expected: f64, bound: Bound) -> (f64, bool) {
    let off = (reached - expected).abs();
    match bound {
        Bound::Relative(share) => (off / expected.abs(), off / expected.abs() <= share),
        Bound::Absolute(most) => (off, off <= most),
    }
}

fn keep(subject: &'static str, source: &'static str, bound: Bound, deviation: f64) {
    let mut records = RECORDS.lock().unwrap_or_else(PoisonError::into_inner);
    let record = records
        .entry((subject, source, format!("{bound:?}")))
        .or_insert(Record {
            checks: 0,
            deviation: 0.0,
        });
    record.checks += 1;
    // `max` would drop what is no number.
    if deviation.is_nan() || deviation > record.deviation {
        record.deviation = deviation;
    }
    TOUCHED.with_borrow_mut(|touched| touched.0.insert(subject));
}

/// Rewrites the subject's file. A folder that cannot be written spoils the record, not the check.
fn write(subject: &str, records: &BTreeMap<Key, Record>) {
    let list: Vec<serde_json::Value> = records
        .iter()
        .filter(|((of, _, _), _)| *of == subject)
        .map(|((subject, source, bound), record)| {
            serde_json::json!({
                "subject": subject,
                "source": source,
                "bound": bound,
                "checks": record.checks,
                "deviation": record.deviation,
            })
        })
        .collect();
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).with_file_name("checks");
    let name: String = subject
        .chars()
        .map(|c| if c.is_alphanumeric() { c } else { '_' })
        .collect();
    let written = std::fs::create_dir_all(&folder).and_then(|()| {
        std::fs::write(
            folder.join(format!("{name}.json")),
            format!("{:#}\n", serde_json::Value::from(list)),
        )
    });
    if let Err(error) = written {
        eprintln!("the record of {subject} could not be kept: {error}");
    }
}

#[test]
fn a_value_out_of_bound_or_not_a_number_fails() {
    let fails = |reached: f64, bound: Bound| !weigh(reached, 2.0, bound).1;
    assert!(fails(2.1, Bound::Relative(0.04)) && !fails(2.1, Bound::Relative(0.06)));
    assert!(fails(2.1, Bound::Absolute(0.09)) && !fails(2.1, Bound::Absolute(0.11)));
    assert!(fails(f64::NAN, Bound::Absolute(1e9)) && fails(f64::INFINITY, Bound::Relative(1e9)));
}
