//! From where to where an axis runs: what the data need, a little air, and never an empty or endless span.

use crate::report::chart::{Axis, Curve, CurvePanel, Scale, Style};

/// Magnitudes beyond this, and spans below its inverse, are taken as no value: their ratios would leave an `f64`.
const LARGEST: f64 = 1e150;

/// A limit is drawn in the panel unless it would widen the range more than this many times, hiding the curves.
const WIDEST_BY_LIMIT: f64 = 8.0;

/// Air above and below the data, as a share of their span.
const AIR: f64 = 0.05;

/// Air where a mark's label wants room beside the peak.
const AIR_FOR_MARKS: f64 = 0.13;

/// Lowest and highest of what was seen so far.
#[derive(Clone, Copy, Debug)]
pub struct Extent(f64, f64);

impl Extent {
    /// Nothing seen.
    pub const NONE: Extent = Extent(f64::INFINITY, f64::NEG_INFINITY);

    /// With one more value; what has no place on the axis is passed over.
    pub fn with(self, value: f64, scale: Scale) -> Extent {
        match fits(value, scale) {
            true => Extent(self.0.min(value), self.1.max(value)),
            false => self,
        }
    }

    fn span(self) -> f64 {
        (self.1 - self.0).max(0.0)
    }
}

/// True where a value has a place on such an axis.
pub fn fits(value: f64, scale: Scale) -> bool {
    value.abs() <= LARGEST && (scale == Scale::Linear || value >= 1.0 / LARGEST)
}

/// Range of an x axis that panels share: the one that was asked for, or all their data.
pub fn across(axis: &Axis, panels: &[&CurvePanel]) -> (f64, f64) {
    let points = panels
        .iter()
        .flat_map(|panel| &panel.curves)
        .flat_map(|curve| &curve.points);
    let data = points
        .filter(|(_, y)| y.is_finite())
        .fold(Extent::NONE, |seen, (x, _)| seen.with(*x, axis.scale));
    if axis.range.is_some() || !panels.iter().flat_map(|panel| &panel.curves).any(has_discs) {
        return usable(axis.range.unwrap_or((data.0, data.1)), axis.scale);
    }
    // A disc on the very edge would be cut in half.
    let (low, high) = usable((data.0, data.1), axis.scale);
    match axis.scale {
        Scale::Linear => (low - 0.02 * (high - low), high + 0.02 * (high - low)),
        Scale::Logarithmic => (
            low / (high / low).powf(0.02),
            high * (high / low).powf(0.02),
        ),
    }
}

fn has_discs(curve: &Curve) -> bool {
    matches!(curve.style, Style::Points | Style::Stems)
}

/// Range of a panel's y axis over the visible part of x.
pub fn upwards(panel: &CurvePanel, x: (f64, f64)) -> (f64, f64) {
    let scale = panel.y.scale;
    if let Some(range) = panel.y.range {
        return usable(range, scale);
    }
    let marks = panel
        .marks
        .iter()
        .filter(|mark| (x.0..=x.1).contains(&mark.x));
    let marked = marks.clone().count() > 0;
    let mut data = marks.fold(Extent::NONE, |seen, mark| seen.with(mark.y, scale));
    for curve in &panel.curves {
        data = visible(curve.style, &curve.points, x, scale, data);
        if matches!(curve.style, Style::Stems | Style::Steps) {
            data = data.with(0.0, scale);
        }
    }
    let data = limits_included(panel, with_zero(data, scale), scale);
    aired(data, scale, if marked { AIR_FOR_MARKS } else { AIR })
}

/// `seen` with the part of a curve between the ends of x; straight lines are cut there.
fn visible(
    style: Style,
    points: &[(f64, f64)],
    x: (f64, f64),
    scale: Scale,
    mut seen: Extent,
) -> Extent {
    let inside = points.iter().filter(|point| (x.0..=x.1).contains(&point.0));
    seen = inside.fold(seen, |seen, point| seen.with(point.1, scale));
    if matches!(style, Style::Points | Style::Stems) {
        return seen;
    }
    for pair in points.windows(2) {
        let (from, to) = (pair[0], pair[1]);
        for edge in [x.0, x.1] {
            if (from.0 < edge) != (to.0 < edge) && fits(from.1, scale) && fits(to.1, scale) {
                let share = ((edge - from.0) / (to.0 - from.0)).clamp(0.0, 1.0);
                seen = seen.with(
                    if style == Style::Steps {
                        from.1
                    } else {
                        from.1 + share * (to.1 - from.1)
                    },
                    scale,
                );
            }
        }
    }
    seen
}

/// With zero where it is near: a curve from 2 to 10 is read against zero, one from 9 to 10 is not.
fn with_zero(data: Extent, scale: Scale) -> Extent {
    let Extent(low, high) = data;
    let level = data.span() <= 1e-12 * low.abs().max(high.abs());
    let near = |distance: f64| distance > 0.0 && (level || distance <= 0.5 * data.span());
    match scale == Scale::Linear && low <= high && (near(low) || near(-high)) {
        true => data.with(0.0, scale),
        false => data,
    }
}

