//! A panel of curves inside its frame: grid, axes, limits, instants, curves, marks, names.

use crate::report::chart::CurvePanel;

use super::callouts::{self, Callout, Obstacles};
use super::ink;
use super::margin_labels::{self, MarginLabel, Sample};
use super::ruler::Ruler;
use super::shapes::{Anchor, Drawing, Rect};
use super::spread::spread;
use super::text::{self, HEADING, Measure, NAME, TICK, clean, cut};
use super::traces::{self, pixel};

/// Width and pattern of a limit [px].
const LIMIT: (f64, &[f64]) = (2.0, &[7.0, 4.0]);
/// Pattern of an instant [px].
const INSTANT: &[f64] = &[2.0, 3.0];
/// Width below which the name of an instant says nothing [px].
const NARROWEST_NAME: f64 = 70.0;
/// Room above a frame for the names of instants [px].
pub const STRIP: f64 = 26.0;
/// Room below a frame for ticks and heading of the x axis [px].
pub const X_AXIS: f64 = 44.0;
/// Between a tick's figure and the frame [px].
pub const TICK_GAP: f64 = 7.0;

/// A panel with its axes laid along its frame.
pub struct Placed<'a> {
    /// What is drawn.
    pub panel: &'a CurvePanel,
    /// Across.
    pub x: Ruler,
    /// Upwards.
    pub y: Ruler,
    /// Where.
    pub frame: Rect,
    /// Number of each curve's colour.
    pub colours: Vec<usize>,
    /// True where the x axis is written below.
    pub with_x_axis: bool,
    /// True where the names of its instants are written above.
    pub with_instants: bool,
}

/// Draws a panel; names go right of the frame up to `right`, headings left of it from `left`.
pub fn draw(placed: &Placed<'_>, left: f64, right: f64, measure: &dyn Measure, page: &mut Drawing) {
    draw_grid(placed, page);
    draw_axes(placed, left, measure, page);
    let uprights = draw_instants(placed, measure, page);
    let mut labels = draw_limits(placed, page);
    let mut levels: Vec<f64> = labels
        .iter()
        .filter_map(|label| label.end)
        .map(|end| end.1)
        .collect();
    levels.extend(placed.y.at(0.0));
    let mut drawn: Vec<Vec<(f64, f64)>> = Vec::new();
    for (curve, &number) in placed.panel.curves.iter().zip(&placed.colours) {
        let trace = traces::draw(curve, number, placed, page);
        drawn.extend(trace.pieces);
        labels.push(trace.label);
    }
    if placed.panel.curves.is_empty() {
        let middle = (
            (placed.frame.left + placed.frame.right) / 2.0,
            (placed.frame.top + placed.frame.bottom) / 2.0,
        );
        page.text(
            "nothing to draw",
            middle,
            Anchor::Middle,
            NAME,
            ink::QUIET_TEXT,
        );
    }
    let marks = marks(placed);
    let around = Obstacles {
        curves: &drawn,
        levels: &levels,
        uprights: &uprights,
    };
    callouts::draw(&marks, &around, &placed.frame, measure, page);
    margin_labels::draw(&labels, &placed.frame, right, measure, page);
}

/// Names that stand right of a panel, for the width that they need.
pub fn names(panel: &CurvePanel) -> Vec<String> {
    let limits = panel.limits.iter().map(|limit| limit.label.as_str());
    limits
        .chain(panel.curves.iter().map(|curve| curve.name.as_str()))
        .map(clean)
        .collect()
}

