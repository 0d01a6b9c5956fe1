//! What the YAML parser refuses, in words for the person who wrote the line.

use super::events::{DEEPEST, Offsets};
use crate::diag::{Diagnostic, FileId, Span};
use saphyr_parser::ScanError;

/// A syntax error as a message with its place and, where it can be guessed, the remedy.
pub fn explain(file: FileId, text: &str, offsets: &Offsets, error: &ScanError) -> Diagnostic {
    let start = offsets.byte(text, error.marker().index());
    let end = text[start..]
        .chars()
        .next()
        .filter(|c| *c != '\n')
        .map_or(start, |c| start + c.len_utf8());
    let here = Span { file, start, end };
    let line_start = text[..start].rfind('\n').map_or(0, |at| at + 1);
    let line = text[line_start..].lines().next().unwrap_or("");
    let info = error.info();
    if info.contains("recursion") {
        let headline = format!("lists and mappings stand more than {DEEPEST} deep in one another");
        return Diagnostic::error("too-deep", headline)
            .at(here, "one too many")
            .help("a netlist needs less than ten");
    }
    let indent = line.len() - line.trim_start_matches([' ', '\t']).len();
    if let Some(tab) = line[..indent].find('\t') {
        let at = Span {
            file,
            start: line_start + tab,
            end: line_start + indent,
        };
        return Diagnostic::error("tab-indentation", "a line is indented with a tab")
            .at(at, "a tab")
            .help("indent with spaces; YAML takes no tabs there");
    }
    let mut diagnostic = Diagnostic::error("yaml-syntax", format!("this is not YAML: {info}"))
        .at(here, "stopped here");
    if info.contains("mapping values are not allowed") {
        diagnostic = diagnostic.help(
            "a text with `: ` in it is put in quotes; keys of one mapping are indented alike",
        );
    }
    diagnostic
}
