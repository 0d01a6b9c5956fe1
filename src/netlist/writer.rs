//! A document as YAML text that reads back as the same document.

use super::document::Document;
use super::node::{Data, Node};

impl Document {
    /// The document as YAML. Comments and layout of the source are not kept.
    pub fn to_yaml(&self) -> String {
        self.root.to_yaml()
    }
}

impl Node {
    /// The node as YAML: mappings in blocks, lists in brackets.
    pub fn to_yaml(&self) -> String {
        let mut out = String::new();
        match &self.data {
            Data::Map(entries) if !entries.is_empty() => block(self, 0, &mut out),
            _ => {
                flow(self, &mut out);
                out.push('\n');
            }
        }
        out
    }
}

fn block(node: &Node, indent: usize, out: &mut String) {
    for entry in node.entries() {
        *out += &" ".repeat(indent);
        *out += &scalar(&entry.key);
        out.push(':');
        match &entry.value.data {
            Data::Map(entries) if !entries.is_empty() => {
                out.push('\n');
                block(&entry.value, indent + 2, out);
            }
            Data::Scalar(text) if text.is_empty() => out.push('\n'),
            _ => {
                out.push(' ');
                flow(&entry.value, out);
                out.push('\n');
            }
        }
    }
}

fn flow(node: &Node, out: &mut String) {
    match &node.data {
        Data::Scalar(text) => *out += &scalar(text),
        Data::List(items) => {
            out.push('[');
            for (k, item) in items.iter().enumerate() {
                *out += if k > 0 { ", " } else { "" };
                flow(item, out);
            }
            out.push(']');
        }
        Data::Map(entries) => {
            out.push('{');
            for (k, entry) in entries.iter().enumerate() {
                *out += if k > 0 { ", " } else { "" };
                *out += &scalar(&entry.key);
                *out += ": ";
                flow(&entry.value, out);
            }
            out.push('}');
        }
    }
}

/// A text as a YAML scalar: plain where every reader takes it so, else in double quotes.
pub fn scalar(text: &str) -> String {
    let inner = |c: char| c.is_alphanumeric() || " _-+.%/±°²³µ\u{03bc}Ω^()=<>".contains(c);
    let first = |c: char| c.is_alphanumeric() || c == '.' || c == '±';
    let negative = text
        .strip_prefix(['-', '+'])
        .is_some_and(|rest| rest.starts_with(|c: char| c.is_ascii_digit()));
    let plain = (text.starts_with(first) || negative)
        && text.chars().all(inner)
        && !text.ends_with(' ')
        && text != "...";
    if plain {
        return text.to_owned();
    }
    let mut out = String::from("\"");
    for c in text.chars() {
        match c {
            '"' => out += "\\\"",
            '\\' => out += "\\\\",
            '\n' => out += "\\n",
            '\r' => out += "\\r",
            '\t' => out += "\\t",
            c if c.is_control() || matches!(c, '\u{2028}' | '\u{2029}' | '\u{feff}') => {
                out += &format!("\\u{:04x}", u32::from(c))
            }
            c => out.push(c),
        }
    }
    out.push('"');
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::diag::{Sink, Sources};
    use crate::netlist::{read_document, read_fragment};

    /// The tree without its places, for comparison.
    fn plain(node: &Node) -> Node {
        node.clone().placed_at(Default::default())
    }

    #[test]
    fn what_is_written_reads_back_as_the_same_tree() {
        let text = "title: \"K1: <a> # no\"\nempty:\nnone: {}\nlist: []\nelements:\n  a: {nodes: [x, y], v: 24 V ± 10 %, at: [[1 ms, -2 V], [3 ms, 4 V]], w: {p: {q: 'no'}}}\n  b:\n    note: |\n      two\n      lines\n";
        let sink = Sink::new();
        let document =
            read_document("a", text.as_bytes(), &mut Sources::new(), &sink).expect("it has a tree");
        let written = document.to_yaml();
        let again = read_document("b", written.as_bytes(), &mut Sources::new(), &sink)
            .expect("it has a tree");
        assert_eq!(plain(&again.root), plain(&document.root), "{written}");
        assert!(
            written.contains("    v: 24 V ± 10 %\n")
                && written.contains("at: [[1 ms, -2 V], [3 ms, 4 V]]"),
            "{written}"
        );
    }

    #[test]
    fn every_text_survives_as_value_and_as_key() {
        let texts = [
            "a: b",
            "a #b",
            "# c",
            "- x",
            "-",
            "? x",
            "*a",
            "&a",
            "!t",
            "%x",
            "@x",
            "`x",
            "'q'",
            "\"q\"",
            "a\\b",
            "a\nb",
            "a\tb",
            " lead",
            "trail ",
            "[x]",
            "{x}",
            "a,b",
            "x]",
            "~",
            "null",
            "---",
            "...",
            "=",
            "<<",
            ">",
            "|",
            "a\r\nb",
            "\u{85}",
            "\u{2028}x",
            "\u{7}",
            "µΩ°²±",
            "1e-4",
            "-5 V",
            "+3",
            "..5",
            "a\u{feff}b",
            "\u{1f600}",
            "a:",
            ":a",
            "a:b",
            "0x1",
            "---x",
            "- -",
            "\u{fffe}",
        ];
        for text in texts {
            for document in [
                format!("{}: x\n", scalar(text)),
                format!("k: {}\n", scalar(text)),
                format!("k: [{}]\n", scalar(text)),
                format!("k: {{{}: 1}}\n", scalar(text)),
            ] {
                let sink = Sink::new();
                let node = read_fragment("t", &document, &mut Sources::new(), &sink)
                    .unwrap_or_else(|| panic!("{document}: {:?}", sink.sorted()));
                let entry = &node.entries()[0];
                let found = match &entry.value.data {
                    Data::Scalar(_) if entry.key != "k" => entry.key.clone(),
                    Data::Scalar(value) => value.clone(),
                    Data::List(items) => items[0].text().unwrap_or("no text").to_owned(),
                    Data::Map(entries) => entries[0].key.clone(),
                };
                assert_eq!(found, text, "{document}");
            }
        }
    }
}
