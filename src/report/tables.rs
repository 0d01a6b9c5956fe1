//! Tables for the terminal: aligned columns, a rule under the headings, the last column wrapped at the given width.
//!
//! Widths count terminal cells (a wide letter two, a combining mark none). Control letters in a cell, which could
//! move the cursor or set colours, are shown as `·`. Colour appears only where the caller says that a terminal reads.

use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

/// Space between two columns.
const GAP: usize = 2;

/// No narrower than this is the last column wrapped; below it the line runs over instead.
const NARROWEST: usize = 16;

/// Where a column's texts stand.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Align {
    /// At the left: words.
    Left,
    /// At the right: figures.
    Right,
}

/// How a cell is meant; shown in colour on a terminal, and never by colour alone.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Tone {
    /// As any text.
    #[default]
    Plain,
    /// A limit that holds.
    Good,
    /// A limit that does not hold.
    Bad,
    /// Of less weight.
    Quiet,
}

/// One cell.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Cell {
    /// Its text, one line.
    pub text: String,
    /// How it is meant.
    pub tone: Tone,
}

impl Cell {
    /// A cell with a tone.
    pub fn toned(text: impl Into<String>, tone: Tone) -> Self {
        Cell {
            text: text.into(),
            tone,
        }
    }
}

impl<T: Into<String>> From<T> for Cell {
    fn from(text: T) -> Self {
        Cell {
            text: text.into(),
            tone: Tone::Plain,
        }
    }
}

/// Where a table is printed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Screen {
    /// Width in cells, None where nobody counts (a pipe, a file): nothing is wrapped.
    pub width: Option<usize>,
    /// Whether colours are shown.
    pub colour: bool,
}

/// A table with headings.
#[derive(Clone, Debug, Default)]
pub struct Table {
    headings: Vec<(String, Option<Align>)>,
    rows: Vec<Vec<Cell>>,
}

impl Table {
    /// A table without columns.
    pub fn new() -> Self {
        Table::default()
    }

    /// Adds a column; an empty heading in all columns leaves the heading line out.
    pub fn column(mut self, heading: &str, align: Align) -> Self {
        self.headings.push((clean(heading), Some(align)));
        self
    }

    /// Adds a row; missing cells are empty, cells beyond the last column are dropped.
    pub fn row(&mut self, cells: impl IntoIterator<Item = impl Into<Cell>>) {
        let cells = cells.into_iter().map(Into::into).map(|cell: Cell| Cell {
            text: clean(&cell.text),
            ..cell
        });
        let mut row: Vec<Cell> = cells.take(self.headings.len()).collect();
        row.resize(self.headings.len(), Cell::default());
        self.rows.push(row);
    }

    /// True without rows.
    pub fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// The lines, each ended by a newline, without blanks at their ends; empty where there are no rows.
    pub fn render(&self, screen: Screen) -> String {
        if self.rows.is_empty() {
            return String::new();
        }
        let widths = self.widths(screen);
        let mut text = String::new();
        if self.headings.iter().any(|(heading, _)| !heading.is_empty()) {
            let headings: Vec<Cell> = self
                .headings
                .iter()
                .map(|(heading, _)| Cell::toned(heading, Tone::Quiet))
                .collect();
            self.push_row(&mut text, &headings, &widths, screen);
            let rules: Vec<Cell> = widths
                .iter()
                .map(|&width| Cell::toned("-".repeat(width), Tone::Quiet))
                .collect();
            self.push_row(&mut text, &rules, &widths, screen);
        }
        for row in &self.rows {
            self.push_row(&mut text, row, &widths, screen);
        }
        text
    }

    /// Width of each column: its widest text, the last one cut to what the screen leaves.
    fn widths(&self, screen: Screen) -> Vec<usize> {
        let mut widths: Vec<usize> = self
            .headings
            .iter()
            .map(|(heading, _)| heading.width())
            .collect();
        for row in &self.rows {
            for (width, cell) in widths.iter_mut().zip(row) {
                *width = (*width).max(cell.text.width());
            }
        }
        if let (Some(whole), Some((last, before))) = (screen.width, widths.split_last_mut()) {
            let taken: usize = before.iter().map(|width| width + GAP).sum();
            *last = (*last).min(whole.saturating_sub(taken).max(NARROWEST));
        }
        widths
    }

    fn push_row(&self, text: &mut String, row: &[Cell], widths: &[usize], screen: Screen) {
        let (Some((last, before)), Some((&room, _))) = (row.split_last(), widths.split_last())
        else {
            return;
        };
        let parts = match screen.width {
            Some(_) => wrapped(&last.text, room),
            None => vec![last.text.clone()],
        };
        for (number, part) in parts.into_iter().enumerate() {
            let mut line = Line::default();
            for (place, cell) in before.iter().enumerate() {
                let shown = if number == 0 { cell.text.as_str() } else { "" };
                self.push_cell(&mut line, shown, cell.tone, place, widths, screen.colour);
            }
            self.push_cell(
                &mut line,
                &part,
                last.tone,
                before.len(),
                widths,
                screen.colour,
            );
            text.push_str(&line.text);
            text.push('\n');
        }
    }

    fn push_cell(
        &self,
        line: &mut Line,
        text: &str,
        tone: Tone,
        place: usize,
        widths: &[usize],
        colour: bool,
    ) {
        let width = widths.get(place).copied().unwrap_or(0);
        let room = width.saturating_sub(text.width());
        let right = self
            .headings
            .get(place)
            .is_some_and(|(_, align)| *align == Some(Align::Right));
        line.blanks += if right { room } else { 0 };
        line.push(text, tone, colour);
        line.blanks += if right { GAP } else { room + GAP };
    }
}

/// A line under construction; blanks are held back until a text follows, so that none end it.
#[derive(Default)]
struct Line {
    text: String,
    blanks: usize,
}

