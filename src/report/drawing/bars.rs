//! A panel of horizontal bars: names at the left, values at the bars' ends, a common zero.

use crate::report::chart::{Axis, Bar, BarPanel, Scale};
use crate::report::engineering::engineering;

use super::ink;
use super::panel::level_heading;
use super::range;
use super::ruler::Ruler;
use super::shapes::{Anchor, Drawing, Rect};
use super::text::{HEADING, Measure, NAME, TICK, clean, cut};

/// Height of a row where there is room [px].
pub const ROW: f64 = 26.0;
/// Least height of a row [px].
const LOWEST_ROW: f64 = 17.0;
/// Room below the bars for ticks and heading [px].
pub const FOOT: f64 = 44.0;

/// Draws bars within `area`; what finds no room is summed in a last row.
pub fn draw(panel: &BarPanel, area: &Rect, measure: &dyn Measure, page: &mut Drawing) {
    if panel.bars.is_empty() {
        let middle = (
            (area.left + area.right) / 2.0,
            (area.top + area.bottom) / 2.0,
        );
        page.text(
            "nothing to draw",
            middle,
            Anchor::Middle,
            NAME,
            ink::QUIET_TEXT,
        );
        return;
    }
    let bars = shown(panel, area.height() - FOOT);
    let names: Vec<String> = bars
        .iter()
        .map(|bar| cut(&clean(&bar.name), NAME, 0.35 * area.width(), measure))
        .collect();
    let unit = clean(&panel.unit);
    let values: Vec<String> = bars
        .iter()
        .map(|bar| {
            cut(
                &engineering(bar.value, unit.as_str(), 3),
                NAME,
                0.2 * area.width(),
                measure,
            )
        })
        .collect();
    let widest = |texts: &[String]| {
        texts
            .iter()
            .map(|text| measure.width(text, NAME))
            .fold(0.0, f64::max)
    };
    let values_room = widest(&values) + 12.0;
    let left = area.left + widest(&names) + 12.0;
    let negative = bars.iter().any(|bar| bar.value < 0.0);
    let frame = Rect {
        left,
        top: area.top,
        right: area.right - values_room,
        bottom: area.bottom - FOOT,
    };
    let inner = Rect {
        left: if negative { left + values_room } else { left },
        ..frame
    };
    let ruler = ruler(panel, &bars, &inner, measure);
    draw_axis(&ruler, &frame, measure, page);
    let row = frame.height() / bars.len().max(1) as f64;
    for (number, bar) in bars.iter().enumerate() {
        let middle = frame.top + (number as f64 + 0.5) * row;
        let at = (left - 10.0, middle + NAME.drop());
        page.text(&names[number], at, Anchor::End, NAME, ink::TEXT);
        draw_bar(bar, &values[number], middle, row, &ruler, page);
    }
    if let Some(zero) = ruler.at(0.0) {
        page.line((zero, frame.top), (zero, frame.bottom), ink::AXIS, 1.0);
    }
}

/// The bars that fit; the rest as one, summed.
fn shown(panel: &BarPanel, height: f64) -> Vec<Bar> {
    let most = ((height / LOWEST_ROW).floor() as usize).max(2);
    if panel.bars.len() <= most {
        return panel.bars.clone();
    }
    let (first, rest) = panel.bars.split_at(most - 1);
    let sum = rest
        .iter()
        .map(|bar| bar.value)
        .filter(|value| value.is_finite())
        .sum();
    let more = Bar {
        name: format!("{} more, together", rest.len()),
        value: sum,
    };
    first.iter().cloned().chain([more]).collect()
}

fn ruler(panel: &BarPanel, bars: &[Bar], frame: &Rect, measure: &dyn Measure) -> Ruler {
    let axis = Axis::new(&panel.label, &panel.unit);
    let values = bars
        .iter()
        .map(|bar| bar.value)
        .filter(|&value| range::fits(value, axis.scale));
    let (low, high) = values.fold((0.0_f64, 0.0_f64), |(low, high), value| {
        (low.min(value), high.max(value))
    });
    let ends = range::usable((low, high), axis.scale);
    across(&axis, ends, frame, measure)
}

/// An axis across a frame with as many ticks as their figures leave room for.
pub fn across(axis: &Axis, ends: (f64, f64), frame: &Rect, measure: &dyn Measure) -> Ruler {
    let mut count = (frame.width() / 70.0).floor().clamp(1.0, 12.0) as usize;
    loop {
        let ruler = Ruler::new(axis, ends, count).along(frame.left, frame.right);
        let widest = ruler
            .ticks
            .iter()
            .map(|tick| measure.width(&tick.text, TICK))
            .fold(0.0, f64::max);
        if count == 1 || ruler.pitch() >= widest + 18.0 {
            return ruler;
        }
        count -= 1;
    }
}

fn draw_axis(ruler: &Ruler, frame: &Rect, measure: &dyn Measure, page: &mut Drawing) {
    for tick in &ruler.ticks {
        if let Some(x) = ruler.at(tick.value) {
            page.line((x, frame.top), (x, frame.bottom + 4.0), ink::GRID, 1.0);
            let at = (x, frame.bottom + 7.0 + 0.85 * TICK.size);
            page.text(&tick.text, at, Anchor::Middle, TICK, ink::QUIET_TEXT);
        }
    }
    let heading = level_heading(&ruler.heading, frame.width(), measure);
    let at = ((frame.left + frame.right) / 2.0, frame.bottom + FOOT - 6.0);
    page.text(&heading, at, Anchor::Middle, HEADING, ink::TEXT);
}

fn draw_bar(bar: &Bar, value: &str, middle: f64, row: f64, ruler: &Ruler, page: &mut Drawing) {
    let (Some(zero), Some(end)) = (
        ruler.at(0.0),
        ruler.at(if range::fits(bar.value, Scale::Linear) {
            bar.value
        } else {
            0.0
        }),
    ) else {
        return;
    };
    let half = (0.33 * row).min(11.0);
    let rect = Rect {
        left: zero.min(end),
        right: zero.max(end),
        top: middle - half,
        bottom: middle + half,
    };
    if rect.width() > 0.1 {
        page.area(rect, ink::curve(0));
    }
    let base = middle + NAME.drop();
    if bar.value < 0.0 {
        page.text(value, (end - 6.0, base), Anchor::End, NAME, ink::TEXT);
    } else {
        page.text(value, (end + 6.0, base), Anchor::Start, NAME, ink::TEXT);
    }
}
