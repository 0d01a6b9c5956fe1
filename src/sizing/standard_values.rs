//! Preferred values of resistors and capacitors, IEC 60063: the series E3, E6, E12, E24, E48, E96 and E192.
//!
//! In: a value in any unit, positive. Out: values of a series, each the `f64` closest to its decimal figure, so
//! `4.7e3` from here equals `4.7e3` as written. E3 to E24 are the standard's historical two-figure values (list
//! from memory, checked in `tests/suite/e_series.rs`); E48, E96 and E192 are 10^(i/n) rounded to three figures,
//! with the one exception of the standard: 9.20 in E192 where the formula gives 9.19.

use std::ops::RangeInclusive;

/// How close, relative, a value must be to a standard one to count as that one: far below any tolerance, far
/// above the rounding of a computation.
const SAME: f64 = 1e-9;

/// Decades that are searched: everything that an `f64` holds at full precision.
const DECADES: RangeInclusive<i32> = -305..=305;

const E24: [u16; 24] = [
    100, 110, 120, 130, 150, 160, 180, 200, 220, 240, 270, 300, 330, 360, 390, 430, 470, 510, 560,
    620, 680, 750, 820, 910,
];

/// A series of preferred values.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Series {
    /// 3 values per decade.
    E3,
    /// 6 values per decade.
    E6,
    /// 12 values per decade.
    E12,
    /// 24 values per decade.
    E24,
    /// 48 values per decade.
    E48,
    /// 96 values per decade.
    E96,
    /// 192 values per decade.
    E192,
}

impl Series {
    /// All series, coarsest first.
    pub const ALL: [Series; 7] = [
        Series::E3,
        Series::E6,
        Series::E12,
        Series::E24,
        Series::E48,
        Series::E96,
        Series::E192,
    ];

    /// The name in the standard: `E12`.
    pub fn name(self) -> &'static str {
        match self {
            Series::E3 => "E3",
            Series::E6 => "E6",
            Series::E12 => "E12",
            Series::E24 => "E24",
            Series::E48 => "E48",
            Series::E96 => "E96",
            Series::E192 => "E192",
        }
    }

    /// The series of this name, capital or small.
    pub fn named(name: &str) -> Option<Series> {
        Series::ALL
            .into_iter()
            .find(|series| series.name().eq_ignore_ascii_case(name))
    }

    /// Number of values in a decade.
    pub fn steps(self) -> usize {
        match self {
            Series::E3 => 3,
            Series::E6 => 6,
            Series::E12 => 12,
            Series::E24 => 24,
            Series::E48 => 48,
            Series::E96 => 96,
            Series::E192 => 192,
        }
    }

    /// Usual tolerance of parts in this series, as a fraction: 0.05 for E24. None for E3, whose parts the
    /// standard only says to be wider than 20 %.
    pub fn tolerance(self) -> Option<f64> {
        match self {
            Series::E3 => None,
            Series::E6 => Some(0.20),
            Series::E12 => Some(0.10),
            Series::E24 => Some(0.05),
            Series::E48 => Some(0.02),
            Series::E96 => Some(0.01),
            Series::E192 => Some(0.005),
        }
    }

    /// The values of one decade as whole numbers from 100 to 999, rising.
    pub fn hundredths(self) -> Vec<u16> {
        let steps = self.steps();
        if steps <= 24 {
            return E24.iter().copied().step_by(24 / steps).collect();
        }
        (0..steps).map(|index| rounded(index, steps)).collect()
    }
}

/// Value `index` of a series of `steps` per decade by the formula, in hundredths.
fn rounded(index: usize, steps: usize) -> u16 {
    match (index, steps) {
        (185, 192) => 920,
        _ => (100.0 * 10f64.powf(index as f64 / steps as f64)).round() as u16,
    }
}

/// The smallest standard value at or above `value`. None where `value` is not positive or out of all decades.
pub fn next_at_least(value: f64, series: Series) -> Option<f64> {
    around(value, series).1
}

/// The largest standard value at or below `value`. None where `value` is not positive or out of all decades.
pub fn next_at_most(value: f64, series: Series) -> Option<f64> {
    around(value, series).0
}

/// The standard value nearest to `value` by ratio, as the series is spaced; the lower one of two equally near.
pub fn nearest(value: f64, series: Series) -> Option<f64> {
    match around(value, series) {
        (Some(below), Some(above)) if above / value < value / below => Some(above),
        (below, above) => below.or(above),
    }
}

