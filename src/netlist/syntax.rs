//! What the YAML parser refuses, in words for the person who wrote the line.

use super::events::DEEPEST;
use crate::diag::{Diagnostic, FileId, Span};

/// A fault the parser found.
pub struct Fault<'a> {
    /// The text's number.
    pub file: FileId,
    /// The whole text.
    pub text: &'a str,
    /// The byte at which the parser stopped.
    pub at: usize,
    /// What it says.
    pub info: &'a str,
    /// Start of the innermost list or mapping that is still open.
    pub open: Option<usize>,
}

/// One kind of fault: a piece of the parser's own words, the message's word, headline, label and help.
type Row = (
    &'static str,
    &'static str,
    &'static str,
    &'static str,
    &'static str,
);

const ROWS: &[Row] = &[
    (
        "unknown anchor",
        "alias",
        "references with `*` are not part of a netlist",
        "a reference",
        "write the value out, or use `part:` for shared keys; a text that begins with `*` is put in quotes",
    ),
    (
        "scanning an anchor or alias",
        "alias",
        "a text cannot begin with `*` or `&`",
        "here",
        "put the text in quotes",
    ),
    (
        "recursion limit",
        "too-deep",
        "lists and mappings stand too deep in one another",
        "one too many",
        "a netlist needs less than ten",
    ),
    (
        "unexpected character",
        "yaml-syntax",
        "a text cannot begin with this character",
        "here",
        "put the text in quotes",
    ),
    (
        "invalid trailing content",
        "yaml-syntax",
        "something stands behind the closing quote",
        "behind the quote",
        "quotes enclose the whole text",
    ),
    (
        "unexpected end of stream",
        "yaml-syntax",
        "a quote is opened and not closed",
        "opened here",
        "close the quote, or double it where it belongs to the text",
    ),
    (
        "unknown escape",
        "yaml-syntax",
        "a backslash in double quotes begins an escape, and this is none",
        "here",
        "use single quotes, or write the backslash twice",
    ),
    (
        "misplaced bracket",
        "yaml-syntax",
        "a bracket is closed that was not opened",
        "closed here",
        "remove it, or put the text in quotes",
    ),
    (
        "expected node content",
        "yaml-syntax",
        "a value is missing before this",
        "here",
        "write the value, or put a text that begins with this in quotes",
    ),
    (
        "block sequence entries",
        "yaml-syntax",
        "an item with `-` cannot stand here",
        "here",
        "items with `-` stand on lines of their own; on one line a list has brackets: `[a, b]`",
    ),
    (
        "parsing a block mapping",
        "yaml-syntax",
        "this line is indented unlike the keys above it",
        "not where the keys of this mapping begin",
        "keys of one mapping begin in the same column",
    ),
    (
        "parsing a block collection",
        "yaml-syntax",
        "this line is indented unlike the items above it",
        "not where the items of this list begin",
        "items of one list begin in the same column",
    ),
    (
        "scanning a block scalar",
        "yaml-syntax",
        "a text of several lines begins wrongly",
        "here",
        "behind `|` or `>` the text begins on the next line, indented",
    ),
    (
        "invalid indentation",
        "yaml-syntax",
        "this line is indented less than what it belongs to",
        "here",
        "indent it further than the key it belongs to, or close the quote or bracket before it",
    ),
];

/// The fault as a message with its place and, where it can be guessed, the remedy.
pub fn explain(fault: &Fault<'_>) -> Diagnostic {
    if let Some(tab) = fault.tab() {
        return Diagnostic::error("tab-indentation", "a line is indented with a tab")
            .at(tab, "a tab")
            .help("indent with spaces; YAML takes no tabs there");
    }
    let here = fault.here();
    let info = fault.info;
    if info.contains("mapping values are not allowed") || info.contains("illegal placement") {
        return fault.second_colon();
    }
    if info.contains("simple key expect") || info.contains("simple key expected") {
        return Diagnostic::error(
            "yaml-syntax",
            "a line is neither `key: value` nor an item of a list",
        )
        .at(fault.line_before(), "no `: ` in it")
        .help(
            "a colon and a blank stand between key and value; a text of several lines is indented",
        );
    }
    let ended = fault.text[fault.at..].trim().is_empty();
    if ended && info.contains("expected node content") && fault.opening().is_some() {
        return fault.unclosed();
    }
    if info.contains("flow mapping")
        || info.contains("flow sequence")
        || info.contains("flow construct")
    {
        return fault.unclosed();
    }
    match ROWS.iter().find(|(piece, ..)| info.contains(piece)) {
        Some((_, "too-deep", ..)) => too_deep(here),
        Some((_, word, headline, label, help)) => Diagnostic::error(word, *headline)
            .at(here, *label)
            .help(*help),
        None => Diagnostic::error("yaml-syntax", format!("this is not YAML: {info}"))
            .at(here, "stopped here"),
    }
}

