//! Numbers for people: `4.7 kΩ`, `26.3 ms`, `70 °C`.

use super::dimension::Dimension;
use super::kind::{AREA, Kind, MASS, TEMPERATURE, VOLUME};
use super::symbols::look_up;

/// In which unit a number is printed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Unit<'a> {
    /// The unit of this kind; a temperature is shown in °C.
    Of(Kind),
    /// This SI symbol, the number being in it.
    Symbol(&'a str),
}

impl From<Kind> for Unit<'_> {
    fn from(kind: Kind) -> Self {
        Unit::Of(kind)
    }
}

impl<'a> From<&'a str> for Unit<'a> {
    fn from(symbol: &'a str) -> Self {
        Unit::Symbol(symbol)
    }
}

const PREFIXES: &[(i32, &str)] = &[
    (-15, "f"),
    (-12, "p"),
    (-9, "n"),
    (-6, "µ"),
    (-3, "m"),
    (0, ""),
    (3, "k"),
    (6, "M"),
    (9, "G"),
    (12, "T"),
];

/// A value [SI] with `digits` significant digits (1 to 17), an SI prefix where the unit takes one, no trailing
/// zeros, and its unit: `engineering(4700.0, RESISTANCE, 3)` is `4.7 kΩ`. What is not a number is `undefined`.
pub fn engineering<'a>(value: f64, unit: impl Into<Unit<'a>>, digits: usize) -> String {
    let digits = digits.clamp(1, 17);
    let unit = unit.into();
    if value.is_nan() {
        return "undefined".into();
    }
    let (value, symbol, step) = match unit {
        Unit::Of(kind) if kind == TEMPERATURE => (value - 273.15, "°C", 0),
        Unit::Of(kind) if kind.dimension == MASS.dimension => (value * 1e3, "g", 1),
        Unit::Of(kind) if kind.dimension == AREA.dimension => {
            return powered(value, "m", 2, digits);
        }
        Unit::Of(kind) if kind.dimension == VOLUME.dimension => {
            return powered(value, "m", 3, digits);
        }
        Unit::Of(kind) => (value, kind.symbol, usize::from(takes_prefix(kind.symbol))),
        Unit::Symbol(symbol) => (value, symbol, usize::from(takes_prefix(symbol))),
    };
    if value.is_infinite() {
        return join(if value > 0.0 { "∞" } else { "-∞" }, symbol);
    }
    let (mantissa, power) = rounded(value, digits);
    let group = power.div_euclid(3) * 3;
    match PREFIXES.iter().find(|(tens, _)| *tens == group) {
        Some((tens, prefix)) if step == 1 && value != 0.0 => join(
            &decimal(&mantissa, power - tens),
            &format!("{prefix}{symbol}"),
        ),
        _ => join(&scientific(&mantissa, power), symbol),
    }
}

/// Squares and cubes of a length: mm², cm³ and so on by whole steps of mm, m.
fn powered(value: f64, symbol: &str, exponent: i32, digits: usize) -> String {
    let raised = if exponent == 2 { "²" } else { "³" };
    if value.is_infinite() {
        return join(
            if value > 0.0 { "∞" } else { "-∞" },
            &format!("{symbol}{raised}"),
        );
    }
    let (mantissa, power) = rounded(value, digits);
    let steps = [(-6, "µ"), (-3, "m"), (-2, "c"), (0, "")];
    let fits = |&&(tens, _): &&(i32, &str)| power >= tens * exponent;
    let (tens, prefix) = if value == 0.0 {
        (0, "")
    } else {
        *steps.iter().rev().find(fits).unwrap_or(&steps[0])
    };
    let shifted = power - tens * exponent;
    let number = if (-6..9).contains(&shifted) {
        decimal(&mantissa, shifted)
    } else {
        scientific(&mantissa, shifted)
    };
    join(&number, &format!("{prefix}{symbol}{raised}"))
}

/// The prefix of a power of ten, as far as values are printed with one.
pub fn prefix_of(tens: i32) -> Option<&'static str> {
    let entry = PREFIXES.iter().find(|(power, _)| *power == tens);
    entry.map(|(_, prefix)| *prefix)
}

/// True where the symbol begins with a unit that takes prefixes, to the first power.
pub fn takes_prefix(symbol: &str) -> bool {
    let first = symbol.split(['/', ' ', '·']).next().unwrap_or("");
    look_up(first).is_some_and(|(unit, prefix)| {
        unit.prefixed && prefix == 0 && unit.dimension != Dimension::ANGLE
    })
}

/// Significant digits (with sign) and the power of ten of the first, after rounding.
fn rounded(value: f64, digits: usize) -> (String, i32) {
    let text = format!("{:.*e}", digits - 1, value);
    let (mantissa, power) = text.split_once('e').unwrap_or((&text, "0"));
    let kept: String = mantissa.chars().filter(|c| *c != '.').collect();
    (kept, power.parse().unwrap_or(0))
}

/// The digits with the point after the first `power + 1` of them, trailing zeros dropped.
fn decimal(mantissa: &str, power: i32) -> String {
    let (sign, digits) = mantissa
        .strip_prefix('-')
        .map_or(("", mantissa), |digits| ("-", digits));
    if digits.bytes().all(|digit| digit == b'0') {
        return "0".into();
    }
    let mut text = if power < 0 {
        format!("0.{}{digits}", "0".repeat((-power - 1) as usize))
    } else {
        let whole = power as usize + 1;
        let padded = format!("{digits:0<whole$}");
        format!("{}.{}", &padded[..whole], &padded[whole..])
    };
    text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    format!("{sign}{text}")
}

fn scientific(mantissa: &str, power: i32) -> String {
    if (-4..7).contains(&power) {
        return decimal(mantissa, power);
    }
    format!("{}e{power}", decimal(mantissa, 0))
}

fn join(number: &str, symbol: &str) -> String {
    if symbol.is_empty() {
        number.to_owned()
    } else {
        format!("{number} {symbol}")
    }
}
