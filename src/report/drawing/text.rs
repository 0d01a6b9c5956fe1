//! Text on a page: its width, its cutting and wrapping, and its cleaning.

use crate::report::tables::is_direction_mark;

/// Size and weight of a text.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Font {
    /// Size of the em square [px].
    pub size: f64,
    /// Heavy strokes.
    pub bold: bool,
}

/// The chart's title.
pub const TITLE: Font = Font {
    size: 20.0,
    bold: true,
};
/// The answer below it.
pub const SUBTITLE: Font = Font {
    size: 14.5,
    bold: false,
};
/// What an axis measures.
pub const HEADING: Font = Font {
    size: 13.5,
    bold: false,
};
/// Figures along an axis.
pub const TICK: Font = Font {
    size: 12.5,
    bold: false,
};
/// Names of curves and limits.
pub const NAME: Font = Font {
    size: 13.0,
    bold: false,
};
/// Labels of marks.
pub const CALLOUT: Font = Font {
    size: 13.0,
    bold: true,
};
/// The caution.
pub const CAUTION: Font = Font {
    size: 12.5,
    bold: false,
};

impl Font {
    /// From one base line to the next [px].
    pub fn line(&self) -> f64 {
        1.3 * self.size
    }

    /// From the middle of a line of figures or capitals down to its base line [px].
    pub fn drop(&self) -> f64 {
        0.36 * self.size
    }
}

/// Tells how wide a text comes out [px].
pub trait Measure {
    /// Width of one line [px].
    fn width(&self, text: &str, font: Font) -> f64;
}

/// Letters of a text that are looked at; no page holds more.
const LONGEST: usize = 2000;

/// One line that any reader of pictures accepts: line ends become blanks, control letters and direction marks go.
pub fn clean(text: &str) -> String {
    let allowed = |letter: &char| {
        !letter.is_control()
            && !is_direction_mark(*letter)
            && !('\u{fffe}'..='\u{ffff}').contains(letter)
    };
    let spaced = text.chars().take(LONGEST).map(|letter| {
        if matches!(letter, '\n' | '\r' | '\t') {
            ' '
        } else {
            letter
        }
    });
    spaced
        .filter(allowed)
        .collect::<String>()
        .split(' ')
        .filter(|word| !word.is_empty())
        .collect::<Vec<_>>()
        .join(" ")
}

/// The text, or as much of its beginning as fits in `room` with an ellipsis.
pub fn cut(text: &str, font: Font, room: f64, measure: &dyn Measure) -> String {
    if measure.width(text, font) <= room {
        return text.to_string();
    }
    let ends: Vec<usize> = text.char_indices().map(|(place, _)| place).collect();
    let (mut good, mut bad) = (0, ends.len());
    while bad - good > 1 {
        let middle = (good + bad) / 2;
        let fits = measure.width(&shortened(text, ends[middle]), font) <= room;
        if fits { good = middle } else { bad = middle }
    }
    shortened(text, ends.get(good).copied().unwrap_or(0))
}

fn shortened(text: &str, end: usize) -> String {
    format!("{}…", text[..end].trim_end())
}

/// The text in at most `most` lines of at most `room`; what is left over ends in an ellipsis.
pub fn lines(text: &str, font: Font, room: f64, most: usize, measure: &dyn Measure) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    let mut rest = text.trim();
    while !rest.is_empty() {
        if lines.len() + 1 >= most {
            lines.push(cut(rest, font, room, measure));
            break;
        }
        let end = break_of(rest, font, room, measure);
        lines.push(cut(rest[..end].trim_end(), font, room, measure));
        rest = rest[end..].trim_start();
    }
    lines
}

/// Where a line ends: after the last blank, `_`, `-` or `.` that keeps it in `room`; a single longer word as a whole.
fn break_of(text: &str, font: Font, room: f64, measure: &dyn Measure) -> usize {
    let mut end = None;
    for (place, letter) in text.char_indices() {
        let (before, after) = match letter {
            ' ' => (place, place + 1),
            '_' | '-' | '.' => (place + 1, place + 1),
            _ => continue,
        };
        if measure.width(&text[..before], font) > room {
            return end.unwrap_or(after);
        }
        end = Some(after);
    }
    match end {
        Some(end) if measure.width(text, font) > room => end,
        _ => text.len(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Every letter ten pixels wide.
    struct Even;

    impl Measure for Even {
        fn width(&self, text: &str, _: Font) -> f64 {
            10.0 * text.chars().count() as f64
        }
    }

    #[test]
    fn long_names_end_in_an_ellipsis_and_fit() {
        assert_eq!(cut("relay", NAME, 50.0, &Even), "relay");
        assert_eq!(cut("relay coil", NAME, 60.0, &Even), "relay…");
        assert_eq!(cut("größenordnung", NAME, 45.0, &Even), "grö…");
        assert_eq!(cut("x", NAME, 1.0, &Even), "…");
        let long = "ä".repeat(2_000_000);
        assert_eq!(cut(&clean(&long), NAME, 100.0, &Even).chars().count(), 10);
    }

    #[test]
    fn wrapping_breaks_where_words_end() {
        let name = "winding current of k1_coil";
        assert_eq!(
            lines(name, NAME, 150.0, 3, &Even),
            ["winding current", "of k1_coil"]
        );
        assert_eq!(
            lines(name, NAME, 80.0, 4, &Even),
            ["winding", "current", "of k1_", "coil"]
        );
        assert_eq!(
            lines(name, NAME, 120.0, 2, &Even),
            ["winding", "current of…"]
        );
        assert_eq!(
            lines("abcdefghijkl mn", NAME, 50.0, 3, &Even),
            ["abcd…", "mn"]
        );
        assert!(lines("", NAME, 50.0, 3, &Even).is_empty());
    }

    #[test]
    fn control_letters_do_not_reach_the_page() {
        assert_eq!(clean("a\u{0}b\n\n c\u{202e}d\u{ffff}"), "ab cd");
    }
}
