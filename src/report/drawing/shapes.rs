//! What a page is made of.

use super::ink::Ink;
use super::text::Font;

/// A path longer than this [px] folds back on itself so often that its pattern could not be seen; it is drawn full.
const LONGEST_BROKEN: f64 = 30_000.0;

/// A page of shapes, painted in order on a white ground.
#[derive(Clone, Debug)]
pub struct Drawing {
    /// Width [px].
    pub width: f64,
    /// Height [px].
    pub height: f64,
    /// What the picture is, for readers who cannot see it.
    pub title: String,
    /// What it shows, in a sentence.
    pub description: String,
    /// From the lowest to the topmost.
    pub shapes: Vec<Shape>,
}

/// A rectangle [px]; `top` is above `bottom`, so smaller.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Rect {
    /// Smallest x.
    pub left: f64,
    /// Smallest y.
    pub top: f64,
    /// Largest x.
    pub right: f64,
    /// Largest y.
    pub bottom: f64,
}

impl Rect {
    /// From side to side.
    pub fn width(&self) -> f64 {
        self.right - self.left
    }

    /// From top to bottom.
    pub fn height(&self) -> f64 {
        self.bottom - self.top
    }

    /// Grown by this much on every side.
    pub fn grown(&self, by: f64) -> Rect {
        Rect {
            left: self.left - by,
            top: self.top - by,
            right: self.right + by,
            bottom: self.bottom + by,
        }
    }

    /// True where the two share an inner point.
    pub fn meets(&self, other: &Rect) -> bool {
        self.left < other.right
            && other.left < self.right
            && self.top < other.bottom
            && other.top < self.bottom
    }

    /// True where `other` lies wholly inside.
    pub fn holds(&self, other: &Rect) -> bool {
        self.left <= other.left
            && self.top <= other.top
            && self.right >= other.right
            && self.bottom >= other.bottom
    }
}

/// One shape.
#[derive(Clone, Debug)]
pub enum Shape {
    /// Points joined by straight lines.
    Line {
        /// Corners [px], at least two.
        points: Vec<(f64, f64)>,
        /// Colour.
        ink: Ink,
        /// Thickness [px].
        width: f64,
    },
    /// A filled rectangle.
    Area {
        /// Its edges.
        rect: Rect,
        /// Colour.
        ink: Ink,
    },
    /// A filled disc.
    Disc {
        /// Centre [px].
        centre: (f64, f64),
        /// Radius [px].
        radius: f64,
        /// Colour.
        ink: Ink,
    },
    /// A line of text.
    Text(Text),
}

/// A line of text.
#[derive(Clone, Debug)]
pub struct Text {
    /// The letters, without control letters.
    pub text: String,
    /// Where the base line and the anchor meet [px].
    pub at: (f64, f64),
    /// Which part of the text stands there.
    pub anchor: Anchor,
    /// Size and weight.
    pub font: Font,
    /// Colour.
    pub ink: Ink,
    /// True for text that runs upwards.
    pub upwards: bool,
}

/// The part of a text that stands at its place.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Anchor {
    /// Its beginning.
    Start,
    /// Its middle.
    Middle,
    /// Its end.
    End,
}

impl Drawing {
    /// Adds a line between two points.
    pub fn line(&mut self, from: (f64, f64), to: (f64, f64), ink: Ink, width: f64) {
        self.shapes.push(Shape::Line {
            points: vec![from, to],
            ink,
            width,
        });
    }

    /// Adds a path, broken by a pattern of lengths drawn and left out (none for a full line).
    pub fn path(&mut self, points: &[(f64, f64)], ink: Ink, width: f64, pattern: &[f64]) {
        let length = |pair: &[(f64, f64)]| (pair[1].0 - pair[0].0).hypot(pair[1].1 - pair[0].1);
        let dense = points.windows(2).map(length).sum::<f64>() > LONGEST_BROKEN;
        if pattern.is_empty() || dense {
            if points.len() > 1 {
                self.shapes.push(Shape::Line {
                    points: points.to_vec(),
                    ink,
                    width,
                });
            }
            return;
        }
        for points in dashes(points, pattern) {
            self.shapes.push(Shape::Line { points, ink, width });
        }
    }

