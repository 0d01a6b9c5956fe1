//! Values that belong to pairs of windings: one for all of them, or a mapping `A-B: value`.

use crate::netlist::{Fields, Value};
use crate::units::Kind;

/// A value of the pair (first, second), in the order as written.
pub type Pair = (usize, usize, Value);

/// Every two of `count` windings, in their order.
pub fn all(count: usize) -> impl Iterator<Item = (usize, usize)> {
    (0..count).flat_map(move |j| (j + 1..count).map(move |k| (j, k)))
}

/// Reads the values behind `key` for windings of these `names`.
pub fn read(fields: &Fields<'_>, key: &str, kind: Kind, names: &[String]) -> Option<Vec<Pair>> {
    if !fields.is_map(key) {
        let value = fields.value_as(key, kind)?;
        return Some(all(names.len()).map(|(j, k)| (j, k, value)).collect());
    }
    let mut pairs: Vec<Pair> = Vec::new();
    let mut sound = true;
    for entry in &fields.entries(key) {
        let written = |j: usize, k: usize| entry.name.text == format!("{}-{}", names[j], names[k]);
        let found = all(names.len())
            .flat_map(|(j, k)| [(j, k), (k, j)])
            .find(|&(j, k)| written(j, k));
        let Some((j, k)) = found else {
            sound = false;
            fields.error_at(
                entry.name.span,
                "unknown-pair",
                format!("`{}` is no pair of windings", entry.name.text),
                "not a pair `A-B` of these windings",
                &format!("the windings are {}", names.join(", ")),
            );
            continue;
        };
        if pairs.iter().any(|&(a, b, _)| (a, b) == (k, j)) {
            sound = false;
            fields.error_at(
                entry.name.span,
                "duplicate-key",
                format!("the pair `{}` is told twice", entry.name.text),
                "the other way round it stands above",
                "leave one of the two out",
            );
            continue;
        }
        match fields.entry_value(entry, kind) {
            Some(value) => pairs.push((j, k, value)),
            None => sound = false,
        }
    }
    sound.then_some(pairs)
}

/// Refuses a mapping that leaves a pair out.
pub fn complete(fields: &Fields<'_>, key: &str, names: &[String], pairs: &[Pair]) -> Option<()> {
    let told = |j: usize, k: usize| {
        pairs
            .iter()
            .any(|&(a, b, _)| (a, b) == (j, k) || (a, b) == (k, j))
    };
    let Some((j, k)) = all(names.len()).find(|&(j, k)| !told(j, k)) else {
        return Some(());
    };
    let pair = format!("{}-{}", names[j], names[k]);
    let headline = format!("`{key}` needs a value for each two windings, `{pair}` is missing");
    let label = format!("`{pair}` is missing");
    fields.error(key, "missing-key", headline, label, None);
    None
}
