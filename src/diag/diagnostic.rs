//! One message, and its form in JSON.

use super::sources::{Sources, Span};
use serde_json::{Value, json};

/// How much it matters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Severity {
    /// The input is refused.
    Error,
    /// The input is taken, and somebody should look.
    Caution,
    /// For information.
    Note,
}

impl Severity {
    /// `error`, `caution`, `note`.
    pub fn name(self) -> &'static str {
        match self {
            Severity::Error => "error",
            Severity::Caution => "caution",
            Severity::Note => "note",
        }
    }
}

/// One message: a word to look up, a headline that stands alone, labels on exact text, help that can be typed.
#[derive(Clone, Debug, PartialEq)]
pub struct Diagnostic {
    /// Identifier of the message: `wrong-dimension`.
    pub word: &'static str,
    /// How much it matters.
    pub severity: Severity,
    /// A sentence that says it all.
    pub headline: String,
    /// Places with a remark each; the first is where the message stands. May be empty (a file that is not there).
    pub labels: Vec<(Span, String)>,
    /// What would be right.
    pub help: Vec<String>,
}

impl Diagnostic {
    /// An error.
    pub fn error(word: &'static str, headline: impl Into<String>) -> Self {
        Diagnostic::of(Severity::Error, word, headline)
    }

    /// A caution.
    pub fn caution(word: &'static str, headline: impl Into<String>) -> Self {
        Diagnostic::of(Severity::Caution, word, headline)
    }

    /// A note.
    pub fn note(word: &'static str, headline: impl Into<String>) -> Self {
        Diagnostic::of(Severity::Note, word, headline)
    }

    fn of(severity: Severity, word: &'static str, headline: impl Into<String>) -> Self {
        Diagnostic {
            word,
            severity,
            headline: headline.into(),
            labels: Vec::new(),
            help: Vec::new(),
        }
    }

    /// Adds a label; the first one is the message's place.
    #[must_use]
    pub fn at(mut self, span: Span, label: impl Into<String>) -> Self {
        self.labels.push((span, label.into()));
        self
    }

    /// Adds a line of help.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help.push(help.into());
        self
    }

    /// Where it stands.
    pub fn span(&self) -> Option<Span> {
        self.labels.first().map(|(span, _)| *span)
    }

    /// `{word, severity, file, line, column, headline, help}`; file, line and column are null without a place.
    /// Several helps are joined by line ends.
    pub fn to_json(&self, sources: &Sources) -> Value {
        let place = self
            .span()
            .map(|span| (sources.name(span.file), sources.place(span)));
        json!({
            "word": self.word,
            "severity": self.severity.name(),
            "file": place.map(|(name, _)| name),
            "line": place.map(|(_, place)| place.line),
            "column": place.map(|(_, place)| place.column),
            "headline": self.headline,
            "help": if self.help.is_empty() { None } else { Some(self.help.join("\n")) },
        })
    }
}

/// `{diagnostics: [...]}`, the object that a refused command prints.
pub fn to_json(diagnostics: &[Diagnostic], sources: &Sources) -> Value {
    let list: Vec<Value> = diagnostics
        .iter()
        .map(|diagnostic| diagnostic.to_json(sources))
        .collect();
    json!({ "diagnostics": list })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn json_has_the_fields_of_the_contract() {
        let mut sources = Sources::new();
        let file = sources.add("supply.yaml", "title: x\ngap: 1 F\n");
        let diagnostic =
            Diagnostic::error("wrong-dimension", "gap takes m, got 1 F, a capacitance")
                .at(
                    Span {
                        file,
                        start: 14,
                        end: 17,
                    },
                    "here",
                )
                .help("gap: 1 mm");
        assert_eq!(
            to_json(&[diagnostic], &sources).to_string(),
            r#"{"diagnostics":[{"word":"wrong-dimension","severity":"error","file":"supply.yaml","line":2,"column":6,"headline":"gap takes m, got 1 F, a capacitance","help":"gap: 1 mm"}]}"#
        );
    }

    #[test]
    fn a_message_without_a_place_says_null() {
        let json = Diagnostic::error("unreadable-file", "no such file").to_json(&Sources::new());
        assert!(json["file"].is_null() && json["line"].is_null() && json["help"].is_null());
    }
}
