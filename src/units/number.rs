//! The number in front of a unit, kept as decimal text so that a prefix costs no rounding.

/// A decimal number as written, split into digits and power of ten.
#[derive(Clone, Debug, PartialEq)]
pub struct Number {
    digits: String,
    power: i32,
    /// Bytes that it took.
    pub length: usize,
}

impl Number {
    /// Reads a number at the start of `text`: sign, digits, point, digits, exponent. None where there is none.
    ///
    /// An `e` counts as exponent only before a digit, so that `1 eV` and `1eV` keep their unit.
    pub fn at_start(text: &str) -> Option<Number> {
        let bytes = text.as_bytes();
        let digits_from = |from: usize| {
            bytes[from..]
                .iter()
                .take_while(|byte| byte.is_ascii_digit())
                .count()
        };
        let (sign, mut at) = match text.chars().next()? {
            '-' => ("-", 1),
            '+' => ("", 1),
            '\u{2212}' => ("-", '\u{2212}'.len_utf8()),
            _ => ("", 0),
        };
        let whole = digits_from(at);
        let mut digits = format!("{sign}{}", &text[at..at + whole]);
        at += whole;
        let mut fraction = 0;
        if bytes.get(at) == Some(&b'.') && bytes.get(at + 1) != Some(&b'.') {
            fraction = digits_from(at + 1);
            digits.push_str(&text[at..at + 1 + fraction]);
            at += 1 + fraction;
        }
        if whole + fraction == 0 {
            return None;
        }
        let mut power = 0;
        if matches!(bytes.get(at), Some(b'e' | b'E')) {
            let signed = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
            let count = digits_from((at + 1 + signed).min(bytes.len()));
            if count > 0 {
                let end = at + 1 + signed + count;
                // Nine digits and more are out of range whatever they are.
                power = text[at + 1..end]
                    .parse()
                    .unwrap_or(if bytes[at + 1] == b'-' {
                        -99_999
                    } else {
                        99_999
                    });
                power = power.clamp(-99_999, 99_999);
                at = end;
            }
        }
        Some(Number {
            digits,
            power,
            length: at,
        })
    }

    /// The number times ten to `power`, correctly rounded. None where it does not fit into a double: too large, or
    /// not zero and yet too small.
    pub fn times_ten_to(&self, power: i32) -> Option<f64> {
        let value: f64 = format!("{}e{}", self.digits, self.power + power)
            .parse()
            .ok()?;
        let zero = !self.digits.bytes().any(|byte| matches!(byte, b'1'..=b'9'));
        (value.is_finite() && (zero || value.abs() >= f64::MIN_POSITIVE)).then_some(value)
    }
}
