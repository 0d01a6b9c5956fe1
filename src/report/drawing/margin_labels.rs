//! Names beside a panel: each curve at its end, each limit at its line, none over another.

use super::ink::{self, Ink};
use super::shapes::{Anchor, Drawing, Rect};
use super::spread::spread;
use super::text::{self, Measure, NAME};

/// From the panel's edge to the sample of the curve [px].
const LEADER: f64 = 14.0;
/// Length of the sample [px].
const SAMPLE: f64 = 18.0;
/// Between sample and text [px].
const GAP: f64 = 6.0;
/// Ends closer than this meet [px].
const MEETING: f64 = 5.0;
/// Between two labels [px].
const APART: f64 = 3.0;
/// What stands left of a label's text [px].
pub const BEFORE_TEXT: f64 = LEADER + SAMPLE + GAP;

/// A name to be placed.
#[derive(Clone, Debug)]
pub struct MarginLabel {
    /// The name, already cleaned.
    pub text: String,
    /// Where what it names ends [px]; None for a curve of which nothing is visible.
    pub end: Option<(f64, f64)>,
    /// Mean height of what it names [px], which orders names whose ends meet.
    pub level: f64,
    /// How it looks.
    pub sample: Sample,
}

/// How what is named looks.
#[derive(Clone, Copy, Debug)]
pub enum Sample {
    /// A line with its pattern and width.
    Line(Ink, &'static [f64], f64),
    /// A disc.
    Disc(Ink),
}

impl Sample {
    fn ink(&self) -> Ink {
        match *self {
            Sample::Line(ink, ..) | Sample::Disc(ink) => ink,
        }
    }
}

/// Draws the labels right of `frame`, between its edge and `right`. Labels that find no room are counted, not lost.
pub fn draw(
    labels: &[MarginLabel],
    frame: &Rect,
    right: f64,
    measure: &dyn Measure,
    page: &mut Drawing,
) {
    let start = frame.right + BEFORE_TEXT;
    let (low, high) = (frame.top - 6.0, frame.bottom + 6.0);
    let fitted = sorted(fitted(labels, right - start, high - low, measure));
    let wanted: Vec<f64> = fitted
        .iter()
        .map(|(label, _)| label.end.map_or(frame.bottom, |end| end.1))
        // Ends nearly level are taken as level, so that the order of `sorted` stays.
        .scan(f64::NEG_INFINITY, |before, end| {
            *before = if end - *before < MEETING {
                *before
            } else {
                end
            };
            Some(*before)
        })
        .collect();
    let sizes: Vec<f64> = fitted.iter().map(|(_, lines)| height(lines)).collect();
    for ((label, lines), middle) in fitted.iter().zip(spread(&wanted, &sizes, low, high)) {
        draw_sample(label, middle, frame, page);
        let first = middle - (lines.len() as f64 - 1.0) * NAME.line() / 2.0 + NAME.drop();
        for (number, line) in lines.iter().enumerate() {
            let at = (start, first + number as f64 * NAME.line());
            page.text(line, at, Anchor::Start, NAME, ink::TEXT);
        }
    }
}

/// A label and the lines that it takes.
type Fitted = (MarginLabel, Vec<String>);

/// By the height of their ends, and where ends meet by the mean height of what they name.
fn sorted(mut labels: Vec<Fitted>) -> Vec<Fitted> {
    let end = |label: &Fitted| label.0.end.map_or(f64::MAX, |end| end.1);
    labels.sort_by(|a, b| end(a).total_cmp(&end(b)));
    let mut rest = &mut labels[..];
    while let Some(first) = rest.first().map(end) {
        let count = rest
            .iter()
            .take_while(|label| end(label) - first < MEETING)
            .count()
            .max(1);
        let (meeting, below) = rest.split_at_mut(count);
        meeting.sort_by(|a, b| a.0.level.total_cmp(&b.0.level));
        rest = below;
    }
    labels
}

fn height(lines: &[String]) -> f64 {
    lines.len() as f64 * NAME.line() + APART
}

/// The labels with their lines: two lines each where there is room, else one; the last ones give way to a count. Limits come
/// first in the list, so they stay.
fn fitted(labels: &[MarginLabel], room: f64, tall: f64, measure: &dyn Measure) -> Vec<Fitted> {
    for most in [2, 1] {
        let all: Vec<Fitted> = labels
            .iter()
            .map(|label| {
                (
                    label.clone(),
                    text::lines(&label.text, NAME, room, most, measure),
                )
            })
            .collect();
        if all.iter().map(|(_, lines)| height(lines)).sum::<f64>() <= tall {
            return all;
        }
    }
    let count = ((tall / (NAME.line() + APART)).floor() as usize)
        .max(1)
        .min(labels.len())
        - 1;
    let rest = labels.len() - count;
    let more = MarginLabel {
        text: format!("and {rest} more"),
        end: None,
        level: 0.0,
        sample: Sample::Line(ink::GROUND, &[], 0.0),
    };
    let kept = labels.iter().take(count).cloned().chain([more]);
    kept.map(|label| {
        (
            label.clone(),
            text::lines(&label.text, NAME, room, 1, measure),
        )
    })
    .collect()
}

/// A short piece of the line at the label, and a leader to it from where the line ends.
fn draw_sample(label: &MarginLabel, middle: f64, frame: &Rect, page: &mut Drawing) {
    let (left, right) = (frame.right + LEADER, frame.right + LEADER + SAMPLE);
    match label.sample {
        Sample::Line(ink, pattern, width) => {
            page.path(&[(left, middle), (right, middle)], ink, width, pattern)
        }
        Sample::Disc(ink) => page.disc(((left + right) / 2.0, middle), 3.5, ink),
    }
    let Some(end) = label.end else { return };
    let ink = label.sample.ink();
    let far = frame.right - end.0 > 3.0;
    let from = if far { end } else { (frame.right + 2.0, end.1) };
    if far {
        page.path(&[from, (left - 2.0, middle)], ink, 1.0, &[1.5, 3.0]);
    } else {
        page.line(from, (left, middle), ink, 1.0);
    }
}
