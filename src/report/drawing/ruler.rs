//! An axis with its scale: where a value lies, which values are labelled, and what unit and prefix stand beside them.
//!
//! Steps are 1, 2 or 5 times a power of ten. The prefix is in the axis' heading, so that ticks are short figures:
//! `voltage at drive [kV]` with 0, 0.5, 1. Where the range is narrow against its distance from zero, the ticks count
//! from a round value that the heading names: `voltage at out, less 5.6 V [mV]`.

use crate::report::chart::{Axis, Scale};
use crate::report::engineering::{engineering, exponent_of_three, fixed, power_of_ten};
use crate::units::{prefix_of, takes_prefix};

use super::text::clean;

/// Ticks count from a round value where the range is this many times narrower than its distance from zero.
const NARROW: f64 = 1000.0;

/// Below this ratio of its ends a logarithmic axis has the ticks of a linear one: a decade holds too few powers of ten.
const FEW_DECADES: f64 = 20.0;

/// A labelled value.
#[derive(Clone, Debug, PartialEq)]
pub struct Tick {
    /// Where it stands.
    pub value: f64,
    /// What is written there.
    pub text: String,
}

/// An axis laid along a line of pixels.
#[derive(Clone, Debug)]
pub struct Ruler {
    scale: Scale,
    low: f64,
    high: f64,
    from: f64,
    to: f64,
    /// Labelled values, rising.
    pub ticks: Vec<Tick>,
    /// Values between them that get a fine line.
    pub fine: Vec<f64>,
    /// Quantity and unit.
    pub heading: String,
}

impl Ruler {
    /// An axis over a usable range (`low` < `high`, above zero for a logarithmic one) with at most about `count` ticks.
    pub fn new(axis: &Axis, (low, high): (f64, f64), count: usize) -> Self {
        let (label, unit) = (clean(&axis.label), clean(&axis.unit));
        let count = count.max(1);
        let mut ruler = Ruler {
            scale: axis.scale,
            low,
            high,
            from: 0.0,
            to: 1.0,
            ticks: Vec::new(),
            fine: Vec::new(),
            heading: String::new(),
        };
        match axis.scale {
            Scale::Logarithmic if high / low > FEW_DECADES => {
                ruler.mark_decades(&label, &unit, count)
            }
            _ => ruler.mark_steps(&label, &unit, count),
        }
        ruler
    }

    /// The same from pixel `from` (the low end) to pixel `to`.
    pub fn along(self, from: f64, to: f64) -> Self {
        Ruler { from, to, ..self }
    }

    /// Where a value lies [px], also outside the axis; None for what has no place.
    pub fn at(&self, value: f64) -> Option<f64> {
        let share = match self.scale {
            Scale::Linear => (value - self.low) / (self.high - self.low),
            Scale::Logarithmic if value > 0.0 => {
                (value / self.low).ln() / (self.high / self.low).ln()
            }
            Scale::Logarithmic => return None,
        };
        let place = self.from + share * (self.to - self.from);
        place.is_finite().then_some(place)
    }

    /// True where a value lies on the axis.
    pub fn holds(&self, value: f64) -> bool {
        (self.low..=self.high).contains(&value)
    }

    /// Smallest distance between two neighbouring ticks [px].
    pub fn pitch(&self) -> f64 {
        let places: Vec<f64> = self
            .ticks
            .iter()
            .filter_map(|tick| self.at(tick.value))
            .collect();
        places
            .windows(2)
            .map(|pair| (pair[1] - pair[0]).abs())
            .fold(f64::INFINITY, f64::min)
    }

    fn mark_steps(&mut self, label: &str, unit: &str, count: usize) {
        let (leading, power) = step(self.high - self.low, count);
        let size = decimal(leading, power);
        // A tick on the very end counts, whatever the division rounds to.
        let (first, last) = (
            (self.low / size - 1e-9).ceil(),
            (self.high / size + 1e-9).floor(),
        );
        let origin = origin(self.low, self.high, power, size);
        let furthest = (self.low - origin * size)
            .abs()
            .max((self.high - origin * size).abs());
        let exponent = shown_exponent(furthest, unit);
        let decimals = (exponent - power).max(0) as usize;
        let mut number = first;
        while number <= last {
            // Multiples of the step are exact in decimal text, and only there.
            let value = decimal(number as i64 * leading, power);
            let shown = decimal((number - origin) as i64 * leading, power - exponent);
            let text = if shown == 0.0 {
                "0".to_string()
            } else {
                fixed(shown, decimals)
            };
            self.ticks.push(Tick { value, text });
            number += 1.0;
        }
        let origin_text = (origin != 0.0).then(|| {
            let value = decimal(origin as i64 * leading, power);
            let digits = (value.abs().log10() - size.log10()).ceil().max(0.0) as usize + 1;
            format!(", less {}", engineering(value, unit, digits))
        });
        let unit = shown_unit(unit, exponent);
        self.heading = format!("{label}{}{unit}", origin_text.unwrap_or_default());
    }