/// All standard values from `low` to `high`, both included, rising; empty where there is none.
pub fn all_between(low: f64, high: f64, series: Series) -> Vec<f64> {
    let Some(first) = next_at_least(low, series) else {
        return Vec::new();
    };
    let decade = series.hundredths();
    let start = decade_of(first);
    (start..=*DECADES.end())
        .flat_map(|exponent| {
            decade
                .iter()
                .map(move |&hundredths| figure(hundredths, exponent))
        })
        .skip_while(|&value| value < first)
        .take_while(|&value| value <= high * (1.0 + SAME))
        .collect()
}

/// The standard values next below and next above; both are the value itself where it is a standard one.
fn around(value: f64, series: Series) -> (Option<f64>, Option<f64>) {
    let usable = value > 0.0 && value.is_finite() && DECADES.contains(&decade_of(value));
    if !usable {
        return (None, None);
    }
    let decade = series.hundredths();
    let middle = decade_of(value);
    let candidates = (middle - 1..=middle + 1).flat_map(|exponent| {
        decade
            .iter()
            .map(move |&hundredths| figure(hundredths, exponent))
    });
    let mut below = None;
    for candidate in candidates {
        if (candidate / value - 1.0).abs() < SAME {
            return (Some(candidate), Some(candidate));
        }
        if candidate > value {
            return (below, Some(candidate));
        }
        below = Some(candidate);
    }
    (below, None)
}

/// Exponent of the decade that a positive value lies in; may be one off at a decade's edge.
fn decade_of(value: f64) -> i32 {
    value.log10().floor() as i32
}

/// The `f64` nearest to hundredths/100 · 10^exponent: going by the decimal text is exact in every decade.
fn figure(hundredths: u16, exponent: i32) -> f64 {
    format!("{hundredths}e{}", exponent - 2)
        .parse()
        .expect("digits, `e` and a whole exponent are a number")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_standard_value_is_its_own_neighbour_in_every_decade() {
        for series in Series::ALL {
            for exponent in -15..15 {
                for hundredths in series.hundredths() {
                    let value = figure(hundredths, exponent);
                    for noisy in [value, value * (1.0 + 1e-14), value * (1.0 - 1e-14)] {
                        assert_eq!(next_at_least(noisy, series), Some(value));
                        assert_eq!(next_at_most(noisy, series), Some(value));
                        assert_eq!(nearest(noisy, series), Some(value));
                    }
                }
            }
        }
    }

    #[test]
    fn neighbours_enclose_a_value_across_the_decade() {
        assert_eq!(next_at_least(8.3, Series::E12), Some(10.0));
        assert_eq!(next_at_most(9.9e-9, Series::E12), Some(8.2e-9));
        assert_eq!(next_at_least(4.71e3, Series::E24), Some(5.1e3));
        assert_eq!(next_at_most(0.99, Series::E3), Some(0.47));
        assert_eq!(next_at_least(9.9e-7, Series::E192), Some(1e-6));
    }

    #[test]
    fn nearest_goes_by_ratio() {
        // Between 1 and 2.2 the geometric middle is 1.4832, the arithmetic one 1.6.
        assert_eq!(nearest(1.5, Series::E3), Some(2.2));
        assert_eq!(nearest(1.48, Series::E3), Some(1.0));
    }

    #[test]
    fn a_range_lists_both_ends() {
        assert_eq!(
            all_between(1e3, 4.7e3, Series::E6),
            vec![1e3, 1.5e3, 2.2e3, 3.3e3, 4.7e3]
        );
        assert_eq!(all_between(5.0, 5.2, Series::E12), Vec::<f64>::new());
        assert_eq!(all_between(10.0, 1.0, Series::E12), Vec::<f64>::new());
        assert_eq!(all_between(1.0, 1e6, Series::E96).len(), 6 * 96 + 1);
    }

    #[test]
    fn what_is_no_value_has_no_neighbour() {
        for value in [0.0, -1.0, f64::NAN, f64::INFINITY, 5e-324, f64::MAX] {
            assert_eq!(next_at_least(value, Series::E24), None, "{value}");
            assert_eq!(nearest(value, Series::E24), None, "{value}");
            assert!(all_between(value, 1.0, Series::E24).is_empty());
        }
    }

    #[test]
    fn series_are_found_by_name() {
        assert_eq!(Series::named("e96"), Some(Series::E96));
        assert_eq!(Series::named("E7"), None);
    }
}