fn draw_grid(placed: &Placed<'_>, page: &mut Drawing) {
    let frame = placed.frame;
    let across = |value: f64| {
        placed
            .x
            .at(value)
            .map(|x| [(x, frame.top), (x, frame.bottom)])
    };
    let level = |value: f64| {
        placed
            .y
            .at(value)
            .map(|y| [(frame.left, y), (frame.right, y)])
    };
    let fine = placed.x.fine.iter().copied().filter_map(across);
    for line in fine.chain(placed.y.fine.iter().copied().filter_map(level)) {
        page.path(&line, ink::FINE_GRID, 1.0, &[]);
    }
    let ticks = placed.x.ticks.iter().filter_map(|tick| across(tick.value));
    for line in ticks.chain(placed.y.ticks.iter().filter_map(|tick| level(tick.value))) {
        page.path(&line, ink::GRID, 1.0, &[]);
    }
    if placed.y.holds(0.0)
        && let Some(zero) = level(0.0)
    {
        page.path(&zero, ink::AXIS, 1.0, &[]);
    }
    page.path(
        &[
            (frame.left, frame.top),
            (frame.left, frame.bottom),
            (frame.right, frame.bottom),
        ],
        ink::AXIS,
        1.0,
        &[],
    );
}

fn draw_axes(placed: &Placed<'_>, left: f64, measure: &dyn Measure, page: &mut Drawing) {
    let frame = placed.frame;
    for tick in &placed.y.ticks {
        if let Some(y) = placed.y.at(tick.value) {
            page.line((frame.left - 4.0, y), (frame.left, y), ink::AXIS, 1.0);
            let at = (frame.left - TICK_GAP, y + TICK.drop());
            page.text(&tick.text, at, Anchor::End, TICK, ink::QUIET_TEXT);
        }
    }
    let middle = (frame.top + frame.bottom) / 2.0;
    for (number, line) in heading_lines(&placed.y.heading, frame.height(), measure)
        .iter()
        .enumerate()
    {
        let at = (
            left + HEADING.size * 0.9 + number as f64 * HEADING.line(),
            middle,
        );
        page.text_upwards(line, at, HEADING, ink::TEXT);
    }
    for tick in &placed.x.ticks {
        if let Some(x) = placed.x.at(tick.value) {
            page.line((x, frame.bottom), (x, frame.bottom + 4.0), ink::AXIS, 1.0);
            if placed.with_x_axis {
                let at = (x, frame.bottom + TICK_GAP + 0.85 * TICK.size);
                page.text(&tick.text, at, Anchor::Middle, TICK, ink::QUIET_TEXT);
            }
        }
    }
    if placed.with_x_axis {
        let heading = level_heading(&placed.x.heading, frame.width(), measure);
        let at = (
            (frame.left + frame.right) / 2.0,
            frame.bottom + X_AXIS - 6.0,
        );
        page.text(&heading, at, Anchor::Middle, HEADING, ink::TEXT);
    }
}

/// A level axis' heading on one line of this width. The unit stays whole where the label leaves it room.
pub fn level_heading(heading: &str, room: f64, measure: &dyn Measure) -> String {
    let Some((label, unit)) = heading.rsplit_once(" [") else {
        return cut(heading, HEADING, room, measure);
    };
    let unit = format!(" [{unit}");
    let rest = room - measure.width(&unit, HEADING);
    match measure.width(heading, HEADING) <= room || rest < 0.2 * room {
        true => cut(heading, HEADING, room, measure),
        false => format!("{}{unit}", cut(label, HEADING, rest, measure)),
    }
}

/// A y axis' heading in at most two lines along a frame of this height. The unit stays: it is what is cut last.
pub fn heading_lines(heading: &str, height: f64, measure: &dyn Measure) -> Vec<String> {
    let room = height + 16.0;
    let lines = text::lines(heading, HEADING, room, 2, measure);
    let Some((label, unit)) = heading.rsplit_once(" [") else {
        return lines;
    };
    if lines.last().is_none_or(|line| !line.ends_with('…')) {
        return lines;
    }
    vec![
        cut(label, HEADING, room, measure),
        cut(&format!("[{unit}"), HEADING, room, measure),
    ]
}

