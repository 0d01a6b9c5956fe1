//! The event stream of the YAML parser turned into nodes, without recursion and with named limits.

use super::node::{Data, Entry, Node};
use super::syntax::{self, Fault};
use crate::diag::{Diagnostic, FileId, Sink, Span};
use saphyr_parser::{Event, Parser, ScalarStyle};
use std::collections::BTreeMap;

/// How deep lists and mappings may stand in one another.
pub const DEEPEST: usize = 64;

/// Builds the tree of one text; None after a fault that leaves no tree. An empty text gives an empty scalar.
pub fn build(file: FileId, text: &str, sink: &Sink) -> Option<Node> {
    let mut builder = Builder {
        file,
        offsets: Offsets::new(text),
        text,
        sink,
        open: Vec::new(),
        root: None,
        documents: 0,
    };
    let mut parser = Parser::new_from_str(text);
    while let Some(event) = parser.next_event() {
        match event {
            Ok((Event::StreamEnd, _)) => break,
            Ok((event, span)) => builder.take(event, span)?,
            Err(error) => {
                let fault = Fault {
                    file,
                    text,
                    at: builder.offsets.byte(text, error.marker().index()),
                    info: error.info(),
                    open: builder.open.last().map(|open| open.start),
                };
                sink.report(syntax::explain(&fault));
                return None;
            }
        }
    }
    let empty = Span {
        file,
        start: text.len(),
        end: text.len(),
    };
    Some(builder.root.unwrap_or(Node {
        span: empty,
        head: empty,
        data: Data::Scalar(String::new()),
    }))
}

/// A list or mapping whose end has not come yet.
struct Open {
    start: usize,
    head: Option<Span>,
    data: Data,
    /// The key whose value comes next.
    key: Option<(String, Span)>,
    /// Where each key stood first.
    seen: BTreeMap<String, Span>,
}

struct Builder<'a> {
    file: FileId,
    text: &'a str,
    offsets: Offsets,
    sink: &'a Sink,
    open: Vec<Open>,
    root: Option<Node>,
    documents: usize,
}