impl Line {
    fn push(&mut self, text: &str, tone: Tone, colour: bool) {
        if text.is_empty() {
            return;
        }
        self.text
            .extend(std::iter::repeat_n(' ', std::mem::take(&mut self.blanks)));
        let code = match tone {
            Tone::Plain => "",
            Tone::Good => "32",
            Tone::Bad => "1;31",
            Tone::Quiet => "2",
        };
        match colour && !code.is_empty() {
            true => self
                .text
                .push_str(&format!("\u{1b}[{code}m{text}\u{1b}[0m")),
            false => self.text.push_str(text),
        }
    }
}

/// A text broken into lines of at most `room` cells, at blanks where there are any. Never empty.
pub fn wrapped(text: &str, room: usize) -> Vec<String> {
    let room = room.max(2);
    let mut lines = vec![String::new()];
    for word in text.split(' ').filter(|word| !word.is_empty()) {
        let line = lines.last_mut().expect("there is a first line");
        let used = line.width();
        if used > 0 && used + 1 + word.width() <= room {
            line.push(' ');
            line.push_str(word);
        } else {
            if used > 0 {
                lines.push(String::new());
            }
            push_word(&mut lines, word, room);
        }
    }
    lines
}

/// Adds a word to the last line, which is empty; one that is too long is cut.
fn push_word(lines: &mut Vec<String>, word: &str, room: usize) {
    for letter in word.chars() {
        let line = lines.last_mut().expect("there is a last line");
        match line.width() + letter.width().unwrap_or(0) > room {
            true => lines.push(letter.to_string()),
            false => line.push(letter),
        }
    }
}

/// One line without control letters.
fn clean(text: &str) -> String {
    text.chars()
        .map(|letter| match letter {
            '\n' | '\t' | '\r' => ' ',
            letter if letter.is_control() || is_direction_mark(letter) => '·',
            letter => letter,
        })
        .collect()
}

/// Marks that turn the direction of writing and so could make a text read otherwise than it is.
pub(crate) fn is_direction_mark(letter: char) -> bool {
    matches!(letter, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}')
}

#[cfg(test)]
mod tests {
    use super::*;

    fn limits() -> Table {
        let mut table = Table::new()
            .column("limit", Align::Left)
            .column("value", Align::Right)
            .column("margin", Align::Right)
            .column("why", Align::Left);
        table.row([
            "driver_voltage",
            "24.8 V",
            "+59 %",
            "set by the reverse voltage of the diode",
        ]);
        table.row([
            Cell::from("Ω-größe"),
            "8 mA".into(),
            Cell::toned("−8 %", Tone::Bad),
            "short".into(),
        ]);
        table
    }

    #[test]
    fn columns_line_up_and_nothing_trails() {
        let piped = limits().render(Screen::default());
        assert_eq!(
            piped,
            "limit            value  margin  why\n\
             --------------  ------  ------  ---------------------------------------\n\
             driver_voltage  24.8 V   +59 %  set by the reverse voltage of the diode\n\
             Ω-größe           8 mA    −8 %  short\n"
        );
    }

    #[test]
    fn the_last_column_wraps_at_the_width() {
        let shown = limits().render(Screen {
            width: Some(52),
            colour: false,
        });
        assert_eq!(
            shown,
            "limit            value  margin  why\n\
             --------------  ------  ------  --------------------\n\
             driver_voltage  24.8 V   +59 %  set by the reverse\n\
             \u{20}                               voltage of the diode\n\
             Ω-größe           8 mA    −8 %  short\n"
        );
        assert!(shown.lines().all(|line| line.width() <= 52));
    }

    #[test]
    fn colour_is_for_terminals_and_changes_no_column() {
        let coloured = limits().render(Screen {
            width: None,
            colour: true,
        });
        assert!(coloured.contains("\u{1b}[1;31m−8 %\u{1b}[0m"));
        let mut bare = coloured;
        for code in ["\u{1b}[1;31m", "\u{1b}[2m", "\u{1b}[0m"] {
            bare = bare.replace(code, "");
        }
        assert_eq!(bare, limits().render(Screen::default()));
    }

    #[test]
    fn hostile_cells_cannot_steer_the_terminal() {
        let mut table = Table::new()
            .column("名前", Align::Left)
            .column("x", Align::Left);
        table.row(["\u{1b}[31mred\nnext\u{202e}", "a"]);
        table.row(["回路", "b"]);
        let text = table.render(Screen::default());
        assert!(!text.contains('\u{1b}') && !text.contains('\u{202e}'));
        assert_eq!(text.lines().count(), 4);
        let place = |line: &str, end: char| line.split_once(end).map(|(before, _)| before.width());
        let lines: Vec<&str> = text.lines().collect();
        assert_eq!(place(lines[2], 'a'), place(lines[3], 'b'));
    }

    #[test]
    fn long_words_are_cut_and_blank_text_is_a_line() {
        assert_eq!(wrapped("abcdefgh ij", 4), ["abcd", "efgh", "ij"]);
        assert_eq!(wrapped("", 10), [""]);
        assert_eq!(wrapped("回路回路", 5), ["回路", "回路"]);
    }

    #[test]
    fn rows_of_any_length_are_taken() {
        let mut table = Table::new()
            .column("a", Align::Left)
            .column("b", Align::Right);
        assert_eq!(table.render(Screen::default()), "");
        table.row(["1"]);
        table.row(["1", "2", "3"]);
        assert_eq!(table.render(Screen::default()), "a  b\n-  -\n1\n1  2\n");
        let mut none = Table::new();
        none.row(["x"]);
        assert_eq!(
            none.render(Screen {
                width: Some(0),
                colour: false
            }),
            ""
        );
    }
}