    fn mark_decades(&mut self, label: &str, unit: &str, count: usize) {
        let (first, last) = (
            self.low.log10().ceil() as i32,
            self.high.log10().floor() as i32,
        );
        let stride = ((last - first + 1) as usize).div_ceil(count).max(1);
        let with_prefix = takes_prefix(unit) && prefix_of(exponent_of_three(self.low)).is_some();
        let roomy = 3 * (last - first + 1) <= count as i32 + 1;
        let leading: &[i64] = if roomy { &[1, 2, 5] } else { &[1] };
        let powers = (first - stride as i32..=last).step_by(stride);
        for (power, &leading) in
            powers.flat_map(|power| leading.iter().map(move |leading| (power, leading)))
        {
            let value = decimal(leading, power);
            if self.holds(value) {
                let text = if with_prefix {
                    engineering(value, unit, 1)
                } else {
                    plain(leading, power)
                };
                self.ticks.push(Tick { value, text });
            }
        }
        if stride == 1 {
            let between = (first - 1..=last)
                .flat_map(|power| (2..10).map(move |leading| decimal(leading, power)));
            self.fine = between
                .filter(|value| (self.low..=self.high).contains(value))
                .collect();
        }
        let unit = if with_prefix || unit.is_empty() {
            String::new()
        } else {
            format!(" [{unit}]")
        };
        self.heading = format!("{label}{unit}");
    }
}

/// The smallest step of 1, 2 or 5 times a power of ten that divides `span` into at most `count` parts: leading figure
/// and power.
fn step(span: f64, count: usize) -> (i64, i32) {
    let least = span / count as f64;
    let power = least.log10().floor() as i32;
    // The power may be one off where `least` is a power of ten, so one more is tried at either end.
    [power - 1, power, power + 1]
        .into_iter()
        .flat_map(|power| [(1, power), (2, power), (5, power)])
        .find(|&(leading, power)| decimal(leading, power) >= least * (1.0 - 1e-9))
        .unwrap_or((1, power + 2))
}

/// The multiple of the step from which ticks count: 0 unless the range is narrow, else the roundest value in or just
/// below it.
fn origin(low: f64, high: f64, power: i32, step: f64) -> f64 {
    let span = high - low;
    let furthest = low.abs().max(high.abs());
    if furthest < NARROW * span {
        return 0.0;
    }
    let largest = furthest.log10().ceil() as i32;
    // From ten times the step's power on, a power of ten is a whole number of steps.
    for grain in (power + 1..=largest).rev().map(|power| decimal(1, power)) {
        let value = (high / grain).floor() * grain;
        if value >= low - span {
            return (value / step).round();
        }
    }
    (low / step).floor()
}

/// Power of ten that the ticks are counted in.
fn shown_exponent(furthest: f64, unit: &str) -> i32 {
    let exponent = exponent_of_three(furthest);
    let plain = !takes_prefix(unit) && (1e-2..1e5).contains(&furthest);
    if plain { 0 } else { exponent }
}

/// ` [mV]`, ` [10⁶ m²]`, or nothing for a plain figure.
fn shown_unit(unit: &str, exponent: i32) -> String {
    match (exponent, prefix_of(exponent)) {
        (0, _) if unit.is_empty() => String::new(),
        (_, Some(letter)) if takes_prefix(unit) => format!(" [{letter}{unit}]"),
        (0, _) => format!(" [{unit}]"),
        _ => format!(
            " [{}]",
            format!("{} {unit}", power_of_ten(exponent)).trim_end()
        ),
    }
}

/// A figure without unit: written out where it is short, else a power of ten.
fn plain(leading: i64, power: i32) -> String {
    match (leading, power) {
        (_, -3..=4) => fixed(decimal(leading, power), (-power).max(0) as usize),
        (1, _) => power_of_ten(power),
        _ => format!("{leading}·{}", power_of_ten(power)),
    }
}

