//! Bytes to a document: the event parser's stream turned into a tree, with limits that keep hostile input harmless.

use super::events::build;
use super::node::Node;
use crate::diag::{Diagnostic, FileId, Sink, Sources, Span};

/// Bytes of a file that are read at most.
pub const LARGEST_FILE: usize = 16 << 20;

/// A read netlist: the tree of its text, with what was brought and overridden merged in.
#[derive(Clone, Debug, PartialEq)]
pub struct Document {
    /// The mapping at the top.
    pub root: Node,
}

/// Reads one text. Everything that is wrong goes to `sink`; None where there is no tree at all.
///
/// A duplicate key is reported and its first value kept, so that reading goes on to further errors.
pub fn read_document(
    name: &str,
    bytes: &[u8],
    sources: &mut Sources,
    sink: &Sink,
) -> Option<Document> {
    let text = checked_text(name, bytes, sources, sink)?;
    let file = sources.add(name, text);
    let root = build(file, sources.text(file), sink)?;
    let whole = Span {
        file,
        start: 0,
        end: 0,
    };
    if root.is_empty() {
        let diagnostic = Diagnostic::error("empty-file", format!("{name} holds no netlist"))
            .at(whole, "nothing but blanks and comments")
            .help("begin with one of the files in `netlists/`");
        sink.report(diagnostic);
        return None;
    }
    if !matches!(root.data, super::node::Data::Map(_)) {
        let headline = format!("a netlist is a mapping of keys, got {}", root.what());
        let diagnostic = Diagnostic::error("wrong-type", headline)
            .at(root.span, "the first line would be `title: ...`")
            .help(
                "elements:\n  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}",
            );
        sink.report(diagnostic);
        return None;
    }
    Some(Document { root })
}

/// Reads a piece of netlist that the program or an override brings, such as `{kind: diode, anode: a, cathode: b}`.
pub fn read_fragment(name: &str, text: &str, sources: &mut Sources, sink: &Sink) -> Option<Node> {
    let text = checked_text(name, text.as_bytes(), sources, sink)?;
    let file = sources.add(name, text);
    build(file, sources.text(file), sink)
}

/// The bytes as text without a byte order mark, or an error on what they are instead.
fn checked_text<'b>(
    name: &str,
    bytes: &'b [u8],
    sources: &mut Sources,
    sink: &Sink,
) -> Option<&'b str> {
    let bytes = bytes.strip_prefix("\u{feff}".as_bytes()).unwrap_or(bytes);
    let mut refuse =
        |word, headline: String, text: String, start: usize, label: &str, help: &str| {
            let file = sources.add(name, text);
            sink.report(
                Diagnostic::error(word, headline)
                    .at(
                        Span {
                            file,
                            start,
                            end: start + 1,
                        },
                        label,
                    )
                    .help(help),
            );
        };
    if bytes.len() > LARGEST_FILE {
        let headline = format!(
            "{name} has {} MiB, more than the {} MiB that a netlist may have",
            bytes.len() >> 20,
            LARGEST_FILE >> 20
        );
        refuse(
            "file-too-large",
            headline,
            String::new(),
            0,
            "not read",
            "a waveform belongs into a CSV file of its own",
        );
        return None;
    }
    if bytes.is_empty() {
        refuse(
            "empty-file",
            format!("{name} is empty"),
            String::new(),
            0,
            "nothing here",
            "begin with one of the files in `netlists/`",
        );
        return None;
    }
    let text = match std::str::from_utf8(bytes) {
        Ok(text) => text,
        Err(error) => {
            let (text, at) = readable_until(bytes, error.valid_up_to());
            let utf16 = bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]);
            let what = if utf16 {
                "is UTF-16 text"
            } else {
                "is no UTF-8 text"
            };
            let byte = bytes.get(error.valid_up_to()).copied().unwrap_or(0);
            let label = format!("byte 0x{byte:02x}");
            refuse(
                "not-text",
                format!("{name} {what}"),
                text,
                at,
                &label,
                "save the file as plain text in UTF-8",
            );
            return None;
        }
    };
    let odd = text
        .char_indices()
        .find(|(_, c)| c.is_control() && !matches!(c, '\n' | '\r' | '\t' | '\u{85}'));
    if let Some((at, c)) = odd {
        let headline = format!("{name} holds a control character, as a binary file does");
        let label = format!("character U+{:04X}", u32::from(c));
        let (kept, at) = readable_until(bytes, at);
        refuse(
            "not-text",
            headline,
            kept,
            at,
            &label,
            "a netlist is plain text in UTF-8",
        );
        return None;
    }
    Some(text)
}

/// The text up to a broken byte and the line's rest made readable, for the picture in the message.
fn readable_until(bytes: &[u8], at: usize) -> (String, usize) {
    let end = bytes.len().min(at + 60);
    let mut text = String::from_utf8_lossy(&bytes[..at]).into_owned();
    let place = text.len();
    let rest = String::from_utf8_lossy(&bytes[at..end]).into_owned();
    text.push_str(rest.split(['\n', '\r']).next().unwrap_or(""));
    (text, place)
}

impl Document {
    /// The source file of the top.
    pub fn file(&self) -> FileId {
        self.root.span.file
    }
}
