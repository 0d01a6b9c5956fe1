//! One curve in its panel, in the style it asks for, and the name that stands at its end.

use std::collections::BTreeSet;

use crate::report::chart::{Curve, Style};

use super::clip;
use super::ink::{self, Ink};
use super::margin_labels::{MarginLabel, Sample};
use super::panel::Placed;
use super::range;
use super::shapes::{Drawing, Rect};
use super::text::clean;

/// Width of a curve [px].
const WIDTH: f64 = 1.8;
/// Pattern of a curve that is compared with [px].
const COMPARED: &[f64] = &[6.0, 4.0];
/// Radius of a disc [px].
const DISC: f64 = 3.0;

/// What came of a curve.
pub struct Trace {
    /// Where it runs [px]: what labels should not cover.
    pub pieces: Vec<Vec<(f64, f64)>>,
    /// Its name.
    pub label: MarginLabel,
}

/// Draws the curve of this number.
pub fn draw(curve: &Curve, number: usize, placed: &Placed<'_>, page: &mut Drawing) -> Trace {
    let colour = ink::curve(number);
    let pattern = if curve.style == Style::Dashed {
        COMPARED
    } else {
        ink::dash_of(number)
    };
    let (pieces, sample) = match curve.style {
        Style::Points | Style::Stems => (
            draw_discs(curve, colour, placed, page),
            Sample::Disc(colour),
        ),
        Style::Line | Style::Dashed | Style::Steps => {
            let mut pieces = clip::pieces(corners(curve, placed), &placed.frame);
            for piece in &pieces {
                page.path(piece, colour, WIDTH, pattern);
            }
            pieces.extend(draw_lone_points(curve, colour, placed, page));
            (pieces, Sample::Line(colour, pattern, WIDTH + 0.4))
        }
    };
    let end = pieces
        .iter()
        .flatten()
        .copied()
        .max_by(|a, b| a.0.total_cmp(&b.0));
    let text = match end {
        Some(_) => clean(&curve.name),
        None => format!("{}: {}", clean(&curve.name), why_nothing(curve)),
    };
    let level = level(&pieces);
    Trace {
        pieces,
        label: MarginLabel {
            text,
            end,
            level,
            sample,
        },
    }
}

fn why_nothing(curve: &Curve) -> &'static str {
    let any = curve
        .points
        .iter()
        .any(|(x, y)| x.is_finite() && y.is_finite());
    if any { "not in view" } else { "no data" }
}

/// Mean height over the length drawn.
fn level(pieces: &[Vec<(f64, f64)>]) -> f64 {
    let segments = pieces.iter().flat_map(|piece| piece.windows(2));
    let (area, length) = segments.fold((0.0, 1e-9), |(area, length), pair| {
        let width = (pair[1].0 - pair[0].0).abs();
        (area + width * (pair[0].1 + pair[1].1) / 2.0, length + width)
    });
    area / length
}

/// Where values lie [px]; None for what has no place on the axes.
pub fn pixel(placed: &Placed<'_>, x: f64, y: f64) -> Option<(f64, f64)> {
    if !range::fits(x, placed.panel.x.scale) || !range::fits(y, placed.panel.y.scale) {
        return None;
    }
    Some((placed.x.at(x)?, placed.y.at(y)?))
}

fn in_frame((x, y): (f64, f64), placed: &Placed<'_>) -> bool {
    placed.frame.holds(&Rect {
        left: x,
        right: x,
        top: y,
        bottom: y,
    })
}

/// The corners of a joined curve in pixels, with gaps.
fn corners<'a>(
    curve: &'a Curve,
    placed: &'a Placed<'_>,
) -> impl Iterator<Item = Option<(f64, f64)>> + 'a {
    let steps = curve.style == Style::Steps;
    let mut level = None;
    curve.points.iter().flat_map(move |&(x, y)| {
        let point = pixel(placed, x, y);
        let corner = match (level, point) {
            (Some((_, held)), Some((x, _))) if steps => Some(Some((x, held))),
            _ => None,
        };
        level = point;
        corner.into_iter().chain([point])
    })
}

/// Points without a neighbour to be joined to would vanish: they get a disc.
fn draw_lone_points(
    curve: &Curve,
    colour: Ink,
    placed: &Placed<'_>,
    page: &mut Drawing,
) -> Vec<Vec<(f64, f64)>> {
    let at = |k: usize| curve.points.get(k).and_then(|&(x, y)| pixel(placed, x, y));
    let joined = |k: usize| k.checked_sub(1).and_then(at).is_some() || at(k + 1).is_some();
    let alone = (0..curve.points.len())
        .filter(|&k| !joined(k))
        .filter_map(at);
    let seen: Vec<(f64, f64)> = alone.filter(|&point| in_frame(point, placed)).collect();
    for &point in &seen {
        page.disc(point, DISC, colour);
    }
    seen.into_iter().map(|point| vec![point]).collect()
}

/// Discs, on stems or without; of those within two pixels the first is drawn.
fn draw_discs(
    curve: &Curve,
    colour: Ink,
    placed: &Placed<'_>,
    page: &mut Drawing,
) -> Vec<Vec<(f64, f64)>> {
    let frame = placed.frame;
    let visible = curve
        .points
        .iter()
        .filter_map(|&(x, y)| pixel(placed, x, y));
    let mut taken = BTreeSet::new();
    let seen: Vec<(f64, f64)> = visible
        .filter(|&point| in_frame(point, placed))
        .filter(|&(x, y)| taken.insert(((x / 2.0) as i64, (y / 2.0) as i64)))
        .collect();
    let foot = placed
        .y
        .at(0.0)
        .unwrap_or(frame.bottom)
        .clamp(frame.top, frame.bottom);
    let stems = curve.style == Style::Stems;
    for &point in &seen {
        if stems {
            page.line((point.0, foot), point, colour, 1.6);
        }
        page.disc(point, DISC, colour);
    }
    let place = |(x, y): (f64, f64)| {
        if stems {
            vec![(x, foot), (x, y)]
        } else {
            vec![(x, y)]
        }
    };
    seen.into_iter().map(place).collect()
}