/// `leading` · 10^`power`, the nearest `f64`.
fn decimal(leading: i64, power: i32) -> f64 {
    format!("{leading}e{power}")
        .parse()
        .expect("digits, `e` and a whole exponent are a number")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ruler(label: &str, unit: &str, low: f64, high: f64, count: usize) -> (String, Vec<String>) {
        let ruler = Ruler::new(&Axis::new(label, unit), (low, high), count);
        (
            ruler.heading,
            ruler.ticks.into_iter().map(|tick| tick.text).collect(),
        )
    }

    fn expect(got: (String, Vec<String>), heading: &str, ticks: &[&str]) {
        assert_eq!(got.0, heading);
        assert_eq!(got.1, ticks);
    }

    #[test]
    fn the_prefix_is_in_the_heading_and_ticks_are_round() {
        expect(
            ruler("voltage at drive", "V", -50.0, 1250.0, 5),
            "voltage at drive [kV]",
            &["0", "0.5", "1.0"],
        );
        expect(
            ruler("time", "s", 0.0, 4e-6, 5),
            "time [µs]",
            &["0", "1", "2", "3", "4"],
        );
        expect(
            ruler("current", "A", -0.06, 0.06, 6),
            "current [mA]",
            &["−60", "−40", "−20", "0", "20", "40", "60"],
        );
        expect(
            ruler("saturation", "", 0.0, 1.0, 5),
            "saturation",
            &["0", "0.2", "0.4", "0.6", "0.8", "1.0"],
        );
        expect(
            ruler("area", "m²", 0.0, 4e-5, 4),
            "area [10⁻⁶ m²]",
            &["0", "10", "20", "30", "40"],
        );
    }

    #[test]
    fn a_narrow_range_counts_from_a_round_value() {
        let far = ["5.598", "5.600", "5.602", "5.604", "5.606"];
        expect(
            ruler("voltage", "V", 5.5979, 5.6061, 5),
            "voltage [V]",
            &far,
        );
        let (heading, ticks) = ruler("voltage", "V", 5.598_9, 5.603_2, 5);
        assert_eq!(heading, "voltage, less 5.6 V [mV]");
        assert_eq!(ticks, ["−1", "0", "1", "2", "3"]);
        let (heading, ticks) = ruler("time", "s", 0.02, 0.020_012, 6);
        assert_eq!(heading, "time, less 20 ms [µs]");
        assert_eq!(ticks, ["0", "2", "4", "6", "8", "10", "12"]);
        let (heading, _) = ruler("voltage", "V", -5.600_004, -5.600_001, 4);
        assert!(heading.starts_with("voltage, less −5.6000"), "{heading}");
    }

    #[test]
    fn ticks_are_few_and_cover_any_range() {
        for power in (-140..140).step_by(7) {
            for (low, high) in [(0.0, 1.0), (-3.3, 7.7), (0.999, 1.001), (1.0, 1.000_000_1)] {
                let scale = 10f64.powi(power);
                let ruler = Ruler::new(&Axis::new("x", "V"), (low * scale, high * scale), 6);
                assert!(
                    (2..=7).contains(&ruler.ticks.len()),
                    "{low} {high} e{power}: {:?}",
                    ruler.ticks
                );
                assert!(
                    ruler
                        .ticks
                        .iter()
                        .all(|tick| tick.text.chars().count() <= 6),
                    "{:?}",
                    ruler.ticks
                );
                assert!(
                    ruler
                        .ticks
                        .windows(2)
                        .all(|pair| pair[0].text != pair[1].text)
                );
            }
        }
    }

    #[test]
    fn a_tick_stands_where_its_text_says() {
        let ruler = Ruler::new(&Axis::new("x", "A"), (-0.7, 2.3), 7).along(100.0, 400.0);
        for tick in &ruler.ticks {
            let value: f64 = tick.text.replace('−', "-").parse().expect("a figure");
            assert_eq!(value, tick.value);
            assert!(
                (ruler.at(value).expect("a place") - (100.0 + 100.0 * (value + 0.7))).abs() < 1e-9
            );
        }
        assert!((ruler.pitch() - 50.0).abs() < 1e-9);
        assert_eq!(ruler.at(f64::NAN), None);
    }

    #[test]
    fn a_logarithmic_axis_has_its_powers_of_ten() {
        let axis = Axis::new("series resistance", "Ω").logarithmic();
        let ruler = Ruler::new(&axis, (1.0, 1e5), 8).along(0.0, 500.0);
        let texts: Vec<&str> = ruler.ticks.iter().map(|tick| tick.text.as_str()).collect();
        assert_eq!(texts, ["1 Ω", "10 Ω", "100 Ω", "1 kΩ", "10 kΩ", "100 kΩ"]);
        assert!((ruler.at(1e3).expect("a place") - 300.0).abs() < 1e-9);
        assert_eq!(ruler.at(0.0), None);
        assert_eq!(ruler.fine.len(), 5 * 8);
        let wide = Ruler::new(&Axis::new("share", "").logarithmic(), (1e-15, 1e15), 6);
        assert!(wide.ticks.len() <= 6 && wide.fine.is_empty());
        let few = Ruler::new(&axis, (15.0, 700.0), 7);
        let texts: Vec<&str> = few.ticks.iter().map(|tick| tick.text.as_str()).collect();
        assert_eq!(texts, ["20 Ω", "50 Ω", "100 Ω", "200 Ω", "500 Ω"]);
        let narrow = Ruler::new(&axis, (100.0, 300.0), 5);
        assert_eq!(narrow.ticks[0].text, "100");
    }
}
