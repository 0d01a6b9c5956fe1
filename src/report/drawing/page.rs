//! The page: title and answer, panels below each other with common edges, the caution at the foot.

use crate::report::chart::{Chart, Curve, Panel, Size};

use super::bars;
use super::ink;
use super::margin_labels::BEFORE_TEXT;
use super::panel::{self, Placed, TICK_GAP};
use super::range;
use super::ruler::Ruler;
use super::shapes::{Anchor, Drawing, Rect};
use super::stack::{self, Slot, Stack, as_curves};
use super::text::{self, CAUTION, HEADING, Measure, NAME, SUBTITLE, TICK, TITLE, clean};

/// Free edge of the page [px].
const EDGE: f64 = 22.0;
/// Names take no more than this share of the page's width.
const NAMES_SHARE: f64 = 0.24;

/// Lays a chart out on a page of this size; the page grows downwards where its panels need it.
pub fn lay_out(chart: &Chart, size: Size, measure: &dyn Measure) -> Drawing {
    let width = f64::from(size.width.clamp(320, 4000));
    let mut page = Drawing {
        width,
        height: f64::from(size.height.clamp(200, 4000)),
        title: clean(&chart.title),
        description: clean(&chart.subtitle),
        shapes: Vec::new(),
    };
    let top = draw_head(chart, measure, &mut page);
    let caution = caution_lines(chart, width, measure);
    let foot = if caution.is_empty() {
        0.0
    } else {
        caution.len() as f64 * CAUTION.line() + 14.0
    };
    let stack = Stack::new(chart);
    let room = page.height - EDGE - foot - top;
    let frames = stack.heights(room);
    let needed: f64 = frames.iter().sum::<f64>() + stack.between();
    let needed = (top + needed + foot + EDGE).ceil();
    page.height = if stack.fills_the_page() {
        page.height.max(needed)
    } else {
        needed
    };
    let bottom = page.height - EDGE - foot;
    draw_panels(chart, &stack, &frames, top, measure, &mut page);
    draw_caution(&caution, bottom, &mut page);
    page
}

fn draw_head(chart: &Chart, measure: &dyn Measure, page: &mut Drawing) -> f64 {
    let room = page.width - 2.0 * EDGE;
    let mut y = EDGE;
    for line in text::lines(&clean(&chart.title), TITLE, room, 2, measure) {
        page.text(
            &line,
            (EDGE, y + 0.8 * TITLE.size),
            Anchor::Start,
            TITLE,
            ink::TEXT,
        );
        y += TITLE.line();
    }
    for line in text::lines(&clean(&chart.subtitle), SUBTITLE, room, 3, measure) {
        page.text(
            &line,
            (EDGE, y + 0.8 * SUBTITLE.size),
            Anchor::Start,
            SUBTITLE,
            ink::QUIET_TEXT,
        );
        y += SUBTITLE.line();
    }
    if y > EDGE { y + 12.0 } else { y }
}

fn caution_lines(chart: &Chart, width: f64, measure: &dyn Measure) -> Vec<String> {
    let Some(caution) = &chart.caution else {
        return Vec::new();
    };
    let text = format!("Caution: {}", clean(caution));
    text::lines(&text, CAUTION, width - 2.0 * EDGE - 12.0, 8, measure)
}

fn draw_caution(lines: &[String], top: f64, page: &mut Drawing) {
    if lines.is_empty() {
        return;
    }
    let rule = Rect {
        left: EDGE,
        top: top + 12.0,
        right: EDGE + 3.0,
        bottom: page.height - EDGE + 2.0,
    };
    page.area(rule, ink::LIMIT);
    for (number, line) in lines.iter().enumerate() {
        let y = top + 14.0 + 0.85 * CAUTION.size + number as f64 * CAUTION.line();
        page.text(line, (EDGE + 12.0, y), Anchor::Start, CAUTION, ink::TEXT);
    }
}

