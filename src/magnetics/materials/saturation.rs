//! `saturation`: one flux density, or a table over temperature, straight between its points.

use crate::diag::Diagnostic;
use crate::magnetics::geometry::Remark;
use crate::netlist::{Data, Fields, Node, Value, Values};
use crate::units::{FLUX_DENSITY, Kind, TEMPERATURE, engineering};

/// A saturation as written.
#[derive(Clone, Debug)]
pub enum Saturation {
    /// At every temperature.
    Constant(Value),
    /// Pairs of temperature and flux density.
    Table(Vec<(Value, Value)>),
}

impl Saturation {
    /// Saturation [T] at a `temperature` [K]; beyond the table its end value, with a caution.
    pub fn at(&self, values: &Values, temperature: f64) -> (f64, Option<Remark>) {
        let table = match self {
            Saturation::Constant(value) => return (values[*value], None),
            Saturation::Table(table) => table,
        };
        let point = |k: usize| (values[table[k].0], values[table[k].1]);
        let after = table.partition_point(|&(t, _)| values[t] < temperature);
        if after == 0 || after == table.len() {
            let (end, saturation) = point(after.min(table.len() - 1));
            return (
                saturation,
                (end != temperature).then(|| beyond(end, temperature)),
            );
        }
        let ((low, from), (high, to)) = (point(after - 1), point(after));
        (
            from + (to - from) * (temperature - low) / (high - low),
            None,
        )
    }
}

fn beyond(end: f64, temperature: f64) -> Remark {
    let text = format!(
        "saturation is not given at {}; that at {} is used",
        engineering(temperature, TEMPERATURE, 4),
        engineering(end, TEMPERATURE, 4)
    );
    Remark::new("saturation-range", text)
}

/// Reads a saturation; what is wrong is reported.
pub fn saturation(fields: &Fields<'_>, key: &str) -> Option<Saturation> {
    let (node, path) = fields.node_and_path(key)?;
    let reader = fields.reader();
    let Data::List(items) = &node.data else {
        let amount = reader.amount(node, key, FLUX_DENSITY)?;
        return above_zero(fields, node, key, amount.low)
            .then(|| reader.value(node, &path, FLUX_DENSITY))?
            .map(Saturation::Constant);
    };
    let mut table = Vec::new();
    let mut last = f64::NEG_INFINITY;
    for (k, item) in items.iter().enumerate() {
        let [t, b] = item.items() else {
            return refuse(
                fields,
                item,
                "saturation over temperature is a list of pairs",
                "a pair is [25 °C, 0.45 T]",
            );
        };
        let read = |node: &Node, place: usize, kind: Kind| {
            let amount = reader.amount(node, key, kind)?;
            Some((
                amount,
                reader.value(node, &format!("{path}.{k}.{place}"), kind)?,
            ))
        };
        let ((temperature, t_value), (density, b_value)) =
            read(t, 0, TEMPERATURE).zip(read(b, 1, FLUX_DENSITY))?;
        if temperature.low <= last {
            return refuse(
                fields,
                t,
                "temperatures of saturation must rise from row to row",
                "not above the row before",
            );
        }
        if !above_zero(fields, b, key, density.low) {
            return None;
        }
        last = temperature.high;
        table.push((t_value, b_value));
    }
    if table.is_empty() {
        return refuse(
            fields,
            node,
            "saturation over temperature needs a row",
            "an empty list",
        );
    }
    Some(Saturation::Table(table))
}

fn above_zero(fields: &Fields<'_>, node: &Node, key: &str, lowest: f64) -> bool {
    let holds = lowest > 0.0;
    if !holds {
        fields.reader().error(
            node,
            "out-of-range",
            format!("{key} must be above zero"),
            "not above zero",
        );
    }
    holds
}

fn refuse(fields: &Fields<'_>, node: &Node, headline: &str, label: &str) -> Option<Saturation> {
    let diagnostic = Diagnostic::error("bad-curve", headline).at(node.span, label);
    fields
        .reader()
        .sink
        .report(diagnostic.help("saturation: [[25 °C, 0.45 T], [100 °C, 0.36 T]]"));
    None
}
