//! The tree of a document: every scalar is text as written, everything knows where it stands.

use crate::diag::Span;

/// A value of the document.
#[derive(Clone, Debug, PartialEq)]
pub struct Node {
    /// The value's own text.
    pub span: Span,
    /// Where to point when something is missing in it: the key or name it stands behind, else its own start.
    pub head: Span,
    /// What it is.
    pub data: Data,
}

/// What a value is.
#[derive(Clone, Debug, PartialEq)]
pub enum Data {
    /// Text as written; empty where nothing stands behind a key.
    Scalar(String),
    /// A list.
    List(Vec<Node>),
    /// A mapping in the order of the file, keys unique.
    Map(Vec<Entry>),
}

/// One entry of a mapping.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// The key as written.
    pub key: String,
    /// Where the key stands.
    pub key_span: Span,
    /// What stands behind it.
    pub value: Node,
}

impl Node {
    /// The value behind a key, where this is a mapping that has it.
    pub fn get(&self, key: &str) -> Option<&Node> {
        self.entry(key).map(|entry| &entry.value)
    }

    /// The entry of a key.
    pub fn entry(&self, key: &str) -> Option<&Entry> {
        self.entries().iter().find(|entry| entry.key == key)
    }

    /// All entries; none where this is no mapping.
    pub fn entries(&self) -> &[Entry] {
        match &self.data {
            Data::Map(entries) => entries,
            _ => &[],
        }
    }

    /// All items; none where this is no list.
    pub fn items(&self) -> &[Node] {
        match &self.data {
            Data::List(items) => items,
            _ => &[],
        }
    }

    /// The text of a scalar.
    pub fn text(&self) -> Option<&str> {
        match &self.data {
            Data::Scalar(text) => Some(text),
            _ => None,
        }
    }

    /// True where nothing stands behind the key.
    pub fn is_empty(&self) -> bool {
        matches!(&self.data, Data::Scalar(text) if text.is_empty())
    }

    /// What this is, in words with an article: `a list`.
    pub fn what(&self) -> &'static str {
        match &self.data {
            Data::Scalar(text) if text.is_empty() => "nothing",
            Data::Scalar(_) => "a text",
            Data::List(_) => "a list",
            Data::Map(_) => "a mapping",
        }
    }

    /// The span of a byte range of a scalar's text; the whole value where the text is not as in the file
    /// (escapes, several lines).
    pub fn part(&self, range: std::ops::Range<usize>) -> Span {
        let Some(text) = self.text() else {
            return self.span;
        };
        let length = self.span.end - self.span.start;
        if length == text.len() {
            self.span.part(range)
        } else if length == text.len() + 2 {
            // Quoted without escapes: the text begins behind the quote.
            self.span.part(range.start + 1..range.end + 1)
        } else {
            self.span
        }
    }

    /// The same tree as if written at one place: for parts that the program itself adds.
    pub fn placed_at(mut self, span: Span) -> Node {
        self.place(span);
        self
    }

    fn place(&mut self, span: Span) {
        self.span = span;
        self.head = span;
        match &mut self.data {
            Data::Scalar(_) => {}
            Data::List(items) => items.iter_mut().for_each(|item| item.place(span)),
            Data::Map(entries) => entries.iter_mut().for_each(|entry| {
                entry.key_span = span;
                entry.value.place(span);
            }),
        }
    }
}
