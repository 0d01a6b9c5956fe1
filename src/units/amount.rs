//! Reading a quantity with its spread: text in, SI numbers out.

use super::dimension::Dimension;
use super::error::UnitError;
use super::kind::Kind;
use super::number::Number;
use super::spread::read_spread;
use super::symbols::nearest_unit;
use super::unit::WrittenUnit;
use std::ops::Range;

/// A quantity in SI units with its spread; low <= nominal <= high, all finite.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Amount {
    /// The value as written.
    pub nominal: f64,
    /// Lowest value; `nominal` without a spread.
    pub low: f64,
    /// Highest value; `nominal` without a spread.
    pub high: f64,
    /// Dimension that was written; what `ANY` resolves to.
    pub dimension: Dimension,
}

impl Amount {
    /// A value [SI] without a spread, of a dimension.
    pub fn exactly(value: f64, dimension: Dimension) -> Self {
        Amount {
            nominal: value,
            low: value,
            high: value,
            dimension,
        }
    }
}

/// Reads `4.7 kΩ`, `24 V ± 10 %`, `25 °C within -25 °C .. 70 °C` as a quantity of this kind.
///
/// # Errors
/// Whatever is not such a text, names another dimension, does not fit into a double or has a spread that does not
/// contain the value.
pub fn parse_amount(text: &str, kind: Kind) -> Result<Amount, UnitError> {
    let source = Text { text, kind };
    let start = text.len() - text.trim_start().len();
    let (written, after) = source.quantity(start)?;
    read_spread(&source, written, after)
}

/// The text under the reader's finger, and what it should be.
pub(super) struct Text<'a> {
    pub text: &'a str,
    pub kind: Kind,
}

/// One number with its unit.
#[derive(Clone, Debug)]
pub(super) struct Written {
    /// Value [SI]; a Celsius temperature is shifted to kelvin.
    pub value: f64,
    pub unit: WrittenUnit,
    pub range: Range<usize>,
}

