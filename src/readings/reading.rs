//! The `readings:` of a netlist.

use super::final_value::Final;
use super::{Ask, Needs, READINGS, ReadingKind, Taking};
use crate::diag::Diagnostic;
use crate::netlist::{Fields, Key, Named, Takes, Value, Values};
use crate::signals::{Window, WrittenInstant, WrittenPhrase, read_instant, read_phrase};
use crate::units::{self, Kind};

/// The netlist's key for readings.
pub const KEY: Key = Key::optional(
    "readings",
    Takes::Other("a mapping from names to readings"),
    "numbers taken from waveforms",
);

/// The words of `take:`.
const WORDS: [&str; READINGS.len()] = {
    let mut words = [""; READINGS.len()];
    let mut k = 0;
    while k < READINGS.len() {
        words[k] = READINGS[k].word;
        k += 1;
    }
    words
};

const INSTANT: Takes = Takes::Other("a time like `20 ms` or an event like `k1_driver opens`");
const LEVEL: Takes = Takes::Other("a quantity of the signal's kind");

/// The keys of one reading.
pub const KEYS: &[Key] = &[
    Key::required("signal", Takes::Phrase, "the waveform, as a signal phrase"),
    Key::required("take", Takes::Word(&WORDS), "which number to take from it"),
    Key::optional(
        "from",
        INSTANT,
        "beginning of the window; without it, of the run",
    ),
    Key::optional("to", INSTANT, "end of the window; without it, of the run"),
    Key::optional("at", INSTANT, "the instant of `value_at`"),
    Key::optional("level", LEVEL, "the level of `time_above` and `time_below`"),
    Key::optional("rises_to", LEVEL, "the level that is risen to"),
    Key::optional("falls_to", LEVEL, "the level that is fallen to"),
];

/// A reading as written.
#[derive(Clone, Debug)]
pub struct Reading {
    /// Its name.
    pub name: Named,
    /// Its waveform.
    pub signal: WrittenPhrase,
    /// What it takes.
    pub kind: &'static ReadingKind,
    /// Beginning of its window; for `value_at` the instant.
    pub from: Option<WrittenInstant>,
    /// End of its window; for `value_at` the instant.
    pub to: Option<WrittenInstant>,
    /// The level, where it has one, and whether that is risen to.
    pub level: Option<(Value, bool)>,
}

impl Reading {
    /// What its value measures.
    pub fn result(&self) -> Kind {
        (self.kind.result)(self.signal.phrase.kind())
    }

    /// Starts it with the values in force.
    pub fn start(&self, values: &Values) -> Taking {
        let ask = self.level.map_or(Ask::default(), |(level, rising)| Ask {
            level: values[level],
            rising,
        });
        Taking::new(self.window(values), (self.kind.make)(&ask), self.result())
    }

    /// Starts it for an operating point, where every reading takes `final` and has no window: its value is the
    /// signal's, whatever `take` says.
    pub fn start_at_rest(&self) -> Taking {
        Taking::new(
            Window::default(),
            Box::new(Final::default()),
            self.signal.phrase.kind(),
        )
    }

    /// Its window with the values in force.
    pub fn window(&self, values: &Values) -> Window {
        let with =
            |instant: &Option<WrittenInstant>| instant.as_ref().map(|instant| instant.with(values));
        Window {
            from: with(&self.from),
            to: with(&self.to),
        }
    }

    /// The events that it names.
    pub fn events(&self) -> impl Iterator<Item = &WrittenInstant> {
        let both = [&self.from, &self.to].into_iter().flatten();
        both.filter(|instant| instant.event().is_some())
    }
}

/// Reads all of `readings:` of the netlist at the top, whose table must hold [`KEY`]. What is wrong goes to the
/// sink; what is right is returned, in the order of the file.
pub fn read_readings(top: &Fields<'_>) -> Vec<Reading> {
    let entries = top.entries(KEY.name);
    let read = entries.into_iter().filter_map(|entry| {
        let fields = Fields::new(entry.node, entry.path.clone(), KEYS, top.reader());
        let reading = read_one(&fields, entry.name);
        fields.finish();
        reading
    });
    read.collect()
}

