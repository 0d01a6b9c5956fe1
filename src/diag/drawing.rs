//! A message as text: headline, the lines it is about with carets under the exact text, help.
//!
//! ```text
//! error[wrong-dimension]: gap takes m, got 0.32 mF, a capacitance
//!   --> supply.yaml:18:13
//!    |
//! 18 |       gap: 0.32 mF
//!    |            ^^^^^^^ a length is written in m, mm, µm
//!    |
//!    = help: gap: 0.32 mm
//! ```

use super::diagnostic::{Diagnostic, Severity};
use super::sources::{Sources, Span};

/// Characters of a line that are shown at most.
const WIDTH: usize = 100;

/// With or without colour.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Paint {
    /// Text alone.
    #[default]
    Plain,
    /// ANSI colours, for a terminal.
    Colour,
}

impl Paint {
    fn dye(self, code: &str, text: &str) -> String {
        match self {
            Paint::Colour if !text.is_empty() => format!("\u{1b}[{code}m{text}\u{1b}[0m"),
            _ => text.to_owned(),
        }
    }
}

/// All messages, an empty line between them.
pub fn draw_all(diagnostics: &[Diagnostic], sources: &Sources, paint: Paint) -> String {
    let drawn: Vec<String> = diagnostics
        .iter()
        .map(|diagnostic| draw(diagnostic, sources, paint))
        .collect();
    drawn.join("\n")
}

/// One message; every line ends with a line end.
pub fn draw(diagnostic: &Diagnostic, sources: &Sources, paint: Paint) -> String {
    let strong = match diagnostic.severity {
        Severity::Error => "1;31",
        Severity::Caution => "1;33",
        Severity::Note => "1;36",
    };
    let head = format!("{}[{}]", diagnostic.severity.name(), diagnostic.word);
    let headline = cleaned(&diagnostic.headline);
    let mut out = format!(
        "{}: {}\n",
        paint.dye(strong, &head),
        paint.dye("1", &headline)
    );
    let gutter = gutter_width(diagnostic, sources);
    let mut previous = None;
    for (number, (span, label)) in diagnostic.labels.iter().enumerate() {
        let excerpt = Excerpt::of(*span, sources);
        if previous != Some((span.file, excerpt.line)) {
            let arrow = paint.dye(
                "1;34",
                if previous.is_some_and(|(file, _)| file == span.file) {
                    "..."
                } else {
                    "-->"
                },
            );
            let place = sources.place(*span);
            let pad = " ".repeat(gutter);
            out += &format!(
                "{pad}{arrow} {}:{}:{}\n",
                cleaned(sources.name(span.file)),
                place.line,
                place.column
            );
            out += &format!("{pad} {}\n", paint.dye("1;34", "|"));
            let margin = paint.dye("1;34", &format!("{:>gutter$} |", excerpt.line));
            out += format!("{margin} {}", excerpt.text).trim_end();
            out.push('\n');
        }
        previous = Some((span.file, excerpt.line));
        let bar = paint.dye("1;34", "|");
        let carets = if number == 0 { "^" } else { "-" }.repeat(excerpt.carets);
        let remark = format!("{carets} {}", cleaned(label));
        let line = format!(
            "{} {bar} {}{}",
            " ".repeat(gutter),
            " ".repeat(excerpt.indent),
            paint.dye(strong, remark.trim_end())
        );
        out += &line;
        out.push('\n');
    }
    for help in &diagnostic.help {
        let pad = " ".repeat(gutter);
        for (k, line) in help.lines().enumerate() {
            let lead = if k == 0 { "= help:" } else { "       " };
            out += &format!("{pad} {} {}\n", paint.dye("1;34", lead), cleaned(line));
        }
    }
    out
}

fn gutter_width(diagnostic: &Diagnostic, sources: &Sources) -> usize {
    let widest = diagnostic
        .labels
        .iter()
        .map(|(span, _)| sources.place(*span).line.to_string().len());
    widest.max().unwrap_or(1).max(2)
}

/// The shown part of a line and where the carets go, in characters.
struct Excerpt {
    line: usize,
    text: String,
    indent: usize,
    carets: usize,
}

impl Excerpt {
    fn of(span: Span, sources: &Sources) -> Excerpt {
        let (line, start) = sources.line_at(span.file, span.start);
        let text = sources.line(span.file, line);
        let from = super::sources::floor(text, span.start.saturating_sub(start));
        let to = super::sources::floor(text, span.end.saturating_sub(start)).max(from);
        let (left, right) = window(text, from, to);
        let shown = cleaned(&text[left..right]);
        let before = width(&cleaned(&text[left..from]));
        let marked = width(&cleaned(&text[from..to.min(right)]));
        let lead = if left > 0 { "… " } else { "" };
        let tail = if right < text.len() { " …" } else { "" };
        Excerpt {
            line,
            text: format!("{lead}{shown}{tail}"),
            indent: width(lead) + before,
            carets: marked.max(1),
        }
    }
}

/// Bytes of a line to show: all of a short one, of a long one the surroundings of the marked text.
fn window(text: &str, from: usize, to: usize) -> (usize, usize) {
    // A character takes at most four bytes, so a line this short needs no count.
    if text.len() <= WIDTH || text.chars().take(WIDTH + 1).count() <= WIDTH {
        return (0, text.len());
    }
    let before = WIDTH / 3;
    let left = text[..from]
        .char_indices()
        .rev()
        .nth(before)
        .map_or(0, |(at, c)| at + c.len_utf8());
    let right = text[left..]
        .char_indices()
        .nth(WIDTH)
        .map_or(text.len(), |(at, _)| left + at);
    (left, right.max(from).min(text.len()).max(to.min(right)))
}

/// Control characters and tabs by visible ones, one cell each; text that would turn the line's direction by `�`.
fn cleaned(text: &str) -> String {
    text.chars()
        .map(|c| match c {
            '\t' => ' ',
            '\u{200b}'..='\u{200f}'
            | '\u{202a}'..='\u{202e}'
            | '\u{2066}'..='\u{2069}'
            | '\u{feff}' => '\u{fffd}',
            c if c.is_control() => '\u{fffd}',
            c => c,
        })
        .collect()
}

/// Cells that a text takes: two for the wide scripts of East Asia and for pictographs, none for combining marks.
fn width(text: &str) -> usize {
    text.chars()
        .map(|c| match c {
            '\u{300}'..='\u{36f}' | '\u{20d0}'..='\u{20ff}' | '\u{fe00}'..='\u{fe0f}' => 0,
            '\u{1100}'..='\u{115f}' | '\u{2e80}'..='\u{a4cf}' | '\u{ac00}'..='\u{d7a3}' => 2,
            '\u{f900}'..='\u{faff}' | '\u{fe30}'..='\u{fe6f}' | '\u{ff00}'..='\u{ff60}' => 2,
            '\u{ffe0}'..='\u{ffe6}' | '\u{1f300}'..='\u{1faff}' | '\u{20000}'..='\u{3fffd}' => 2,
            _ => 1,
        })
        .sum()
}
