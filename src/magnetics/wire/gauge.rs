//! American wire gauge, ASTM B258: `32 AWG`, `4/0 AWG`, `0000 AWG`.

/// A gauge number: 0 for 1/0, -1 for 2/0, down to -3 for 4/0.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Gauge(i32);

/// Why a text is no gauge.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GaugeFault {
    /// Not of the form `32 AWG`.
    NotAGauge,
    /// Beyond 4/0 .. 56.
    OutOfRange,
}

impl Gauge {
    /// Reads `32 AWG`, `4/0 AWG` or `0000 AWG`; case of AWG does not matter.
    pub fn parse(text: &str) -> Result<Self, GaugeFault> {
        let text = text.trim();
        let split = text.len().saturating_sub(3);
        let (number, unit) = text.split_at_checked(split).ok_or(GaugeFault::NotAGauge)?;
        if !unit.eq_ignore_ascii_case("AWG") {
            return Err(GaugeFault::NotAGauge);
        }
        let number = number.trim();
        // `4/0` and `0000` both mean four noughts: -3.
        let noughts = match number.strip_suffix("/0") {
            Some(count) => Some(count.parse::<i32>().map_err(|_| GaugeFault::NotAGauge)?),
            None if !number.is_empty() && number.bytes().all(|byte| byte == b'0') => {
                i32::try_from(number.len()).ok()
            }
            None => None,
        };
        match noughts {
            Some(count) if (1..=4).contains(&count) => Ok(Gauge(1 - count)),
            Some(_) => Err(GaugeFault::OutOfRange),
            None => match number.parse::<i32>().map_err(|_| GaugeFault::NotAGauge)? {
                n @ 1..=56 => Ok(Gauge(n)),
                _ => Err(GaugeFault::OutOfRange),
            },
        }
    }

    /// Bare diameter [m].
    pub fn diameter(self) -> f64 {
        0.127e-3 * 92f64.powf(f64::from(36 - self.0) / 39.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn gauges_are_read_in_all_their_forms() {
        assert_eq!(Gauge::parse("32 AWG"), Ok(Gauge(32)));
        assert_eq!(Gauge::parse("32awg"), Ok(Gauge(32)));
        assert_eq!(Gauge::parse("4/0 AWG"), Ok(Gauge(-3)));
        assert_eq!(Gauge::parse("0000 AWG"), Ok(Gauge(-3)));
        assert_eq!(Gauge::parse("0 AWG"), Ok(Gauge(0)));
        assert_eq!(Gauge::parse("1/0 AWG"), Ok(Gauge(0)));
    }

    #[test]
    fn what_is_no_gauge_is_refused() {
        for text in ["", "AWG", "32", "32 mm", "x AWG", "3.5 AWG", "µAWG", "ÄÄ"] {
            assert_eq!(Gauge::parse(text), Err(GaugeFault::NotAGauge), "{text}");
        }
        for text in [
            "57 AWG",
            "-1 AWG",
            "5/0 AWG",
            "0/0 AWG",
            "-10 AWG",
            "00000 AWG",
            "-2147483647/0 AWG",
        ] {
            assert_eq!(Gauge::parse(text), Err(GaugeFault::OutOfRange), "{text}");
        }
    }

    #[test]
    fn thirty_six_and_four_nought_are_the_anchors() {
        // ASTM B258 defines both: 0.0050 in and 0.4600 in.
        assert!((Gauge(36).diameter() - 0.127e-3).abs() < 1e-18);
        assert!((Gauge(-3).diameter() - 11.684e-3).abs() < 1e-15);
    }
}