fn read_one(fields: &Fields<'_>, name: Named) -> Option<Reading> {
    let signal = read_phrase(fields, "signal");
    let kind = fields.word("take").and_then(ReadingKind::find);
    let kind = kind.filter(|kind| suits(fields, kind))?;
    let signal = signal?;
    let (from, to) = match kind.needs {
        Needs::Instant => {
            let at = read_instant(fields, "at")?;
            (Some(at.clone()), Some(at))
        }
        _ => (
            optional_instant(fields, "from")?,
            optional_instant(fields, "to")?,
        ),
    };
    check_order(fields)?;
    let level = match kind.needs {
        Needs::Window | Needs::Instant => None,
        Needs::Level => Some((level(fields, "level", &signal)?, false)),
        Needs::Passing if fields.has("rises_to") => {
            Some((level(fields, "rises_to", &signal)?, true))
        }
        Needs::Passing => Some((level(fields, "falls_to", &signal)?, false)),
    };
    Some(Reading {
        name,
        signal,
        kind,
        from,
        to,
        level,
    })
}

/// None where it is written and wrong.
fn optional_instant(fields: &Fields<'_>, key: &str) -> Option<Option<WrittenInstant>> {
    match fields.has(key) {
        true => read_instant(fields, key).map(Some),
        false => Some(None),
    }
}

/// Reads a level in the unit of its signal.
fn level(fields: &Fields<'_>, key: &str, signal: &WrittenPhrase) -> Option<Value> {
    let (node, path) = fields.node_and_path(key)?;
    fields.reader().value(node, &path, signal.phrase.kind())
}

/// Reports keys that the `take` does not use and those that it misses.
fn suits(fields: &Fields<'_>, kind: &ReadingKind) -> bool {
    let take = kind.word;
    let mut good = true;
    for key in ["from", "to", "at", "level", "rises_to", "falls_to"] {
        if fields.has(key) && !kind.needs.keys().contains(&key) {
            let headline = format!("`take: {take}` does not use `{key}`");
            let used = kind.needs.keys().join("`, `");
            fields.error(
                key,
                "unused-key",
                headline,
                format!("it uses `{used}`"),
                None,
            );
            good = false;
        }
    }
    let missing = match kind.needs {
        Needs::Instant if !fields.has("at") => Some(("`at`", "at: 20 ms")),
        Needs::Level if !fields.has("level") => Some(("`level`", "level: 5 V")),
        Needs::Passing if !fields.has("rises_to") && !fields.has("falls_to") => {
            Some(("`falls_to` or `rises_to`", "falls_to: 8 mA"))
        }
        _ => None,
    };
    if let Some((keys, example)) = missing {
        let diagnostic = Diagnostic::error("missing-key", format!("`take: {take}` needs {keys}"))
            .at(fields.span("take"), format!("{keys} is missing"))
            .help(format!("for instance `{example}`"));
        fields.reader().sink.report(diagnostic);
        return false;
    }
    if kind.needs == Needs::Passing && fields.has("rises_to") && fields.has("falls_to") {
        let headline = format!("`take: {take}` takes one of `rises_to` and `falls_to`, got both");
        fields.error(
            "falls_to",
            "contradiction",
            headline,
            "the second one",
            Some("make two readings of it"),
        );
        return false;
    }
    good
}

/// Refuses a window of two times that ends before it begins.
fn check_order(fields: &Fields<'_>) -> Option<()> {
    let time = |key| {
        let text = fields.node(key)?.text()?;
        units::parse_amount(text, units::TIME).ok()
    };
    if let (Some(from), Some(to)) = (time("from"), time("to"))
        && to.nominal < from.nominal
    {
        fields.error(
            "to",
            "empty-window",
            "the window ends before it begins",
            "before `from`",
            None,
        );
        return None;
    }
    Some(())
}

#[cfg(test)]
mod tests;