impl Text<'_> {
    pub fn error(
        &self,
        word: &'static str,
        range: Range<usize>,
        problem: String,
        label: String,
        help: Option<String>,
    ) -> UnitError {
        UnitError {
            word,
            range,
            noun: self.kind.noun(),
            problem: limited(problem),
            label: limited(label),
            // A remedy is typed; a text of this length is not.
            help: help.filter(|help| help.len() <= LONGEST),
        }
    }

    pub fn written_in(&self) -> String {
        format!("{} is written in {}", self.kind.name, self.kind.examples)
    }

    /// Reads a quantity of the kind at byte `from`; returns it and the byte behind it and its blanks.
    pub fn quantity(&self, from: usize) -> Result<(Written, usize), UnitError> {
        let (number, unit_range) = self.number_and_unit(from)?;
        let range = from..unit_range.end.max(from + number.length);
        let unit = self.unit(&number, from, unit_range.clone())?;
        self.check_dimension(&unit, &number, from, unit_range)?;
        let value = self.value(&number, unit, range.clone())?;
        let after = range.end + blanks(&self.text[range.end..]);
        Ok((Written { value, unit, range }, after))
    }

    /// The number at byte `from` and the bytes of the unit behind it.
    pub fn number_and_unit(&self, from: usize) -> Result<(Number, Range<usize>), UnitError> {
        let rest = &self.text[from..];
        let Some(number) = Number::at_start(rest) else {
            return Err(self.no_number(from));
        };
        let behind = &rest[number.length..];
        let start = from + number.length + blanks(behind);
        if let Some(error) = self.odd_number(from, &number) {
            return Err(error);
        }
        let end = start + unit_length(&self.text[start..]);
        Ok((number, start..end))
    }

    /// The unit at `range`, which may be empty.
    pub fn unit(
        &self,
        number: &Number,
        from: usize,
        range: Range<usize>,
    ) -> Result<WrittenUnit, UnitError> {
        let text = &self.text[range.clone()];
        WrittenUnit::parse(text).map_err(|part| {
            let problem = format!("has an unknown unit, {}", shortened(&part));
            match self.mended(text) {
                Some(unit) => {
                    let help = format!("{} {unit}", &self.text[from..from + number.length]);
                    let label = format!("did you mean {unit}?");
                    self.error("unknown-unit", range.clone(), problem, label, Some(help))
                }
                None => self.error(
                    "unknown-unit",
                    range.clone(),
                    problem,
                    self.written_in(),
                    None,
                ),
            }
        })
    }

    /// A misspelt unit with each wrong factor replaced by the nearest; None where that is no unit of the kind.
    fn mended(&self, unit: &str) -> Option<String> {
        let mut unit = unit.to_owned();
        // Longer texts are no units, and each round mends one factor.
        for _ in 0..4 {
            match WrittenUnit::parse(&unit) {
                Ok(right) => {
                    let fits = self
                        .kind
                        .dimension
                        .is_none_or(|wanted| wanted == right.dimension);
                    return fits.then_some(unit);
                }
                Err(part) if part.len() <= 20 => {
                    let near = nearest_unit(&part, self.kind.dimension)?;
                    unit = unit.replacen(&part, &near, 1);
                }
                Err(_) => return None,
            }
        }
        None
    }

    fn check_dimension(
        &self,
        unit: &WrittenUnit,
        number: &Number,
        from: usize,
        range: Range<usize>,
    ) -> Result<(), UnitError> {
        let Some(wanted) = self.kind.dimension else {
            return Ok(());
        };
        let whole = from..range.end.max(from + number.length);
        let got = &self.text[whole.clone()];
        if range.is_empty() && !wanted.is_none() {
            let problem = format!("takes {}, got {got} without a unit", self.kind.takes);
            let help = format!("{got} {}", self.kind.takes);
            return Err(self.error(
                "missing-unit",
                whole,
                problem,
                self.written_in(),
                Some(help),
            ));
        }
        if unit.celsius && !self.kind.on_scale && unit.dimension == wanted {
            let problem = format!("takes K, got {got}, a point on the temperature scale");
            let help = format!("{} K", &self.text[from..from + number.length]);
            return Err(self.error(
                "wrong-dimension",
                whole,
                problem,
                "a difference is written in K".into(),
                Some(help),
            ));
        }
        if unit.dimension != wanted {
            let problem = format!(
                "takes {}, got {got}, {}",
                self.kind.takes,
                name_of(unit.dimension)
            );
            return Err(self.error("wrong-dimension", whole, problem, self.written_in(), None));
        }
        Ok(())
    }

    /// The number in SI units.
    pub fn value(
        &self,
        number: &Number,
        unit: WrittenUnit,
        range: Range<usize>,
    ) -> Result<f64, UnitError> {
        let scaled = number
            .times_ten_to(unit.power)
            .map(|value| value * unit.numerator / unit.denominator);
        let Some(value) = scaled.filter(|value| value.is_finite()) else {
            let problem = format!(
                "is out of the range of numbers, got {}",
                shortened(&self.text[range.clone()])
            );
            let label = "beyond 1e-307 .. 1e308 in SI units".into();
            return Err(self.error("bad-number", range, problem, label, None));
        };
        if !self.kind.on_scale {
            return Ok(value);
        }
        let kelvin = if unit.celsius { value + 273.15 } else { value };
        if kelvin < 0.0 {
            let problem = format!(
                "lies below absolute zero, got {}",
                &self.text[range.clone()]
            );
            return Err(self.error(
                "bad-number",
                range,
                problem,
                "the lowest is -273.15 °C".into(),
                None,
            ));
        }
        Ok(kelvin)
    }
}

/// How the dimension of a wrong quantity is named: `a capacitance`, or its base units.
pub(super) fn name_of(dimension: Dimension) -> String {
    if dimension.is_none() {
        return "a plain number".into();
    }
    match Kind::of_dimension(dimension) {
        Some(kind) => kind.name.to_owned(),
        None => format!("in {}", dimension.base_units()),
    }
}

/// Bytes of blanks at the start.
pub(super) fn blanks(text: &str) -> usize {
    text.len() - text.trim_start().len()
}

/// Bytes of the unit at the start of `text`: up to where a spread begins, trailing blanks left out.
fn unit_length(text: &str) -> usize {
    let mut end = text.len();
    let mut before = ' ';
    for (at, c) in text.char_indices() {
        let rest = &text[at..];
        let word = before.is_whitespace() || before == '%';
        let begins = c == '±'
            || c == '+'
            || (word
                && c == '-'
                && rest[1..]
                    .trim_start()
                    .starts_with(|c: char| c.is_ascii_digit() || c == '.'))
            || (word && rest.starts_with("within"))
            || rest.starts_with("..");
        if begins {
            end = at;
            break;
        }
        before = c;
    }
    text[..end].trim_end().len()
}

/// Bytes of a message that quotes the user's text.
const LONGEST: usize = 200;

fn limited(text: String) -> String {
    if text.len() <= LONGEST {
        return text;
    }
    format!("{}…", text.chars().take(LONGEST / 2).collect::<String>())
}

/// A text cut to a length that fits into a sentence.
pub(super) fn shortened(text: &str) -> String {
    let line = text.split(['\n', '\r']).next().unwrap_or("");
    if line.chars().count() <= 40 {
        return line.to_owned();
    }
    format!("{}…", line.chars().take(39).collect::<String>())
}