fn limits_included(panel: &CurvePanel, data: Extent, scale: Scale) -> Extent {
    panel.limits.iter().fold(data, |seen, limit| {
        let wider = seen.with(limit.value, scale);
        let (old, new) = match scale {
            Scale::Linear => (data.span(), wider.span()),
            Scale::Logarithmic => ((data.1 / data.0).ln(), (wider.1 / wider.0).ln()),
        };
        if !old.is_finite() || old <= 0.0 || new <= WIDEST_BY_LIMIT * old {
            wider
        } else {
            seen
        }
    })
}

fn aired(data: Extent, scale: Scale, air: f64) -> (f64, f64) {
    let (low, high) = usable((data.0, data.1), scale);
    match scale {
        Scale::Linear => {
            let span = high - low;
            // The side towards zero needs room for a line only, the other one for labels.
            let below = if low >= 0.0 { AIR } else { air };
            let above = if high <= 0.0 { AIR } else { air };
            (low - below * span, high + above * span)
        }
        Scale::Logarithmic => {
            let factor = (high / low).powf(air);
            (low / factor, high * factor)
        }
    }
}

/// A range with two different finite ends in rising order, above zero for a logarithmic axis.
pub fn usable((a, b): (f64, f64), scale: Scale) -> (f64, f64) {
    let (low, high) = (a.min(b), a.max(b));
    let known = fits(low, scale) && fits(high, scale);
    match scale {
        Scale::Linear if !known || high.abs().max(low.abs()) < 1.0 / LARGEST => (0.0, 1.0),
        Scale::Linear if high - low <= 1e-12 * high.abs().max(low.abs()) => {
            let half = 0.1 * high.abs().max(low.abs());
            (low - half, high + half)
        }
        Scale::Linear => (low, high),
        Scale::Logarithmic if fits(high, scale) && !fits(low, scale) => (high / 1e6, high),
        Scale::Logarithmic if !known => (1.0, 10.0),
        Scale::Logarithmic if high / low < 1.001 => (low / 3.0, high * 3.0),
        Scale::Logarithmic => (low, high),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::chart::LimitLine;

    fn panel(points: &[(f64, f64)], limits: &[f64]) -> CurvePanel {
        let limits = limits
            .iter()
            .map(|&value| LimitLine {
                label: String::new(),
                value,
            })
            .collect();
        let curves = vec![Curve {
            points: points.to_vec(),
            ..Curve::default()
        }];
        CurvePanel {
            curves,
            limits,
            ..CurvePanel::default()
        }
    }

    fn range(points: &[(f64, f64)], limits: &[f64]) -> (f64, f64) {
        upwards(&panel(points, limits), (0.0, 1.0))
    }

    #[test]
    fn near_zero_is_shown_and_far_zero_is_not() {
        let near =
            |(a, b): (f64, f64), (c, d): (f64, f64)| (a - c).abs() < 1e-9 && (b - d).abs() < 1e-9;
        assert!(near(range(&[(0.0, 2.0), (1.0, 10.0)], &[]), (-0.5, 10.5)));
        assert!(near(range(&[(0.0, 9.0), (1.0, 10.0)], &[]), (8.95, 10.05)));
        assert!(near(range(&[(0.0, 5.0), (1.0, 5.0)], &[]), (-0.25, 5.25)));
        assert!(near(range(&[(0.0, -5.0)], &[]), (-5.25, 0.25)));
    }

    #[test]
    fn a_limit_widens_the_range_unless_it_would_hide_the_curve() {
        assert!(range(&[(0.0, 0.0), (1.0, 24.0)], &[60.0]).1 > 60.0);
        assert!(range(&[(0.0, 0.0), (1.0, 2400.0)], &[60.0]).0 <= 0.0);
        assert!(range(&[(0.0, 0.0), (1.0, 24.0)], &[1000.0]).1 < 30.0);
        assert!(range(&[], &[60.0]).1 > 60.0);
    }

    #[test]
    fn a_zoom_between_two_points_sees_the_line() {
        let (low, high) = range(&[(-10.0, -10.0), (10.0, 10.0)], &[]);
        assert!(
            (low + 0.05).abs() < 1e-9 && (high - 1.05).abs() < 1e-9,
            "{low} {high}"
        );
    }

    #[test]
    fn every_range_can_be_used() {
        let odd = [
            0.0,
            -0.0,
            1.0,
            -1.0,
            1e-15,
            1e15,
            1e300,
            -1e300,
            1e-320,
            f64::NAN,
            f64::INFINITY,
            f64::NEG_INFINITY,
        ];
        for a in odd {
            for b in odd {
                for scale in [Scale::Linear, Scale::Logarithmic] {
                    let (low, high) = usable((a, b), scale);
                    assert!(
                        low < high && (high - low).is_finite() && (high / (high - low)).is_finite(),
                        "{a} {b}"
                    );
                    assert!(scale == Scale::Linear || low > 0.0);
                    let mut panel = panel(&[(0.0, a), (1.0, b)], &[a]);
                    panel.y.scale = scale;
                    let (low, high) = upwards(&panel, (0.0, 1.0));
                    assert!(
                        low < high && (high - low).is_finite(),
                        "{a} {b}: {low} {high}"
                    );
                }
            }
        }
    }
}
