//! Numbers for people: SI prefixes, few digits, a dash for what does not exist.
//!
//! In: SI values. Out: text such as `1.235 kV`, `+18 %`, `25 ms`. Prefixes are those of `units`.

use crate::units::{self, Unit};

/// What stands where a value does not exist.
pub const NOTHING: &str = "—";

/// The exponent, a multiple of three, that brings a magnitude between 1 and 1000; 0 for zero.
pub fn exponent_of_three(magnitude: f64) -> i32 {
    if magnitude == 0.0 || !magnitude.is_finite() {
        return 0;
    }
    (magnitude.abs().log10().floor() as i32).div_euclid(3) * 3
}

/// A value with its unit at `digits` significant digits, trailing zeros left out, as `units::engineering` writes it,
/// with a true minus sign and powers of ten as on a drawing: `1.235 kV`, `−8 mA`, `2.5·10⁻⁵ Wb/A`. What is not finite
/// reads as a dash.
pub fn engineering<'a>(value: f64, unit: impl Into<Unit<'a>>, digits: usize) -> String {
    if !value.is_finite() {
        return NOTHING.to_string();
    }
    let text = units::engineering(value, unit, digits);
    match text.split_once(' ') {
        Some((figure, unit)) => format!("{} {unit}", printed(figure)),
        None => printed(&text),
    }
}

/// A value that may not exist.
pub fn engineering_or_dash<'a>(
    value: Option<f64>,
    unit: impl Into<Unit<'a>>,
    digits: usize,
) -> String {
    value.map_or_else(
        || NOTHING.to_string(),
        |value| engineering(value, unit, digits),
    )
}

/// `-2.5e-5` as `−2.5·10⁻⁵`.
fn printed(figure: &str) -> String {
    let (figure, power) = match figure.split_once('e') {
        Some((figure, power)) => (figure, power.parse().ok()),
        None => (figure, None),
    };
    let figure = figure.replacen('-', "−", 1);
    match power {
        Some(power) => format!("{figure}·{}", power_of_ten(power)),
        None => figure,
    }
}

/// A span of time: seconds with a prefix up to two minutes, then minutes, hours or days.
pub fn duration(seconds: f64) -> String {
    let magnitude = seconds.abs();
    let (scale, unit) = match magnitude {
        m if m < 120.0 => return engineering(seconds, "s", 4),
        m if m < 7200.0 => (60.0, "min"),
        m if m < 172_800.0 => (3600.0, "h"),
        _ => (86_400.0, "d"),
    };
    engineering(seconds / scale, unit, 3)
}

/// A fraction as a signed percentage, no finer than it is worth: `+18 %`, `−8 %`, `+0.4 %`, `±0 %`.
pub fn margin(fraction: Option<f64>) -> String {
    let Some(fraction) = fraction.filter(|fraction| fraction.is_finite()) else {
        return NOTHING.to_string();
    };
    if fraction == 0.0 {
        return "±0 %".to_string();
    }
    let sign = if fraction > 0.0 { "+" } else { "" };
    format!("{sign}{}", percent(fraction))
}

/// A fraction as a percentage without a plus sign: `72 %`, `0.4 %`.
pub fn percent(fraction: f64) -> String {
    if !fraction.is_finite() {
        return NOTHING.to_string();
    }
    let percent = 100.0 * fraction;
    let figure = match percent.abs() {
        m if (9.95..9999.5).contains(&m) => fixed(percent, 0),
        m if (0.95..9.95).contains(&m) => fixed(percent, 1),
        _ => engineering(percent, "", 2),
    };
    format!("{} %", trimmed(&figure))
}

/// `value` with this many decimals and a true minus sign; a rounded zero has no sign.
pub fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(rest) if rest.bytes().all(|byte| matches!(byte, b'0' | b'.')) => rest.to_string(),
        Some(rest) => format!("−{rest}"),
        None => text,
    }
}

/// `10⁻⁷`: a power of ten as text.
pub fn power_of_ten(exponent: i32) -> String {
    const RAISED: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    let sign = if exponent < 0 { "⁻" } else { "" };
    let digits = exponent.unsigned_abs().to_string();
    let raised: String = digits
        .bytes()
        .filter_map(|digit| RAISED.get(usize::from(digit - b'0')))
        .collect();
    format!("10{sign}{raised}")
}

/// Without trailing zeros behind a point.
fn trimmed(figure: &str) -> String {
    match figure.contains('.') {
        true => figure
            .trim_end_matches('0')
            .trim_end_matches('.')
            .to_string(),
        false => figure.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_read_as_on_a_drawing() {
        let cases = [
            (1234.6, "V", "1.235 kV"),
            (24.0, "V", "24 V"),
            (-0.008, "A", "−8 mA"),
            (0.0, "V", "0 V"),
            (-0.0, "V", "0 V"),
            (4.7e-8, "F", "47 nF"),
            (999.96, "V", "1 kV"),
            (99.996e-6, "s", "100 µs"),
            (1e33, "V", "1·10³³ V"),
            (2.5e-5, "m²", "2.5·10⁻⁵ m²"),
            (0.37, "", "0.37"),
            (85.25, "°C", "85.25 °C"),
            (12_346.0, "/h", "12350 /h"),
            (1.2e7, "V/s", "12 MV/s"),
            (f64::NAN, "V", "—"),
            (f64::INFINITY, "V", "—"),
        ];
        for (value, unit, text) in cases {
            assert_eq!(engineering(value, unit, 4), text);
        }
        assert_eq!(engineering_or_dash(None, "V", 4), "—");
    }

    #[test]
    fn margins_carry_their_sign() {
        let cases = [
            (0.18, "+18 %"),
            (-0.08, "−8 %"),
            (0.0042, "+0.42 %"),
            (-0.0004, "−0.04 %"),
            (0.0, "±0 %"),
            (0.034, "+3.4 %"),
            (-0.02, "−2 %"),
            (12.0, "+1200 %"),
        ];
        for (fraction, text) in cases {
            assert_eq!(margin(Some(fraction)), text);
        }
        assert_eq!(margin(None), "—");
        assert_eq!(margin(Some(f64::NAN)), "—");
        assert_eq!(percent(0.72), "72 %");
    }

    #[test]
    fn durations_change_unit_when_they_grow() {
        assert_eq!(duration(0.025), "25 ms");
        assert_eq!(duration(90.0), "90 s");
        assert_eq!(duration(600.0), "10 min");
        assert_eq!(duration(36_000.0), "10 h");
        assert_eq!(duration(1e6), "11.6 d");
    }
}
