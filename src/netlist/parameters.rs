//! Every number of a netlist that has a path: nominal value, spread, and the value in force.
//!
//! Elements keep a `Value` (an index) and read it in `derive`, so that corners and samples change numbers
//! without reading text again.

use crate::diag::Span;
use crate::units::Kind;
use std::collections::{BTreeMap, BTreeSet};
use std::sync::{Arc, Mutex};

/// Handle of one parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Value(u32);

/// One number of the netlist.
#[derive(Clone, Debug)]
pub struct Parameter {
    /// `elements.catch.series_resistance`, `parts.board_diode.ideality_factor`, `ambient`.
    pub path: String,
    /// What it measures.
    pub kind: Kind,
    /// The value as written [SI].
    pub nominal: f64,
    /// Lowest and highest value [SI]; equal to `nominal` without a spread.
    pub spread: (f64, f64),
    /// Where it stands; None for a default.
    pub span: Option<Span>,
}

impl Parameter {
    /// True where a spread was written.
    pub fn has_spread(&self) -> bool {
        self.spread.0 < self.spread.1
    }
}

/// The parameters of one netlist, in the order of reading.
#[derive(Clone, Debug, Default)]
pub struct Parameters {
    entries: Vec<Parameter>,
    by_path: BTreeMap<String, Value>,
}

impl Parameters {
    /// Adds a parameter, or returns the handle of the one that already has this path.
    pub fn add(&mut self, parameter: Parameter) -> Value {
        if let Some(&value) = self.by_path.get(&parameter.path) {
            return value;
        }
        let value = Value(self.entries.len() as u32);
        self.by_path.insert(parameter.path.clone(), value);
        self.entries.push(parameter);
        value
    }

    /// The handle of a path.
    pub fn find(&self, path: &str) -> Option<Value> {
        self.by_path.get(path).copied()
    }

    /// The entry of a handle.
    pub fn get(&self, value: Value) -> &Parameter {
        &self.entries[value.0 as usize]
    }

    /// All entries with their handles, in the order of reading.
    pub fn iter(&self) -> impl Iterator<Item = (Value, &Parameter)> {
        self.entries
            .iter()
            .enumerate()
            .map(|(k, entry)| (Value(k as u32), entry))
    }

    /// The nominal values.
    pub fn nominal(&self) -> Values {
        Values {
            numbers: Arc::new(self.entries.iter().map(|entry| entry.nominal).collect()),
            trace: None,
        }
    }
}

/// Values in force, one per parameter [SI].
#[derive(Clone, Debug)]
pub struct Values {
    /// Shared, so that tracing copies nothing: every element of a circuit is traced once.
    numbers: Arc<Vec<f64>>,
    /// Handles read since tracing began; None while nobody asks.
    trace: Option<Arc<Mutex<BTreeSet<Value>>>>,
}

impl Values {
    /// Changes one value.
    pub fn set(&mut self, value: Value, number: f64) {
        Arc::make_mut(&mut self.numbers)[value.0 as usize] = number;
    }

    /// Runs `work` and tells which values it read: what an element's numbers depend on.
    pub fn traced<T>(&self, work: impl FnOnce(&Values) -> T) -> (T, BTreeSet<Value>) {
        let trace = Arc::new(Mutex::new(BTreeSet::new()));
        let values = Values {
            numbers: Arc::clone(&self.numbers),
            trace: Some(Arc::clone(&trace)),
        };
        let result = work(&values);
        let read = std::mem::take(
            &mut *trace
                .lock()
                .expect("nothing panics while it holds the trace"),
        );
        (result, read)
    }
}

impl std::ops::Index<Value> for Values {
    type Output = f64;
    fn index(&self, value: Value) -> &f64 {
        if let Some(trace) = &self.trace {
            trace
                .lock()
                .expect("nothing panics while it holds the trace")
                .insert(value);
        }
        &self.numbers[value.0 as usize]
    }
}