impl Builder<'_> {
    /// Takes one event; None ends the reading.
    fn take(&mut self, event: Event<'_>, at: saphyr_parser::Span) -> Option<()> {
        let mut span = self.offsets.span(self.file, self.text, at);
        match event {
            Event::DocumentStart(_) => {
                self.documents += 1;
                if self.documents > 1 {
                    return self.refuse(
                        "several-documents",
                        "a netlist is one YAML document, got a second",
                        span,
                        "a second one starts here",
                        "remove the line `---`",
                    );
                }
            }
            Event::Alias(_) => {
                return self.refuse("alias", "references with `*` are not part of a netlist", span, "a reference", "write the value out, or use `part:` for shared keys; a text that begins with `*` is put in quotes");
            }
            Event::Scalar(text, style, anchor, tag) => {
                self.plain(anchor, tag.is_some(), span)?;
                if style == ScalarStyle::Plain {
                    span.end = span.start + self.text[span.start..span.end].trim_end().len();
                }
                self.add(Node {
                    span,
                    head: span,
                    data: Data::Scalar(text.into_owned()),
                });
            }
            Event::SequenceStart(anchor, tag) => {
                self.plain(anchor, tag.is_some(), span)?;
                self.begin(Data::List(Vec::new()), span)?;
            }
            Event::MappingStart(anchor, tag) => {
                self.plain(anchor, tag.is_some(), span)?;
                self.begin(Data::Map(Vec::new()), span)?;
            }
            Event::SequenceEnd | Event::MappingEnd => self.end(span),
            Event::Nothing | Event::StreamStart | Event::StreamEnd | Event::DocumentEnd => {}
        }
        Some(())
    }

    fn refuse(
        &self,
        word: &'static str,
        headline: &str,
        span: Span,
        label: &str,
        help: &str,
    ) -> Option<()> {
        self.sink
            .report(Diagnostic::error(word, headline).at(span, label).help(help));
        None
    }

    /// Refuses anchors and tags; the value's span begins with them.
    fn plain(&self, anchor: usize, tag: bool, span: Span) -> Option<()> {
        let written = &self.text[span.start..span.end];
        let length = written.find(char::is_whitespace).unwrap_or(written.len());
        let mark = span.part(0..length);
        if anchor > 0 {
            return self.refuse(
                "anchor",
                "anchors with `&` are not part of a netlist",
                mark,
                "an anchor",
                "write the value out, or use `part:` for shared keys; a text that begins with `&` is put in quotes",
            );
        }
        if tag {
            return self.refuse(
                "tag",
                "tags with `!` are not part of a netlist",
                mark,
                "a tag",
                "remove the tag; a text that begins with `!` is put in quotes",
            );
        }
        Some(())
    }

    fn begin(&mut self, data: Data, span: Span) -> Option<()> {
        if self.open.len() >= DEEPEST {
            self.sink.report(syntax::too_deep(span));
            return None;
        }
        let head = self
            .open
            .last()
            .and_then(|parent| parent.key.as_ref())
            .map(|(_, span)| *span);
        self.open.push(Open {
            start: span.start,
            head,
            data,
            key: None,
            seen: BTreeMap::new(),
        });
        Some(())
    }

    fn end(&mut self, span: Span) {
        let Some(open) = self.open.pop() else {
            return;
        };
        let file = self.file;
        let closed = self.text[span.start..span.end].starts_with([']', '}']);
        // A block ends where its last item does; the parser says where the next thing begins.
        let end = match &open.data {
            // The parser counts what follows the bracket in.
            _ if closed => span.start + 1,
            Data::List(items) => items.last().map_or(open.start, |item| item.span.end),
            Data::Map(entries) => entries
                .last()
                .map_or(open.start, |entry| entry.value.span.end),
            Data::Scalar(_) => span.end,
        };
        let own = Span {
            file,
            start: open.start,
            end: end.max(open.start),
        };
        let point = Span {
            file,
            start: open.start,
            end: (open.start + 1).min(own.end),
        };
        self.add(Node {
            span: own,
            head: open.head.unwrap_or(point),
            data: open.data,
        });
    }

    /// Puts a finished node where it belongs.
    fn add(&mut self, mut node: Node) {
        let Some(parent) = self.open.last_mut() else {
            self.root = Some(node);
            return;
        };
        match &mut parent.data {
            Data::List(items) => items.push(node),
            Data::Map(entries) => match parent.key.take() {
                Some((key, key_span)) => {
                    node.head = key_span;
                    if let Some(&first) = parent.seen.get(&key) {
                        let shown = crate::netlist::shortened(&key);
                        let diagnostic = Diagnostic::error(
                            "duplicate-key",
                            format!("`{shown}` is written twice"),
                        )
                        .at(key_span, "a second time")
                        .at(first, "first here")
                        .help("remove one of them or rename it");
                        self.sink.report(diagnostic);
                        return;
                    }
                    parent.seen.insert(key.clone(), key_span);
                    entries.push(Entry {
                        key,
                        key_span,
                        value: node,
                    });
                }
                None => match node.data {
                    Data::Scalar(key) => parent.key = Some((key, node.span)),
                    _ => {
                        let diagnostic = Diagnostic::error(
                            "wrong-key",
                            format!("a key is a word, got {}", node.what()),
                        )
                        .at(node.span, "not a word")
                        .help("a text with brackets or braces is put in quotes");
                        self.sink.report(diagnostic);
                        parent.key = Some((String::new(), node.span));
                    }
                },
            },
            Data::Scalar(_) => {}
        }
    }
}

/// Byte offsets of character numbers: the parser counts characters.
pub struct Offsets {
    /// Byte of every 64th character; empty where all characters are single bytes.
    marks: Vec<usize>,
}

const STEP: usize = 64;

impl Offsets {
    fn new(text: &str) -> Self {
        if text.is_ascii() {
            return Offsets { marks: Vec::new() };
        }
        Offsets {
            marks: text
                .char_indices()
                .step_by(STEP)
                .map(|(at, _)| at)
                .collect(),
        }
    }

    /// The byte at which character `number` starts.
    pub fn byte(&self, text: &str, number: usize) -> usize {
        if self.marks.is_empty() {
            return number.min(text.len());
        }
        let Some(&start) = self.marks.get(number / STEP) else {
            return text.len();
        };
        text[start..]
            .char_indices()
            .nth(number % STEP)
            .map_or(text.len(), |(at, _)| start + at)
    }

    fn span(&self, file: FileId, text: &str, at: saphyr_parser::Span) -> Span {
        let start = self.byte(text, at.start.index());
        let end = self.byte(text, at.end.index()).max(start);
        Span { file, start, end }
    }
}
