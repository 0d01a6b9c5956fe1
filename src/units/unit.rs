//! Units with prefixes, exponents, products and quotients: `kΩ`, `mm²`, `K/W`, `V/µs`, `A/V²`, `N s/m`, `/h`.

use super::dimension::Dimension;
use super::symbols::look_up;

/// A written unit resolved to SI: value = number * numerator / denominator * 10^power.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WrittenUnit {
    /// Non-decimal factors above the line.
    pub numerator: f64,
    /// Non-decimal factors below the line, kept apart so that `600 /h` is one rounding.
    pub denominator: f64,
    /// Power of ten.
    pub power: i32,
    /// Dimension.
    pub dimension: Dimension,
    /// True for `°C` and `degC` alone: a point on the Celsius scale.
    pub celsius: bool,
    /// True for `%` alone.
    pub percent: bool,
}

impl WrittenUnit {
    /// No unit at all.
    pub const BARE: WrittenUnit = WrittenUnit {
        numerator: 1.0,
        denominator: 1.0,
        power: 0,
        dimension: Dimension::NONE,
        celsius: false,
        percent: false,
    };

    /// Reads a whole unit text without surrounding blanks; empty is a bare number. The error is the part that is
    /// no unit.
    pub fn parse(text: &str) -> Result<WrittenUnit, String> {
        let mut unit = WrittenUnit::BARE;
        let mut below = false;
        let mut rest = text.trim();
        let mut factors = 0;
        while !rest.is_empty() {
            let end = rest
                .find(['/', ' ', '·', '*', '(', ')'])
                .unwrap_or(rest.len());
            let (factor, tail) = rest.split_at(end);
            if factor.is_empty() {
                let sign = tail.chars().next().unwrap_or(' ');
                below |= sign == '/';
                if sign == '(' || sign == ')' {
                    return Err(text.to_owned());
                }
                rest = tail[sign.len_utf8()..].trim_start();
                // A unit may begin with a stroke, not end with an operator.
                if rest.is_empty() {
                    return Err(text.to_owned());
                }
                continue;
            }
            unit.include(factor, below)
                .ok_or_else(|| factor.to_owned())?;
            factors += 1;
            rest = tail.trim_start();
        }
        unit.celsius &= factors == 1;
        unit.percent &= factors == 1;
        Ok(unit)
    }

    fn include(&mut self, factor: &str, below: bool) -> Option<()> {
        let (name, exponent) = split_exponent(factor)?;
        let exponent = if below { -exponent } else { exponent };
        let (symbol, prefix) = look_up(name)?;
        let size = symbol.factor.powi(i32::from(exponent.abs()));
        if exponent < 0 {
            self.denominator *= size;
        } else {
            self.numerator *= size;
        }
        self.power += (symbol.power + prefix) * i32::from(exponent);
        self.dimension = self.dimension.times(symbol.dimension, exponent);
        self.celsius = matches!(name, "°C" | "degC" | "\u{2103}") && exponent == 1;
        self.percent = name == "%" && exponent == 1;
        Some(())
    }
}

/// Splits `mm²`, `mm2`, `mm^2`, `s⁻¹`, `s^-1` into name and exponent, from 1 to 9 in magnitude.
fn split_exponent(factor: &str) -> Option<(&str, i8)> {
    if factor == "1" {
        return Some((factor, 1));
    }
    let is_exponent = |c: char| c.is_ascii_digit() || "^-⁻¹²³⁴⁵⁶⁷⁸⁹".contains(c);
    let name = factor.trim_end_matches(is_exponent);
    let written: String = factor[name.len()..]
        .chars()
        .map(
            |c| match "⁻¹²³⁴⁵⁶⁷⁸⁹".chars().position(|raised| raised == c) {
                Some(0) => '-',
                Some(digit) => char::from_digit(digit as u32, 10).unwrap_or(c),
                None => c,
            },
        )
        .collect();
    if written.is_empty() {
        return Some((name, 1));
    }
    let exponent: i8 = written.strip_prefix('^').unwrap_or(&written).parse().ok()?;
    (exponent != 0 && (-9..=9).contains(&exponent)).then_some((name, exponent))
}
