//! Numbers that are none here: other tongues' ways of writing them, infinities, the letter in place of the point.

use super::amount::{Text, shortened};
use super::error::UnitError;
use super::number::Number;
use super::unit::WrittenUnit;

impl Text<'_> {
    pub(super) fn no_number(&self, from: usize) -> UnitError {
        let rest = self.text[from..].trim_end();
        let range = from..from + rest.len();
        let folded = rest.trim_start_matches(['+', '-', '.']).to_lowercase();
        if rest.is_empty() {
            let problem = "has no value".to_owned();
            return self.error("bad-number", range, problem, self.written_in(), None);
        }
        if folded.starts_with("nan") || folded.starts_with("inf") || folded.starts_with('∞') {
            let problem = format!("must be finite, got {rest}");
            return self.error(
                "bad-number",
                range,
                problem,
                "not a finite number".into(),
                None,
            );
        }
        let problem = format!("takes {}, got {}", self.kind.takes, shortened(rest));
        let label = format!("not a number; {}", self.written_in());
        self.error("bad-number", range, problem, label, None)
    }

    /// Numbers written as other tongues and drawings write them: `4,7`, `10 000`, `1_000`, `4k7`.
    pub(super) fn odd_number(&self, from: usize, number: &Number) -> Option<UnitError> {
        let rest = &self.text[from..];
        let head = &rest[..number.length];
        let tail = &rest[number.length..];
        let mut chars = tail.trim_start_matches([' ', '\u{a0}', '\u{202f}']).chars();
        let (first, second) = (chars.next()?, chars.next());
        let range = from..from + rest.trim_end().len();
        let digit_next = second.is_some_and(|c| c.is_ascii_digit());
        let spaced = !tail.starts_with(first);
        if first == ',' && digit_next {
            let help = rest.trim_end().replacen(',', ".", 1);
            let problem = format!("takes a decimal point, got {}", shortened(rest.trim_end()));
            return Some(self.error(
                "bad-number",
                range,
                problem,
                "a comma is no decimal point here".into(),
                Some(help),
            ));
        }
        if (first == '_' && digit_next)
            || (spaced && first.is_ascii_digit() && !tail.trim_start().starts_with("1/"))
        {
            let problem = format!(
                "takes a number in one piece, got {}",
                shortened(rest.trim_end())
            );
            let label = "digits are not grouped here".into();
            return Some(self.error("bad-number", range, problem, label, None));
        }
        if first == '.' && digit_next {
            let problem = format!(
                "takes one decimal point, got {}",
                shortened(rest.trim_end())
            );
            return Some(self.error(
                "bad-number",
                range,
                problem,
                "two decimal points".into(),
                None,
            ));
        }
        if !spaced && digit_next && first.is_alphabetic() && !head.contains('.') {
            return self.compound(head, first, &tail[first.len_utf8()..], from);
        }
        None
    }

    /// `4k7`, `2R2`, `5V6`: the letter in place of the point. A unit with exponent (`2m2` for an area) passes.
    fn compound(&self, head: &str, letter: char, tail: &str, from: usize) -> Option<UnitError> {
        let fraction: String = tail.chars().take_while(char::is_ascii_digit).collect();
        let unit_text = format!("{letter}{fraction}");
        if WrittenUnit::parse(&unit_text)
            .is_ok_and(|unit| Some(unit.dimension) == self.kind.dimension)
        {
            return None;
        }
        let symbol = self.kind.symbol;
        let unit = match letter {
            'R' | 'r' | 'E' | 'Ω' if symbol == "Ω" => "Ω".to_owned(),
            'K' => format!("k{symbol}"),
            _ if symbol.starts_with(letter) => symbol.to_owned(),
            _ => format!("{letter}{symbol}"),
        };
        WrittenUnit::parse(&unit).ok()?;
        let whole = format!("{head}{unit_text}");
        let range = from..from + whole.len();
        let help = format!("{head}.{fraction} {unit}");
        let problem = format!("takes {}, got {whole}", self.kind.takes);
        Some(self.error(
            "bad-number",
            range,
            problem,
            format!("write {help}"),
            Some(help),
        ))
    }
}