/// Lines up the panel, named above it; returns their places. A crowd of them would be a wall: it is told in words.
fn draw_instants(placed: &Placed<'_>, measure: &dyn Measure, page: &mut Drawing) -> Vec<f64> {
    let frame = placed.frame;
    let visible = placed
        .panel
        .instants
        .iter()
        .filter(|instant| placed.x.holds(instant.at));
    let seen: Vec<(f64, String)> = visible
        .filter_map(|instant| Some((placed.x.at(instant.at)?, clean(&instant.label))))
        .collect();
    if seen.len() as f64 * NARROWEST_NAME > frame.width() {
        let text = format!("{} instants, too close together to be drawn", seen.len());
        let text = cut(&text, NAME, frame.width(), measure);
        let at = ((frame.left + frame.right) / 2.0, frame.top - 13.0);
        if placed.with_instants {
            page.text(&text, at, Anchor::Middle, NAME, ink::QUIET_TEXT);
        }
        return Vec::new();
    }
    for &(x, _) in &seen {
        page.path(
            &[(x, frame.bottom), (x, frame.top)],
            ink::LEADER,
            1.2,
            INSTANT,
        );
    }
    let places = seen.iter().map(|(x, _)| *x).collect();
    if placed.with_instants {
        name_instants(seen, &frame, measure, page);
    }
    places
}

/// Names above the frame, each near its line.
fn name_instants(
    mut seen: Vec<(f64, String)>,
    frame: &Rect,
    measure: &dyn Measure,
    page: &mut Drawing,
) {
    let (low, high) = (frame.left - 40.0, frame.right + 40.0);
    let width = |name: &str| measure.width(name, NAME) + 12.0;
    let tight = seen.iter().map(|(_, name)| width(name)).sum::<f64>() > high - low;
    let most = (high - low) / seen.len().max(1) as f64 - 12.0;
    if tight {
        seen.iter_mut()
            .for_each(|(_, name)| *name = cut(name, NAME, most, measure));
    }
    let places: Vec<f64> = seen.iter().map(|(x, _)| *x).collect();
    let widths: Vec<f64> = seen.iter().map(|(_, name)| width(name)).collect();
    let centres = spread(&places, &widths, low, high);
    for ((x, name), centre) in seen.iter().zip(centres) {
        page.line((*x, frame.top), (centre, frame.top - 9.0), ink::LEADER, 1.0);
        let at = (centre, frame.top - 13.0);
        page.text(name, at, Anchor::Middle, NAME, ink::QUIET_TEXT);
    }
}

/// Limits as broken lines; returns their labels. One outside the axis is named at the edge, with an arrow.
fn draw_limits(placed: &Placed<'_>, page: &mut Drawing) -> Vec<MarginLabel> {
    let frame = placed.frame;
    let (width, pattern) = LIMIT;
    let mut labels = Vec::new();
    for limit in &placed.panel.limits {
        let label = clean(&limit.label);
        let sample = Sample::Line(ink::LIMIT, pattern, width);
        let Some(y) = placed.y.at(limit.value) else {
            continue;
        };
        let (text, end) = match y {
            y if y < frame.top - 0.5 => (format!("↑ {label}"), frame.top),
            y if y > frame.bottom + 0.5 => (format!("↓ {label}"), frame.bottom),
            y => {
                page.path(
                    &[(frame.left, y), (frame.right, y)],
                    ink::LIMIT,
                    width,
                    pattern,
                );
                (label, y)
            }
        };
        labels.push(MarginLabel {
            text,
            end: Some((frame.right, end)),
            level: end,
            sample,
        });
    }
    labels
}

/// Marks in view.
fn marks(placed: &Placed<'_>) -> Vec<Callout> {
    let in_view = placed
        .panel
        .marks
        .iter()
        .filter(|mark| placed.x.holds(mark.x) && placed.y.holds(mark.y));
    in_view
        .filter_map(|mark| {
            Some(Callout {
                at: pixel(placed, mark.x, mark.y)?,
                text: clean(&mark.label),
            })
        })
        .collect()
}
