//! Faulty netlists for tests, with the expected messages written beside the fault.
//!
//! ```yaml
//! elements:
//!   # error[unknown-key]: did you mean `resistance`
//!   load: {kind: resistor, resistence: 4 Ω}
//! ```
//! The comment stands above the line at which the message must point; behind the colon stands a piece of the
//! message as drawn (headline, label or help). `# error[...]` at the file's end expects a message without a place.

use super::{Document, Reader, read_document};
use crate::diag::{Diagnostic, Paint, Sink, Sources, draw};

/// One expectation: severity and word, the line (None for a message without a place), a piece of the text.
#[derive(Clone, Debug, PartialEq)]
pub struct Expected {
    /// `error[unknown-key]`.
    pub tag: String,
    /// Line from 1.
    pub line: Option<usize>,
    /// A piece of the message.
    pub piece: String,
}

/// The expectations written in a netlist's comments.
pub fn expected(text: &str) -> Vec<Expected> {
    let mut waiting: Vec<(String, String)> = Vec::new();
    let mut found = Vec::new();
    for (number, line) in text.lines().enumerate() {
        let comment = line.trim_start().strip_prefix("# ");
        let tagged = comment.and_then(|comment| comment.split_once("]: "));
        match tagged {
            Some((tag, piece))
                if ["error[", "caution[", "note["]
                    .iter()
                    .any(|lead| tag.starts_with(lead)) =>
            {
                waiting.push((format!("{tag}]"), piece.trim().to_owned()));
            }
            _ => found.extend(waiting.drain(..).map(|(tag, piece)| Expected {
                tag,
                line: Some(number + 1),
                piece,
            })),
        }
    }
    found.extend(waiting.into_iter().map(|(tag, piece)| Expected {
        tag,
        line: None,
        piece,
    }));
    found
}

/// Reads a text, lets a room's own reader take it apart, and returns what differs from the expectations in it.
pub fn differences(text: &str, read: impl FnOnce(&Document, &Reader<'_>)) -> Vec<String> {
    let mut sources = Sources::new();
    let sink = Sink::new();
    if let Some(document) = read_document("netlist.yaml", text.as_bytes(), &mut sources, &sink) {
        read(&document, &Reader::new(&sink));
    }
    mismatches(text, &sink.sorted(), &sources)
}

/// What differs between the expectations in a text and the messages about it; empty where they agree.
pub fn mismatches(text: &str, diagnostics: &[Diagnostic], sources: &Sources) -> Vec<String> {
    let mut left: Vec<Expected> = expected(text);
    let mut differences = Vec::new();
    for diagnostic in diagnostics {
        let tag = format!("{}[{}]", diagnostic.severity.name(), diagnostic.word);
        let line = diagnostic.span().map(|span| sources.place(span).line);
        let drawn = draw(diagnostic, sources, Paint::Plain);
        let fits = |wanted: &Expected| {
            wanted.tag == tag && wanted.line == line && drawn.contains(&wanted.piece)
        };
        match left.iter().position(fits) {
            Some(at) => drop(left.remove(at)),
            None => differences.push(format!("not expected:\n{drawn}")),
        }
    }
    differences.extend(left.iter().map(|wanted| {
        let place = wanted.line.map_or("without a place".to_owned(), |line| {
            format!("at line {line}")
        });
        format!("missing {place}: {}: {}", wanted.tag, wanted.piece)
    }));
    differences
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::diag::Span;

    #[test]
    fn expectations_are_met_by_line_word_and_text() {
        let text = "a: 1\n# error[x-y]: some\n# error[z]: thing\nb: 2\n";
        let wanted = expected(text);
        assert_eq!(wanted.len(), 2);
        assert_eq!(
            wanted[1],
            Expected {
                tag: "error[z]".into(),
                line: Some(4),
                piece: "thing".into()
            }
        );
        let mut sources = Sources::new();
        let file = sources.add("n", text);
        let span = Span {
            file,
            start: text.find("b:").unwrap(),
            end: text.len(),
        };
        let first = Diagnostic::error("x-y", "something").at(span, "");
        let second = Diagnostic::error("z", "another").at(span, "a thing");
        assert!(mismatches(text, &[first.clone(), second], &sources).is_empty());
        assert_eq!(
            mismatches(text, std::slice::from_ref(&first), &sources).len(),
            1
        );
        let elsewhere = Diagnostic::error("z", "a thing").at(Span { start: 0, ..span }, "");
        assert_eq!(mismatches(text, &[first, elsewhere], &sources).len(), 2);
    }
}
