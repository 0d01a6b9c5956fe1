//! Labels of marks inside a panel: near their point, with a leader, off the curves and off each other.
//!
//! Each label is tried at many places around its point; the one that covers the least wins. Cost: 1 per 40 px of
//! distance, 3 and a fifth per px for each curve piece under the label, 8 for a limit line under it, 6 for a leader that crosses
//! a curve, 1000 for another label. The weights only rank places; nothing but the picture depends on them.

use super::clip::inside;
use super::ink;
use super::shapes::{Anchor, Drawing, Rect};
use super::text::{CALLOUT, Measure, cut};

/// Distances from the point to the label's nearest edge that are tried [px].
const DISTANCES: [f64; 8] = [14.0, 24.0, 40.0, 64.0, 100.0, 150.0, 220.0, 300.0];
/// Directions that are tried.
const DIRECTIONS: usize = 24;
/// Free space kept around a label [px].
const CLEAR: f64 = 4.0;
/// Radius of the disc at the point [px].
const DISC: f64 = 3.6;

/// A label to be placed.
pub struct Callout {
    /// The point [px], inside the frame.
    pub at: (f64, f64),
    /// The text, already cleaned.
    pub text: String,
}

/// What a label should not cover.
pub struct Obstacles<'a> {
    /// Pieces of curves [px].
    pub curves: &'a [Vec<(f64, f64)>],
    /// Lines across the panel, by their y [px].
    pub levels: &'a [f64],
    /// Lines up the panel, by their x [px].
    pub uprights: &'a [f64],
}

/// Draws the marks and their labels within `frame`.
pub fn draw(
    callouts: &[Callout],
    around: &Obstacles<'_>,
    frame: &Rect,
    measure: &dyn Measure,
    page: &mut Drawing,
) {
    let points: Vec<Rect> = callouts
        .iter()
        .map(|callout| about(callout.at, 0.0, 0.0).grown(DISC + 2.0))
        .collect();
    let mut taken: Vec<Rect> = Vec::new();
    for callout in callouts {
        let text = cut(&callout.text, CALLOUT, 0.9 * frame.width(), measure);
        let size = (measure.width(&text, CALLOUT), 1.2 * CALLOUT.size);
        let others: Vec<Rect> = taken.iter().chain(&points).copied().collect();
        let place = best_place(callout.at, size, around, &others, frame);
        draw_leader(callout.at, &place, page);
        page.area(place.grown(2.0), ink::VEIL);
        let base = (place.top + place.bottom) / 2.0 + CALLOUT.drop();
        page.text(&text, (place.left, base), Anchor::Start, CALLOUT, ink::TEXT);
        taken.push(place);
    }
    for callout in callouts {
        page.disc(callout.at, DISC + 1.4, ink::GROUND);
        page.disc(callout.at, DISC, ink::TEXT);
    }
}

fn about(at: (f64, f64), width: f64, height: f64) -> Rect {
    Rect {
        left: at.0 - width / 2.0,
        top: at.1 - height / 2.0,
        right: at.0 + width / 2.0,
        bottom: at.1 + height / 2.0,
    }
}

fn best_place(
    at: (f64, f64),
    size: (f64, f64),
    around: &Obstacles<'_>,
    others: &[Rect],
    frame: &Rect,
) -> Rect {
    let room = frame.grown(-2.0);
    let mut best = (
        f64::INFINITY,
        pushed_inside(about(at, size.0, size.1), &room),
    );
    for distance in DISTANCES {
        for turn in 0..DIRECTIONS {
            let angle = std::f64::consts::TAU * turn as f64 / DIRECTIONS as f64;
            let place = pushed_inside(beside(at, size, distance, angle), &room);
            let cost = cost(at, &place, around, others);
            if cost < best.0 {
                best = (cost, place);
            }
        }
    }
    best.1
}

/// The label whose edge is `distance` from the point in this direction.
fn beside(at: (f64, f64), size: (f64, f64), distance: f64, angle: f64) -> Rect {
    let (x, y) = (angle.cos(), -angle.sin());
    let centre = (
        at.0 + x * distance + x.signum() * half(x) * size.0,
        at.1 + y * distance + y.signum() * half(y) * size.1,
    );
    about(centre, size.0, size.1)
}

/// How far the label is shifted by its own size: half of it where the direction leads that way at all.
fn half(share: f64) -> f64 {
    0.5 * (4.0 * share.abs()).min(1.0)
}

fn pushed_inside(rect: Rect, room: &Rect) -> Rect {
    let right = (rect.right - room.right).max(0.0) - (room.left - rect.left).max(0.0);
    let down = (rect.bottom - room.bottom).max(0.0) - (room.top - rect.top).max(0.0);
    Rect {
        left: rect.left - right,
        top: rect.top - down,
        right: rect.right - right,
        bottom: rect.bottom - down,
    }
}

