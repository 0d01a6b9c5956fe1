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
