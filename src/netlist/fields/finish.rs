//! What must be there and is not, what is there and not known.

use super::{Fields, Layer};
use crate::diag::Diagnostic;
use crate::netlist::keys::Need;
use crate::netlist::names::nearest;
use crate::netlist::node::Entry;
use crate::netlist::reader::words;
use crate::netlist::shortened;

impl<'a> Fields<'a> {
    /// Ends the reading: unknown keys are reported with the nearest known word, and required ones that were never
    /// asked for where they are missing.
    pub fn finish(&self) {
        for layer in [Some(&self.own), self.behind.as_ref()]
            .into_iter()
            .flatten()
        {
            for entry in layer.node.entries() {
                if !words(&self.tables).any(|word| word == entry.key) {
                    self.unknown(layer, entry);
                }
            }
        }
        let all = self.tables.iter().flat_map(|table| table.iter());
        for key in all.filter(|key| matches!(key.need, Need::Required)) {
            if !self.has(key.name) {
                self.missing(key.name);
            }
        }
    }

    /// The key that an unknown one is probably meant to be: the nearest that is not written yet.
    pub(super) fn meant(&self, layer: &Layer<'a>, entry: &Entry) -> Option<&'static str> {
        if words(&self.tables).any(|word| word == entry.key) {
            return None;
        }
        let free = words(&self.tables).filter(|word| layer.node.get(word).is_none());
        // A blank left out behind the colon makes `kind:switch` one word.
        nearest(entry.key.split(':').next().unwrap_or(""), free)
    }

    pub(super) fn unknown(&self, layer: &Layer<'a>, entry: &Entry) {
        let whose = if layer.path.is_empty() {
            "the netlist".to_owned()
        } else {
            format!("`{}`", layer.path)
        };
        let headline = format!("`{}` is no key of {whose}", shortened(&entry.key));
        let diagnostic = Diagnostic::error("unknown-key", headline);
        let diagnostic = match self.meant(layer, entry) {
            // `{kind:switch}` is one word to YAML.
            _ if entry.value.is_empty() && entry.key.contains(':') => {
                let mended = shortened(&entry.key).replacen(':', ": ", 1);
                diagnostic
                    .at(entry.key_span, "a blank belongs behind the colon")
                    .help(mended)
            }
            Some(near) => diagnostic.at(entry.key_span, format!("did you mean `{near}`?")),
            None => match nearest(&entry.key, words(&self.tables)) {
                Some(near) => {
                    let label = format!("did you mean `{near}`, which is written already?");
                    diagnostic.at(entry.key_span, label)
                }
                None => {
                    let known: Vec<&str> = words(&self.tables).collect();
                    diagnostic
                        .at(entry.key_span, "unknown")
                        .help(format!("keys here: {}", known.join(", ")))
                }
            },
        };
        self.reader.sink.report(diagnostic);
    }
}
