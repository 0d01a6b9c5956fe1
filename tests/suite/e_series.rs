//! Guards: standard values are those of IEC 60063, and finer series keep the standard's construction.

use coilbreak::sizing::standard_values::{Series, next_at_least};

/// E3, E6, E12, E24 and E96 whole; source in the file's head.
const TABLE: &str = include_str!("../data/e_series.csv");

#[test]
fn every_value_of_the_table_is_the_value_of_that_place() {
    let mut rows = 0;
    for line in TABLE.lines().filter(|line| !line.starts_with('#')).skip(1) {
        let fields: Vec<&str> = line.split(',').collect();
        let series = Series::named(fields[0]).expect("the table names a series");
        let index: usize = fields[1].parse().expect("a place");
        let value: f64 = fields[2].parse().expect("a value");
        assert_eq!(
            f64::from(series.hundredths()[index]) / 100.0,
            value,
            "{line}"
        );
        assert_eq!(next_at_least(value * 0.9999, series), Some(value), "{line}");
        rows += 1;
    }
    assert_eq!(rows, 3 + 6 + 12 + 24 + 96);
}

/// By the construction of the standard: E48 is every second value of E96, E96 every second of E192, and the only
/// value off the formula is 9.20 of E192 (from memory).
#[test]
fn the_three_figure_series_are_nested() {
    let (e48, e96, e192) = (
        Series::E48.hundredths(),
        Series::E96.hundredths(),
        Series::E192.hundredths(),
    );
    assert!(e48.iter().eq(e96.iter().step_by(2)));
    assert!(e96.iter().eq(e192.iter().step_by(2)));
    let off: Vec<u16> = (0..192)
        .map(|index| {
            (
                e192[index],
                (100.0 * 10f64.powf(index as f64 / 192.0)).round() as u16,
            )
        })
        .filter(|(value, formula)| value != formula)
        .map(|(value, _)| value)
        .collect();
    assert_eq!(off, [920]);
    assert!(e192.windows(2).all(|pair| pair[0] < pair[1]));
}

#[test]
fn tolerances_are_those_of_the_series() {
    let usual: Vec<Option<f64>> = Series::ALL.into_iter().map(Series::tolerance).collect();
    assert_eq!(
        usual,
        [
            None,
            Some(0.2),
            Some(0.1),
            Some(0.05),
            Some(0.02),
            Some(0.01),
            Some(0.005)
        ]
    );
}
