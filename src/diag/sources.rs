//! The texts that were read, and places in them.

/// Number of a text among the sources.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct FileId(u32);

/// A stretch of bytes of one text; `start == end` is a point between two characters.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Span {
    /// Which text.
    pub file: FileId,
    /// First byte.
    pub start: usize,
    /// The byte after the last.
    pub end: usize,
}

impl Span {
    /// A part of this span: bytes counted from its start, kept inside it.
    pub fn part(self, range: std::ops::Range<usize>) -> Span {
        let start = (self.start + range.start).min(self.end);
        let end = (self.start + range.end).clamp(start, self.end);
        Span { start, end, ..self }
    }
}

/// A place for people: line and column count from 1, columns in characters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Place {
    /// Line from 1.
    pub line: usize,
    /// Column from 1.
    pub column: usize,
}

/// All texts of one netlist: the file, what it brings, and overrides.
#[derive(Clone, Debug, Default)]
pub struct Sources {
    files: Vec<Source>,
}

#[derive(Clone, Debug)]
struct Source {
    name: String,
    text: String,
    /// Byte at which each line starts.
    lines: Vec<usize>,
}

impl Sources {
    /// No texts.
    pub fn new() -> Self {
        Sources::default()
    }

    /// Keeps a text under a name for messages.
    pub fn add(&mut self, name: impl Into<String>, text: impl Into<String>) -> FileId {
        let text = text.into();
        let breaks = text.bytes().enumerate().filter(|(_, byte)| *byte == b'\n');
        let lines = std::iter::once(0)
            .chain(breaks.map(|(at, _)| at + 1))
            .collect();
        let number = FileId(self.files.len() as u32);
        self.files.push(Source {
            name: name.into(),
            text,
            lines,
        });
        number
    }

    /// The name of a text; empty where there is none.
    pub fn name(&self, file: FileId) -> &str {
        self.files
            .get(file.0 as usize)
            .map_or("", |source| &source.name)
    }

    /// A whole text; empty where there is none.
    pub fn text(&self, file: FileId) -> &str {
        self.files
            .get(file.0 as usize)
            .map_or("", |source| &source.text)
    }

    /// The bytes of a span as text, shrunk to whole characters.
    pub fn slice(&self, span: Span) -> &str {
        let text = self.text(span.file);
        let start = floor(text, span.start);
        let end = floor(text, span.end).max(start);
        &text[start..end]
    }

    /// Line and column of a span's start.
    pub fn place(&self, span: Span) -> Place {
        let (line, start) = self.line_at(span.file, span.start);
        let text = self.text(span.file);
        let column = text[start..floor(text, span.start).max(start)]
            .chars()
            .count()
            + 1;
        Place { line, column }
    }

    /// The line (from 1) in which a byte lies, and the byte where it starts.
    pub fn line_at(&self, file: FileId, byte: usize) -> (usize, usize) {
        let Some(source) = self.files.get(file.0 as usize) else {
            return (1, 0);
        };
        let line = source.lines.partition_point(|start| *start <= byte).max(1);
        (line, source.lines[line - 1])
    }

    /// The text of a line (from 1) without its end; empty where there is none.
    pub fn line(&self, file: FileId, line: usize) -> &str {
        let Some(source) = self.files.get(file.0 as usize) else {
            return "";
        };
        let Some(&start) = line.checked_sub(1).and_then(|k| source.lines.get(k)) else {
            return "";
        };
        let end = source.lines.get(line).copied().unwrap_or(source.text.len());
        source.text[start..end].trim_end_matches(['\n', '\r'])
    }
}

/// The last character boundary at or before a byte.
pub(super) fn floor(text: &str, byte: usize) -> usize {
    let mut at = byte.min(text.len());
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_count_characters_and_lines_count_from_one() {
        let mut sources = Sources::new();
        let file = sources.add("a.yaml", "first\n  µ Ω: x\r\nlast");
        let at = |start| {
            sources.place(Span {
                file,
                start,
                end: start,
            })
        };
        assert_eq!(at(0), Place { line: 1, column: 1 });
        assert_eq!(at(6 + 2 + 2 + 1 + 2 + 2), Place { line: 2, column: 8 });
        assert_eq!(sources.line(file, 2), "  µ Ω: x");
        assert_eq!(at(1000).line, 3);
        assert_eq!(sources.line(file, 9), "");
    }

    #[test]
    fn a_byte_inside_a_character_is_that_character() {
        let mut sources = Sources::new();
        let file = sources.add("a", "µΩ");
        assert_eq!(
            sources
                .place(Span {
                    file,
                    start: 3,
                    end: 4
                })
                .column,
            2
        );
        assert_eq!(
            sources.slice(Span {
                file,
                start: 1,
                end: 3
            }),
            "µ"
        );
    }
}