    /// Adds a filled rectangle.
    pub fn area(&mut self, rect: Rect, ink: Ink) {
        self.shapes.push(Shape::Area { rect, ink });
    }

    /// Adds a filled disc.
    pub fn disc(&mut self, centre: (f64, f64), radius: f64, ink: Ink) {
        self.shapes.push(Shape::Disc {
            centre,
            radius,
            ink,
        });
    }

    /// Adds a level text; empty ones are left out.
    pub fn text(&mut self, text: &str, at: (f64, f64), anchor: Anchor, font: Font, ink: Ink) {
        if !text.is_empty() {
            self.shapes.push(Shape::Text(Text {
                text: text.to_string(),
                at,
                anchor,
                font,
                ink,
                upwards: false,
            }));
        }
    }

    /// Adds a text that runs upwards, its middle at `at`; empty ones are left out.
    pub fn text_upwards(&mut self, text: &str, at: (f64, f64), font: Font, ink: Ink) {
        if !text.is_empty() {
            let anchor = Anchor::Middle;
            self.shapes.push(Shape::Text(Text {
                text: text.to_string(),
                at,
                anchor,
                font,
                ink,
                upwards: true,
            }));
        }
    }
}

/// The drawn pieces of a path under a pattern of lengths drawn and left out in turn.
fn dashes(points: &[(f64, f64)], pattern: &[f64]) -> Vec<Vec<(f64, f64)>> {
    let mut pieces = Vec::new();
    let mut turns = pattern.iter().copied().cycle();
    let (mut left, mut drawn) = (turns.next().unwrap_or(f64::INFINITY), true);
    let mut piece: Vec<(f64, f64)> = points.first().copied().into_iter().collect();
    for pair in points.windows(2) {
        let (mut from, to) = (pair[0], pair[1]);
        let mut rest = (to.0 - from.0).hypot(to.1 - from.1);
        while rest > left {
            let share = left / rest;
            from = (
                from.0 + share * (to.0 - from.0),
                from.1 + share * (to.1 - from.1),
            );
            rest -= left;
            if drawn {
                piece.push(from);
                pieces.push(std::mem::take(&mut piece));
            } else {
                piece = vec![from];
            }
            drawn = !drawn;
            left = turns.next().unwrap_or(f64::INFINITY).max(0.5);
        }
        left -= rest;
        if drawn {
            piece.push(to);
        }
    }
    if drawn && piece.len() > 1 {
        pieces.push(piece);
    }
    pieces
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dashes_cover_their_share_of_a_path_around_corners() {
        let path = [(0.0, 0.0), (30.0, 0.0), (30.0, 45.0), (130.0, 45.0)];
        let pieces = dashes(&path, &[6.0, 4.0]);
        let drawn: f64 = pieces
            .iter()
            .flat_map(|piece| piece.windows(2))
            .map(|s| (s[1].0 - s[0].0).hypot(s[1].1 - s[0].1))
            .sum();
        // 175 px are 17 whole patterns of 10 and 5 px of the 18th dash.
        assert!((drawn - (17.0 * 6.0 + 5.0)).abs() < 1e-9, "{drawn}");
        assert_eq!(pieces.len(), 18);
        assert!(dashes(&[(1.0, 1.0)], &[6.0, 4.0]).is_empty());
    }

    #[test]
    fn rectangles_meet_by_inner_points() {
        let rect = Rect {
            left: 0.0,
            top: 0.0,
            right: 10.0,
            bottom: 5.0,
        };
        assert!(!rect.meets(&Rect {
            left: 10.0,
            right: 12.0,
            ..rect
        }));
        assert!(rect.meets(&Rect {
            left: 9.0,
            right: 12.0,
            ..rect
        }));
        assert!(rect.grown(1.0).holds(&rect) && !rect.holds(&rect.grown(1.0)));
    }
}
