//! The margin of a value to its bound.

use serde::Serialize;

/// On which side of the bound a value has to be.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sense {
    /// `at_most`.
    AtMost,
    /// `at_least`.
    AtLeast,
}

/// How a limit came out. Values are in SI units, margins are fractions.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Verdict {
    /// The value; None for what never happened.
    pub value: Option<f64>,
    /// The bound.
    pub bound: f64,
    /// Signed distance from value to bound over the bound's magnitude, positive on the good side; None without a
    /// value and for a bound of zero, of which there is no share.
    pub margin: Option<f64>,
    /// The margin asked for.
    pub asked: f64,
    /// Whether it holds.
    pub holds: bool,
}

impl Verdict {
    /// Judges a value [SI]. With a bound of zero, the value has to be on its good side (or zero) and the margin
    /// asked for, a share of nothing, adds nothing. No value never holds, nor does one that is not finite.
    pub fn of(value: Option<f64>, bound: f64, sense: Sense, asked: f64) -> Self {
        let value = value.filter(|value| value.is_finite());
        let distance = value.map(|value| match sense {
            Sense::AtMost => bound - value,
            Sense::AtLeast => value - bound,
        });
        let margin = distance
            .map(|distance| distance / bound.abs())
            .filter(|margin| margin.is_finite());
        let holds = match margin {
            Some(margin) => margin >= asked,
            None => distance.is_some_and(|distance| distance >= 0.0),
        };
        Verdict {
            value,
            bound,
            margin,
            asked,
            holds,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn margins_are_signed_shares_of_the_bound() {
        for (value, bound, sense, margin) in [
            (48.0, 60.0, Sense::AtMost, 0.2),
            (66.0, 60.0, Sense::AtMost, -0.1),
            (66.0, 60.0, Sense::AtLeast, 0.1),
            (-50.0, -40.0, Sense::AtMost, 0.25),
            (-50.0, -40.0, Sense::AtLeast, -0.25),
            (5.0, -40.0, Sense::AtLeast, 1.125),
        ] {
            let got = Verdict::of(Some(value), bound, sense, 0.0);
            assert!(
                got.margin.is_some_and(|got| (got - margin).abs() < 1e-15),
                "{got:?}"
            );
            assert_eq!(got.holds, margin >= 0.0);
        }
    }

    #[test]
    fn a_margin_just_met_holds_and_one_just_missed_does_not() {
        let judge = |value| Verdict::of(Some(value), 60.0, Sense::AtMost, 0.2).holds;
        assert!(judge(48.0) && !judge(48.000_001) && judge(-1e9));
    }

    #[test]
    fn nothing_and_what_is_no_number_never_hold() {
        for value in [
            None,
            Some(f64::NAN),
            Some(f64::INFINITY),
            Some(f64::NEG_INFINITY),
        ] {
            let got = Verdict::of(value, 60.0, Sense::AtMost, 0.0);
            assert_eq!((got.value, got.margin, got.holds), (None, None, false));
        }
    }

    #[test]
    fn a_bound_of_zero_has_no_share() {
        for (value, sense, holds) in [
            (-1.0, Sense::AtMost, true),
            (0.0, Sense::AtMost, true),
            (1e-9, Sense::AtMost, false),
            (1e-9, Sense::AtLeast, true),
            (-1.0, Sense::AtLeast, false),
        ] {
            let got = Verdict::of(Some(value), 0.0, sense, 0.2);
            assert_eq!((got.margin, got.holds), (None, holds), "{value} {sense:?}");
        }
    }

    #[test]
    fn json_has_the_fields_of_the_contract() {
        let verdict = Verdict::of(Some(48.0), 64.0, Sense::AtMost, 0.125);
        let json = serde_json::to_string(&verdict).expect("numbers are JSON");
        assert_eq!(
            json,
            r#"{"value":48.0,"bound":64.0,"margin":0.25,"asked":0.125,"holds":true}"#
        );
    }
}