fn cost(at: (f64, f64), place: &Rect, around: &Obstacles<'_>, others: &[Rect]) -> f64 {
    let clear = place.grown(CLEAR);
    let end = nearest(at, place);
    let mut cost = (end.0 - at.0).hypot(end.1 - at.1) / 40.0;
    cost += 1000.0 * others.iter().filter(|other| clear.meets(other)).count() as f64;
    cost += 8.0
        * around
            .levels
            .iter()
            .filter(|&&y| clear.top < y && y < clear.bottom)
            .count() as f64;
    cost += 4.0
        * around
            .uprights
            .iter()
            .filter(|&&x| clear.left < x && x < clear.right)
            .count() as f64;
    let segments = || {
        around
            .curves
            .iter()
            .flat_map(|piece| piece.windows(2))
            .map(|pair| (pair[0], pair[1]))
    };
    let covered = segments().filter_map(|(a, b)| inside(a, b, &clear));
    let covered = covered.map(|(a, b)| 3.0 + 0.2 * (b.0 - a.0).hypot(b.1 - a.1));
    cost += covered.sum::<f64>().min(900.0);
    // A lone disc is a piece of one point.
    let discs = around
        .curves
        .iter()
        .filter(|piece| piece.len() == 1)
        .flatten();
    cost += discs
        .filter(|&&(x, y)| clear.meets(&about((x, y), 6.0, 6.0)))
        .count()
        .min(20) as f64
        * 3.0;
    // The leader starts on the curve, so its first pixels do not count.
    let start = towards(at, end, 6.0);
    cost + 6.0
        * segments()
            .filter(|&(a, b)| cross(start, end, a, b))
            .take(3)
            .count() as f64
}

fn nearest(at: (f64, f64), rect: &Rect) -> (f64, f64) {
    (
        at.0.clamp(rect.left, rect.right),
        at.1.clamp(rect.top, rect.bottom),
    )
}

fn towards(from: (f64, f64), to: (f64, f64), distance: f64) -> (f64, f64) {
    let length = (to.0 - from.0).hypot(to.1 - from.1);
    let share = if length > distance {
        distance / length
    } else {
        1.0
    };
    (
        from.0 + share * (to.0 - from.0),
        from.1 + share * (to.1 - from.1),
    )
}

/// True where two straight lines cross.
fn cross(a: (f64, f64), b: (f64, f64), c: (f64, f64), d: (f64, f64)) -> bool {
    let side = |p: (f64, f64), q: (f64, f64), r: (f64, f64)| {
        (q.0 - p.0) * (r.1 - p.1) - (q.1 - p.1) * (r.0 - p.0)
    };
    side(a, b, c) * side(a, b, d) < 0.0 && side(c, d, a) * side(c, d, b) < 0.0
}

fn draw_leader(at: (f64, f64), place: &Rect, page: &mut Drawing) {
    let end = nearest(at, place);
    if (end.0 - at.0).hypot(end.1 - at.1) > DISC + 3.0 {
        page.line(at, end, ink::LEADER, 1.0);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const FRAME: Rect = Rect {
        left: 0.0,
        top: 0.0,
        right: 400.0,
        bottom: 300.0,
    };

    #[test]
    fn a_label_beside_a_peak_covers_no_curve() {
        let peak: Vec<(f64, f64)> = (0..400)
            .map(|k| {
                (
                    f64::from(k),
                    280.0 - 250.0 * (-((f64::from(k) - 120.0) / 25.0).powi(2)).exp(),
                )
            })
            .collect();
        let curves = [peak.clone()];
        let around = Obstacles {
            curves: &curves,
            levels: &[150.0],
            uprights: &[],
        };
        let place = best_place((120.0, 30.0), (150.0, 16.0), &around, &[], &FRAME);
        assert!(FRAME.holds(&place));
        assert!(
            peak.windows(2)
                .all(|pair| inside(pair[0], pair[1], &place).is_none())
        );
        assert!(!(place.top..place.bottom).contains(&150.0));
        let second = best_place((125.0, 40.0), (150.0, 16.0), &around, &[place], &FRAME);
        assert!(!second.meets(&place) && FRAME.holds(&second));
    }

    #[test]
    fn lines_cross_as_drawn() {
        assert!(cross((0.0, 0.0), (10.0, 10.0), (0.0, 10.0), (10.0, 0.0)));
        assert!(!cross((0.0, 0.0), (4.0, 4.0), (0.0, 10.0), (10.0, 0.0)));
    }
}
