//! What may follow a quantity: `± 10 %`, `+/- 20 Ω`, `+15 % -20 %`, `within 18 V .. 32 V`.

use super::amount::{Amount, Text, Written, blanks, shortened};
use super::error::UnitError;
use super::number::Number;
use std::ops::Range;

const FORMS: &str = "a spread is ± 10 %, +15 % -20 %, ± VALUE or within LOW .. HIGH";

/// Reads the rest of the text behind a quantity as its spread, or finds nothing there.
pub(super) fn read_spread(
    source: &Text<'_>,
    nominal: Written,
    from: usize,
) -> Result<Amount, UnitError> {
    let text = source.text;
    let rest = &text[from..];
    let value = nominal.value;
    let (low, high) = if rest.is_empty() {
        (value, value)
    } else if let Some(sign) = ["±", "+/-", "+-"]
        .iter()
        .find(|sign| rest.starts_with(**sign))
    {
        let start = from + sign.len();
        let start = start + blanks(&text[start..]);
        let (by, end) = deviation(source, &nominal, start)?;
        nothing_behind(source, end)?;
        (value - by, value + by)
    } else if rest.starts_with("within") {
        range(source, from)?
    } else if rest.starts_with(['+', '-', '\u{2212}']) {
        two_sided(source, &nominal, from)?
    } else {
        return Err(leftover(source, from));
    };
    checked(source, &nominal, low, high, from)
}

/// One deviation without sign at byte `from`: its size [SI] and the byte behind it.
fn deviation(source: &Text<'_>, nominal: &Written, from: usize) -> Result<(f64, usize), UnitError> {
    let text = source.text;
    if text[from..].starts_with(['-', '\u{2212}', '+']) {
        let range = from..text.trim_end().len().max(from);
        let problem = format!("has a spread with two signs, {}", shortened(&text[from..]));
        return Err(source.error("bad-spread", range, problem, FORMS.into(), None));
    }
    let (number, unit_range) = source.number_and_unit(from)?;
    let unit = source.unit(&number, from, unit_range.clone())?;
    let whole = from..unit_range.end.max(from + number.length);
    let end = whole.end + blanks(&text[whole.end..]);
    if unit.percent {
        return Ok((percent(source, nominal, &number, whole)?, end));
    }
    let written = &text[whole.clone()];
    if source.kind.on_scale && unit.celsius {
        let help = format!("{} K", &text[from..from + number.length]);
        let problem = format!("has a spread of {written}, a point on the temperature scale");
        let label = "a spread of a temperature is in K or a range".into();
        return Err(source.error("bad-spread", whole, problem, label, Some(help)));
    }
    if unit_range.is_empty() && !nominal.unit.dimension.is_none() {
        let problem = format!("has a spread without a unit, {written}");
        let help = Some(format!("{written} % or {written} {}", source.kind.symbol));
        return Err(source.error("bad-spread", whole, problem, FORMS.into(), help));
    }
    if unit.dimension != nominal.unit.dimension {
        let problem = format!(
            "has a spread of another dimension, {written}, {}",
            super::amount::name_of(unit.dimension)
        );
        return Err(source.error("bad-spread", whole, problem, source.written_in(), None));
    }
    let scaled = number
        .times_ten_to(unit.power)
        .map(|size| size * unit.numerator / unit.denominator);
    match scaled.filter(|size| size.is_finite()) {
        Some(size) => Ok((size, end)),
        None => Err(source.error(
            "bad-number",
            whole.clone(),
            format!("has a spread out of range, {written}"),
            String::new(),
            None,
        )),
    }
}

/// A deviation in per cent of the nominal value.
fn percent(
    source: &Text<'_>,
    nominal: &Written,
    number: &Number,
    whole: Range<usize>,
) -> Result<f64, UnitError> {
    let written = source.text[whole.clone()].to_owned();
    if source.kind.on_scale {
        let problem =
            format!("has a spread of {written}, and per cent of a temperature means nothing");
        let label = "a spread of a temperature is in K or a range".into();
        let help = format!("{} ± 10 K", &source.text[nominal.range.clone()]);
        return Err(source.error("bad-spread", whole, problem, label, Some(help)));
    }
    if nominal.unit.percent {
        let problem = format!(
            "has a spread of {written} on a value in per cent, which can be read in two ways"
        );
        let label = "of the value, or points of per cent?".into();
        let help = format!(
            "{} within LOW % .. HIGH %",
            &source.text[nominal.range.clone()]
        );
        return Err(source.error("bad-spread", whole, problem, label, Some(help)));
    }
    let share = number.times_ten_to(-2).filter(|share| share.is_finite());
    let by = share
        .map(|share| share * nominal.value.abs())
        .filter(|by| by.is_finite());
    let Some(by) = by else {
        let problem = format!("has a spread out of range, {written}");
        return Err(source.error("bad-spread", whole, problem, FORMS.into(), None));
    };
    if nominal.value == 0.0 && share != Some(0.0) {
        let problem = format!("has a spread of {written} of zero, which is zero");
        let label = "give this spread with a unit".into();
        return Err(source.error("bad-spread", whole, problem, label, None));
    }
    Ok(by)
}