fn draw_panels(
    chart: &Chart,
    stack: &Stack<'_>,
    frames: &[f64],
    top: f64,
    measure: &dyn Measure,
    page: &mut Drawing,
) {
    let colours = colours(chart);
    let rulers: Vec<Option<Ruler>> = stack
        .panels
        .iter()
        .zip(frames)
        .map(|(slot, &height)| y_axis(slot, height))
        .collect();
    let left = EDGE + left_margin(&rulers, frames, measure);
    let right = page.width - EDGE;
    let names_room = names_room(stack, page.width, measure);
    let mut y = top;
    for ((slot, &height), ruler) in stack.panels.iter().zip(frames).zip(rulers) {
        let frame_top = y + slot.above();
        match (slot.panel, ruler) {
            (Panel::Curves(panel), Some(ruler)) => {
                let frame = Rect {
                    left,
                    top: frame_top,
                    right: right - names_room,
                    bottom: frame_top + height,
                };
                let placed = Placed {
                    panel,
                    x: bars::across(&panel.x, slot.x, &frame, measure),
                    y: ruler.along(frame.bottom, frame.top),
                    frame,
                    colours: panel
                        .curves
                        .iter()
                        .map(|curve| number_of(&curves_name(curve), &colours))
                        .collect(),
                    with_x_axis: slot.with_x_axis,
                    with_instants: slot.with_instants,
                };
                panel::draw(&placed, EDGE, right, measure, page);
            }
            (Panel::Bars(panel), _) => {
                let area = Rect {
                    left: EDGE,
                    top: frame_top,
                    right,
                    bottom: frame_top + height,
                };
                bars::draw(panel, &area, measure, page);
            }
            (Panel::Curves(_), None) => {}
        }
        y = frame_top + height + slot.below() + stack::BETWEEN;
    }
}

fn y_axis(slot: &Slot<'_>, height: f64) -> Option<Ruler> {
    let panel = as_curves(slot.panel)?;
    let range = range::upwards(panel, slot.x);
    let ruler = |count: usize| Ruler::new(&panel.y, range, count).along(height, 0.0);
    let mut count = (height / 36.0).floor().clamp(2.0, 10.0) as usize;
    // Fewer than three figures say little about a scale: finer steps are tried while they stay apart.
    while ruler(count).ticks.len() < 3 && count < 12 && ruler(count + 1).pitch() > 1.4 * TICK.size {
        count += 1;
    }
    Some(ruler(count))
}

fn left_margin(rulers: &[Option<Ruler>], frames: &[f64], measure: &dyn Measure) -> f64 {
    let margins = rulers.iter().zip(frames).filter_map(|(ruler, &height)| {
        let ruler = ruler.as_ref()?;
        let figures = ruler
            .ticks
            .iter()
            .map(|tick| measure.width(&tick.text, TICK))
            .fold(0.0, f64::max);
        let lines = panel::heading_lines(&ruler.heading, height, measure).len() as f64;
        Some(figures + TICK_GAP + lines * HEADING.line() + 8.0)
    });
    margins.fold(0.0, f64::max)
}

fn names_room(stack: &Stack<'_>, width: f64, measure: &dyn Measure) -> f64 {
    let names = stack
        .panels
        .iter()
        .filter_map(|slot| as_curves(slot.panel))
        .flat_map(panel::names);
    let widest = names
        .map(|name| measure.width(&name, NAME))
        .fold(0.0, f64::max);
    BEFORE_TEXT + widest.clamp(20.0, NAMES_SHARE * width) + 2.0
}

fn curves_name(curve: &Curve) -> String {
    clean(&curve.name)
}

/// Names of all curves in the order in which they appear; a name's place is the number of its colour.
fn colours(chart: &Chart) -> Vec<String> {
    let mut names: Vec<String> = Vec::new();
    for curve in chart
        .panels
        .iter()
        .filter_map(as_curves)
        .flat_map(|panel| &panel.curves)
    {
        let name = curves_name(curve);
        if !names.contains(&name) {
            names.push(name);
        }
    }
    names
}

fn number_of(name: &str, colours: &[String]) -> usize {
    colours.iter().position(|known| known == name).unwrap_or(0)
}
