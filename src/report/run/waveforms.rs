//! Recorded waveforms as CSV: one time column, one column per signal with its unit in the heading.

use crate::report::csv::{Column, numbers};
use crate::run::Outcome;
use crate::signals::resample::rows;

/// Rows that a file of waveforms has at most: more than any screen shows, few enough for a spreadsheet.
const MOST_ROWS: usize = 20_000;

/// The text of `waveforms.csv`.
pub fn csv(outcome: &Outcome) -> String {
    let rows = rows(&outcome.traces, 0.0, outcome.reached, MOST_ROWS);
    let mut times = Vec::with_capacity(rows.len());
    let mut values = vec![Vec::with_capacity(rows.len()); outcome.traces.len()];
    for row in &rows {
        times.push(row.time);
        for (column, value) in values.iter_mut().zip(&row.values) {
            column.push(*value);
        }
    }
    let mut columns = vec![Column {
        name: "time",
        unit: "s",
        values: &times,
    }];
    for (trace, values) in outcome.traces.iter().zip(&values) {
        columns.push(Column {
            name: &trace.name,
            unit: trace.kind.symbol,
            values,
        });
    }
    numbers(&columns)
}
