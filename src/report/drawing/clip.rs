//! Curves in pixels: cut to the panel, broken at gaps, thinned to what can be seen.

use super::shapes::Rect;

/// Columns in which points are thinned [px]: half a pixel, so that a picture may be enlarged twice.
const COLUMN: f64 = 0.5;

/// The visible pieces of a path. `None` is a gap; each piece lies within `frame` and has at least two points.
pub fn pieces(
    points: impl Iterator<Item = Option<(f64, f64)>>,
    frame: &Rect,
) -> Vec<Vec<(f64, f64)>> {
    let mut pieces: Vec<Vec<(f64, f64)>> = Vec::new();
    let mut piece: Vec<(f64, f64)> = Vec::new();
    let mut before = None;
    for point in points {
        if let (Some(from), Some(to)) = (before, point)
            && let Some((enters, leaves)) = inside(from, to, frame)
        {
            if piece.last() != Some(&enters) {
                pieces.push(std::mem::replace(&mut piece, vec![enters]));
            }
            piece.push(leaves);
        } else if !piece.is_empty() {
            pieces.push(std::mem::take(&mut piece));
        }
        before = point;
    }
    pieces.push(piece);
    pieces.retain(|piece| piece.len() > 1);
    pieces.iter().map(|piece| thinned(piece)).collect()
}

/// The part of a straight line within `frame` (Liang and Barsky's clipping: the span of the parameter that all four
/// edges allow).
pub fn inside(from: (f64, f64), to: (f64, f64), frame: &Rect) -> Option<((f64, f64), (f64, f64))> {
    let (dx, dy) = (to.0 - from.0, to.1 - from.1);
    let (mut start, mut end) = (0.0_f64, 1.0_f64);
    let edges = [
        (-dx, from.0 - frame.left),
        (dx, frame.right - from.0),
        (-dy, from.1 - frame.top),
        (dy, frame.bottom - from.1),
    ];
    for (outwards, room) in edges {
        if outwards == 0.0 && room < 0.0 {
            return None;
        }
        if outwards < 0.0 {
            start = start.max(room / outwards);
        } else if outwards > 0.0 {
            end = end.min(room / outwards);
        }
    }
    // Clamped, because a far end times a share is not exact.
    let at = |share: f64| {
        let (x, y) = (from.0 + share * dx, from.1 + share * dy);
        (
            x.clamp(frame.left, frame.right),
            y.clamp(frame.top, frame.bottom),
        )
    };
    let first = if start == 0.0 { from } else { at(start) };
    let last = if end == 1.0 { to } else { at(end) };
    (start <= end).then_some((first, last))
}

/// The path with at most four points in each run of points within one column: first, lowest, highest, last. What is
/// left out lies on the drawn line's own pixels.
fn thinned(points: &[(f64, f64)]) -> Vec<(f64, f64)> {
    let column = |point: &(f64, f64)| (point.0 / COLUMN).floor();
    let mut kept: Vec<(f64, f64)> = Vec::new();
    for run in points.chunk_by(|a, b| column(a) == column(b)) {
        if run.len() <= 4 {
            run.iter().for_each(|&point| push_level(&mut kept, point));
            continue;
        }
        let by_height =
            |a: &(usize, &(f64, f64)), b: &(usize, &(f64, f64))| a.1.1.total_cmp(&b.1.1);
        let lowest = run
            .iter()
            .enumerate()
            .min_by(by_height)
            .map_or(0, |(place, _)| place);
        let highest = run
            .iter()
            .enumerate()
            .max_by(by_height)
            .map_or(0, |(place, _)| place);
        let mut places = [0, lowest, highest, run.len() - 1];
        places.sort_unstable();
        for (number, place) in places.into_iter().enumerate() {
            if number == 0 || place != places[number - 1] {
                push_level(&mut kept, run[place]);
            }
        }
    }
    kept
}

/// Adds a point; the one before it goes where all three lie on one level and run one way.
fn push_level(kept: &mut Vec<(f64, f64)>, point: (f64, f64)) {
    if let [.., a, b] = kept[..]
        && a.1 == b.1
        && b.1 == point.1
        && (b.0 - a.0) * (point.0 - b.0) >= 0.0
    {
        kept.pop();
    }
    kept.push(point);
}

#[cfg(test)]
mod tests {
    use super::*;

    const FRAME: Rect = Rect {
        left: 0.0,
        top: 0.0,
        right: 100.0,
        bottom: 50.0,
    };

    #[test]
    fn a_line_is_cut_at_the_edges() {
        let path = [(-50.0, 25.0), (150.0, 25.0)].map(Some);
        assert_eq!(
            pieces(path.into_iter(), &FRAME),
            [[(0.0, 25.0), (100.0, 25.0)]]
        );
        let steep = [(50.0, -1e12), (50.0, 1e12)].map(Some);
        assert_eq!(
            pieces(steep.into_iter(), &FRAME),
            [[(50.0, 0.0), (50.0, 50.0)]]
        );
        let outside = [(-5.0, -5.0), (105.0, -5.0), (105.0, 60.0)].map(Some);
        assert!(pieces(outside.into_iter(), &FRAME).is_empty());
    }

    #[test]
    fn gaps_and_leavings_break_a_path() {
        let path = [
            Some((1.0, 1.0)),
            Some((5.0, 9.0)),
            None,
            Some((9.0, 3.0)),
            Some((20.0, 3.0)),
        ];
        assert_eq!(pieces(path.into_iter(), &FRAME).len(), 2);
        let over = [(10.0, 40.0), (20.0, 60.0), (30.0, 40.0)].map(Some);
        assert_eq!(
            pieces(over.into_iter(), &FRAME),
            [[(10.0, 40.0), (15.0, 50.0)], [(25.0, 50.0), (30.0, 40.0)]]
        );
        assert!(pieces([None, Some((1.0, 1.0))].into_iter(), &FRAME).is_empty());
    }

    #[test]
    fn a_thinned_ring_keeps_its_envelope() {
        let count = 100_000;
        let ring = |k: usize| {
            let t = k as f64 / count as f64;
            (
                100.0 * t,
                25.0 + 24.0 * (-3.0 * t).exp() * (5000.0 * t).sin(),
            )
        };
        let drawn = pieces((0..count).map(ring).map(Some), &FRAME);
        assert_eq!(drawn.len(), 1);
        assert!(drawn[0].len() <= 4 * 200, "{}", drawn[0].len());
        let extremes = |points: &mut dyn Iterator<Item = (f64, f64)>| {
            points.fold((f64::MAX, f64::MIN), |(low, high), (_, y)| {
                (low.min(y), high.max(y))
            })
        };
        let (whole, seen) = (
            extremes(&mut (0..count).map(ring)),
            extremes(&mut drawn[0].iter().copied()),
        );
        assert_eq!(whole, seen);
    }

    #[test]
    fn a_level_line_needs_two_points() {
        let level = (0..50_000).map(|k| Some((f64::from(k) * 0.002, 10.0)));
        assert_eq!(pieces(level, &FRAME), [[(0.0, 10.0), (99.998, 10.0)]]);
    }
}