/// Too many lists and mappings in one another.
pub fn too_deep(span: Span) -> Diagnostic {
    let headline = format!("lists and mappings stand more than {DEEPEST} deep in one another");
    Diagnostic::error("too-deep", headline)
        .at(span, "one too many")
        .help("a netlist needs less than ten")
}

impl Fault<'_> {
    fn span(&self, start: usize, end: usize) -> Span {
        Span {
            file: self.file,
            start,
            end,
        }
    }

    /// The character at which the parser stopped; behind the end of the text its last one.
    fn here(&self) -> Span {
        let rest = &self.text[self.at..];
        if rest.trim().is_empty() {
            let end = self.text.trim_end().len();
            let last = self.text[..end]
                .chars()
                .next_back()
                .map_or(0, char::len_utf8);
            return self.span(end - last, end);
        }
        let width = rest.chars().next().map_or(0, char::len_utf8);
        self.span(self.at, self.at + width)
    }

    /// A tab in the indentation of the line of the fault or of the line behind it.
    fn tab(&self) -> Option<Span> {
        let start = self.text[..self.at].rfind('\n').map_or(0, |at| at + 1);
        let mut begin = start;
        for line in self.text[start..].split_inclusive('\n').take(2) {
            let indent = line.len() - line.trim_start_matches([' ', '\t']).len();
            let blank = line.trim().is_empty();
            if let Some(tab) = line[..indent].find('\t').filter(|_| !blank) {
                return Some(self.span(begin + tab, begin + indent));
            }
            begin += line.len();
        }
        None
    }

    /// A colon where no key can end: a second one in a line, or a line indented further than its neighbours.
    fn second_colon(&self) -> Diagnostic {
        let start = self.text[..self.at].rfind('\n').map_or(0, |at| at + 1);
        let before = &self.text[start..self.at];
        if before.contains(": ") {
            return Diagnostic::error("yaml-syntax", "a second `: ` stands in one line")
                .at(self.here(), "not a key before this")
                .help("a text with `: ` in it is put in quotes; a mapping on one line has braces: `{key: value}`");
        }
        let indent = before.len() - before.trim_start().len();
        Diagnostic::error("yaml-syntax", "this line is indented unlike the keys above it")
            .at(self.span(start + indent, self.at.max(start + indent)), "a key, but not in the column of the others")
            .help("keys of one mapping begin in the same column; what belongs to a key is indented further")
    }

    /// The last line before the fault that has something in it.
    fn line_before(&self) -> Span {
        let end = self.text[..self.at].trim_end().len();
        let start = self.text[..end].rfind('\n').map_or(0, |at| at + 1);
        let indent = self.text[start..end].len() - self.text[start..end].trim_start().len();
        self.span(start + indent, end)
    }

    /// The innermost open bracket or brace.
    fn opening(&self) -> Option<char> {
        let first = self.text[self.open?..].chars().next()?;
        matches!(first, '[' | '{').then_some(first)
    }

    /// A bracket or brace that was not closed in time.
    fn unclosed(&self) -> Diagnostic {
        let brace = self
            .opening()
            .map_or(self.info.contains("mapping"), |sign| sign == '{');
        let (name, close) = if brace {
            ("brace", "}")
        } else {
            ("bracket", "]")
        };
        let mut diagnostic = Diagnostic::error(
            "yaml-syntax",
            format!("a {name} is not closed, or a comma is missing before this"),
        )
        .at(
            self.here(),
            format!("`,` or `{close}` is expected before this"),
        );
        if let Some(open) = self.open.filter(|_| self.opening().is_some()) {
            diagnostic = diagnostic.at(self.span(open, open + 1), "opened here");
        }
        diagnostic.help("a text with `,`, `[`, `]`, `{` or `}` in it is put in quotes")
    }
}
