//! Paints shapes on one of the library's two grounds, and meets the habits in which they differ.

use plotters::backend::DrawingBackend;
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{
    Color, FontDesc, FontFamily, FontTransform, RGBAColor, RGBColor, ShapeStyle, TextStyle, WHITE,
};

use super::font::{BITMAP_SIZE_PER_EM, FAMILY, weight};
use super::{PlotError, failure};
use crate::report::drawing::{Anchor, Drawing, Ink, Shape, Text};

/// The library's size of a font in SVG is divided by this to give the em.
const SVG_SIZE_PER_EM: f64 = 1.24;

/// Which ground is painted on.
#[derive(Clone, Copy, PartialEq)]
pub enum Kind {
    /// Elements of a document.
    Svg,
    /// Pixels.
    Bitmap,
}

/// Paints shapes, so many times larger.
pub struct Brush {
    /// Points of the ground per pixel of the drawing.
    pub scale: f64,
    /// What it paints on.
    pub kind: Kind,
}

impl Brush {
    /// Paints a whole drawing on white and ends the picture.
    pub fn paint<B: DrawingBackend>(
        &self,
        drawing: &Drawing,
        ground: &mut B,
    ) -> Result<(), PlotError> {
        let corner = self.at((drawing.width, drawing.height));
        ground
            .draw_rect((0, 0), corner, &WHITE.filled(), true)
            .map_err(failure)?;
        for shape in &drawing.shapes {
            self.shape(shape, ground)?;
        }
        ground.present().map_err(failure)
    }

    fn shape<B: DrawingBackend>(&self, shape: &Shape, ground: &mut B) -> Result<(), PlotError> {
        match shape {
            Shape::Line { points, ink, width } => {
                let points = crisp(points, *width);
                // A line without length is no line to some readers.
                if points
                    .iter()
                    .all(|&point| self.at(point) == self.at(points[0]))
                {
                    return Ok(());
                }
                match self.kind {
                    Kind::Svg => self.path(&points, *ink, *width, ground),
                    Kind::Bitmap => self.strokes(&points, *ink, *width, ground),
                }
            }
            Shape::Area { rect, ink } => {
                let (from, to) = (
                    self.at((rect.left, rect.top)),
                    self.at((rect.right, rect.bottom)),
                );
                ground
                    .draw_rect(from, to, &colour(*ink).filled(), true)
                    .map_err(failure)
            }
            Shape::Disc {
                centre,
                radius,
                ink,
            } => {
                let radius = (self.scale * radius).round().max(1.0) as u32;
                ground
                    .draw_circle(self.at(*centre), radius, &colour(*ink).filled(), true)
                    .map_err(failure)
            }
            Shape::Text(text) => self.text(text, ground),
        }
    }

    fn at(&self, (x, y): (f64, f64)) -> (i32, i32) {
        (
            (self.scale * x).round() as i32,
            (self.scale * y).round() as i32,
        )
    }

    fn path<B: DrawingBackend>(
        &self,
        points: &[(f64, f64)],
        ink: Ink,
        width: f64,
        ground: &mut B,
    ) -> Result<(), PlotError> {
        let stroke_width = (self.scale * width).round().max(1.0) as u32;
        let style = ShapeStyle {
            color: colour(ink),
            filled: false,
            stroke_width,
        };
        ground
            .draw_path(points.iter().map(|&point| self.at(point)), &style)
            .map_err(failure)
    }

    /// A path on pixels, each piece a four-cornered area and each corner a disc: as one outline the library would
    /// fill a path that folds back on itself with holes.
    fn strokes<B: DrawingBackend>(
        &self,
        points: &[(f64, f64)],
        ink: Ink,
        width: f64,
        ground: &mut B,
    ) -> Result<(), PlotError> {
        let style = colour(ink).filled();
        let half = (width / 2.0).max(0.5 / self.scale);
        for pair in points.windows(2) {
            let ((x0, y0), (x1, y1)) = (pair[0], pair[1]);
            let length = (x1 - x0).hypot(y1 - y0);
            if x0 == x1 || y0 == y1 {
                let (across, along) = if x0 == x1 { (half, 0.0) } else { (0.0, half) };
                let (left, top) = self.at((x0.min(x1) - across, y0.min(y1) - along));
                let (right, bottom) = self.at((x0.max(x1) + across, y0.max(y1) + along));
                // The library fills both ends.
                let end = ((right - 1).max(left), (bottom - 1).max(top));
                ground
                    .draw_rect((left, top), end, &style, true)
                    .map_err(failure)?;
            } else if length > 0.5 / self.scale {
                let (nx, ny) = (half * (y1 - y0) / length, half * (x0 - x1) / length);
                let corners = [
                    (x0 + nx, y0 + ny),
                    (x1 + nx, y1 + ny),
                    (x1 - nx, y1 - ny),
                    (x0 - nx, y0 - ny),
                ];
                ground
                    .fill_polygon(corners.map(|corner| self.at(corner)), &style)
                    .map_err(failure)?;
            }
        }
        let radius = (self.scale * half).floor() as u32;
        let corners = points.get(1..points.len().saturating_sub(1)).unwrap_or(&[]);
        for &corner in corners.iter().filter(|_| radius > 0) {
            ground
                .draw_circle(self.at(corner), radius, &style, true)
                .map_err(failure)?;
        }
        Ok(())
    }

    fn text<B: DrawingBackend>(&self, text: &Text, ground: &mut B) -> Result<(), PlotError> {
        // Both grounds hang a text from its top; how far the base line is below it differs.
        let (size_per_em, base_per_em) = match self.kind {
            Kind::Svg => (SVG_SIZE_PER_EM, 0.76),
            Kind::Bitmap => (BITMAP_SIZE_PER_EM, BITMAP_SIZE_PER_EM / 2.0),
        };
        let base = base_per_em * text.font.size;
        let across = match text.anchor {
            Anchor::Start => HPos::Left,
            Anchor::Middle => HPos::Center,
            Anchor::End => HPos::Right,
        };
        let size = self.scale * text.font.size * size_per_em;
        let font = FontDesc::new(FontFamily::Name(FAMILY), size, weight(text.font));
        let (font, at) = match text.upwards {
            true => (
                font.transform(FontTransform::Rotate270),
                (text.at.0 - base, text.at.1),
            ),
            false => (font, (text.at.0, text.at.1 - base)),
        };
        let ink = colour(text.ink);
        let style = TextStyle::from(font)
            .color(&ink)
            .pos(Pos::new(across, VPos::Top));
        ground
            .draw_text(&text.text, &style, self.at(at))
            .map_err(failure)
    }
}

/// A single level or upright line is moved by less than a pixel so that it covers whole ones: grids stay sharp.
fn crisp(points: &[(f64, f64)], width: f64) -> Vec<(f64, f64)> {
    let odd = width.round() as i64 % 2 == 1;
    let snap = |place: f64| {
        if odd {
            place.floor() + 0.5
        } else {
            place.round()
        }
    };
    match *points {
        [(x0, y0), (x1, y1)] if y0 == y1 => vec![(x0, snap(y0)), (x1, snap(y1))],
        [(x0, y0), (x1, y1)] if x0 == x1 => vec![(snap(x0), y0), (snap(x1), y1)],
        _ => points.to_vec(),
    }
}

fn colour(ink: Ink) -> RGBAColor {
    let (red, green, blue) = ink.rgb;
    RGBColor(red, green, blue).mix(ink.opacity)
}