/// `+15 % -20 %`, in either order.
fn two_sided(source: &Text<'_>, nominal: &Written, from: usize) -> Result<(f64, f64), UnitError> {
    let text = source.text;
    let (first_up, start) = signed(text, from);
    let (first, middle) = deviation(source, nominal, start)?;
    if !text[middle..].starts_with(['+', '-', '\u{2212}']) {
        let range = from..text.trim_end().len();
        let written = text[range.clone()].to_owned();
        let help = if first_up {
            format!("{written} -0 %")
        } else {
            format!("+0 % {written}")
        };
        let problem = format!("has a spread to one side, {}", shortened(&written));
        return Err(source.error(
            "bad-spread",
            range,
            problem,
            "both sides are written".into(),
            Some(help),
        ));
    }
    let (second_up, start) = signed(text, middle);
    let (second, end) = deviation(source, nominal, start)?;
    nothing_behind(source, end)?;
    if first_up == second_up {
        let range = from..text.trim_end().len();
        let problem = format!(
            "has a spread with the same sign twice, {}",
            shortened(&text[range.clone()])
        );
        return Err(source.error("bad-spread", range, problem, FORMS.into(), None));
    }
    let (up, down) = if first_up {
        (first, second)
    } else {
        (second, first)
    };
    Ok((nominal.value - down, nominal.value + up))
}

fn signed(text: &str, at: usize) -> (bool, usize) {
    let sign = text[at..].chars().next().unwrap_or('+');
    let start = at + sign.len_utf8();
    (sign == '+', start + blanks(&text[start..]))
}

/// `within LOW .. HIGH`.
fn range(source: &Text<'_>, from: usize) -> Result<(f64, f64), UnitError> {
    let text = source.text;
    let start = from + "within".len();
    let (low, middle) = source.quantity(start + blanks(&text[start..]))?;
    if !text[middle..].starts_with("..") {
        let range = from..text.trim_end().len();
        let problem = "has a range without its two dots".to_owned();
        return Err(source.error(
            "bad-spread",
            range,
            problem,
            "a range is within LOW .. HIGH".into(),
            None,
        ));
    }
    let start = middle + "..".len();
    let (high, end) = source.quantity(start + blanks(&text[start..]))?;
    nothing_behind(source, end)?;
    if low.value > high.value {
        let help = format!(
            "within {} .. {}",
            &text[high.range.clone()],
            &text[low.range.clone()]
        );
        let range = low.range.start..high.range.end;
        let problem = format!(
            "has its range upside down, {}",
            shortened(&text[range.clone()])
        );
        return Err(source.error(
            "bad-spread",
            range,
            problem,
            "the lower bound comes first".into(),
            Some(help),
        ));
    }
    Ok((low.value, high.value))
}

fn nothing_behind(source: &Text<'_>, end: usize) -> Result<(), UnitError> {
    if end < source.text.len() {
        Err(leftover(source, end))
    } else {
        Ok(())
    }
}

fn leftover(source: &Text<'_>, from: usize) -> UnitError {
    let range = from..source.text.trim_end().len();
    let problem = format!(
        "has something behind the value, {}",
        shortened(&source.text[range.clone()])
    );
    source.error("bad-spread", range, problem, FORMS.into(), None)
}

/// The amount, where the spread contains the value and stays a number.
fn checked(
    source: &Text<'_>,
    nominal: &Written,
    low: f64,
    high: f64,
    from: usize,
) -> Result<Amount, UnitError> {
    let range = from..source.text.trim_end().len();
    let value = nominal.value;
    if !(low.is_finite() && high.is_finite()) {
        let problem = "has a spread out of the range of numbers".to_owned();
        return Err(source.error("bad-spread", range, problem, FORMS.into(), None));
    }
    if !(low..=high).contains(&value) {
        let problem = format!(
            "has a spread that leaves its value out, {}",
            shortened(source.text.trim())
        );
        let label = format!("{} lies outside", &source.text[nominal.range.clone()]);
        return Err(source.error("bad-spread", range, problem, label, None));
    }
    if source.kind.on_scale && low < 0.0 {
        let problem = "has a spread below absolute zero".to_owned();
        return Err(source.error(
            "bad-spread",
            range,
            problem,
            "the lowest is -273.15 °C".into(),
            None,
        ));
    }
    Ok(Amount {
        nominal: value,
        low,
        high,
        dimension: nominal.unit.dimension,
    })
}
