//! Pictures as SVG and PNG. The only room that knows plotters: it paints what `drawing` laid out.
//!
//! The font travels in the program, so a machine without fonts gives the same picture; an SVG names generic
//! families behind it for readers that lack it. The SVG is painted ten times larger than it is shown, because the
//! library counts whole pixels; the PNG four times larger and then averaged, which smooths lines and letters.

mod brush;
pub(super) mod font;

use std::fmt;
use std::fmt::Write as _;

use plotters::backend::{BitMapBackend, SVGBackend};

use super::chart::{Chart, Size};
use super::drawing::{Drawing, lay_out};
use brush::{Brush, Kind};
use font::Embedded;

/// Points of an SVG picture per pixel shown.
const SVG_SCALE: f64 = 10.0;

/// Pictures up to this many pixels are painted four times larger, others twice, to keep memory bounded.
const SMALL_PICTURE: u64 = 3_000_000;

/// Why a picture could not be made: a fault of the program or of memory, not of the data.
#[derive(Debug)]
pub struct PlotError(String);

impl fmt::Display for PlotError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(out, "the picture could not be painted: {}", self.0)
    }
}

impl std::error::Error for PlotError {}

fn failure(error: impl fmt::Display) -> PlotError {
    PlotError(error.to_string())
}

/// The chart as an SVG document.
pub fn svg(chart: &Chart, size: Size) -> Result<String, PlotError> {
    let drawing = lay_out(chart, size, &Embedded::get()?);
    let mut body = String::new();
    {
        let large = (drawing.width * SVG_SCALE, drawing.height * SVG_SCALE);
        let mut backend = SVGBackend::with_string(&mut body, (large.0 as u32, large.1 as u32));
        let brush = Brush {
            scale: SVG_SCALE,
            kind: Kind::Svg,
        };
        brush.paint(&drawing, &mut backend)?;
    }
    // The library's opening tag knows one size only; ours shows the large picture small and names it.
    let shapes = body.split_once('\n').map_or("", |(_, shapes)| shapes);
    Ok(format!("{}{shapes}", svg_head(&drawing)))
}

/// The chart as the bytes of a PNG file.
pub fn png(chart: &Chart, size: Size) -> Result<Vec<u8>, PlotError> {
    let drawing = lay_out(chart, size, &Embedded::get()?);
    let (width, height) = (drawing.width as u32, drawing.height as u32);
    let scale = if u64::from(width) * u64::from(height) <= SMALL_PICTURE {
        4
    } else {
        2
    };
    let large = (width * scale, height * scale);
    let mut pixels = vec![255_u8; 3 * large.0 as usize * large.1 as usize];
    {
        let mut backend = BitMapBackend::with_buffer(&mut pixels, large);
        let brush = Brush {
            scale: f64::from(scale),
            kind: Kind::Bitmap,
        };
        brush.paint(&drawing, &mut backend)?;
    }
    encoded(
        &averaged(&pixels, width as usize, height as usize, scale as usize),
        width,
        height,
    )
}

fn svg_head(drawing: &Drawing) -> String {
    let (width, height) = (drawing.width, drawing.height);
    let (w, h) = (width * SVG_SCALE, height * SVG_SCALE);
    let (title, description) = (escaped(&drawing.title), escaped(&drawing.description));
    let mut head = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{width}\" height=\"{height}\" viewBox=\"0 0 {w} {h}\" role=\"img\">\n"
    );
    for (tag, text) in [("title", title), ("desc", description)] {
        if !text.is_empty() {
            writeln!(head, "<{tag}>{text}</{tag}>").expect("writing to a String cannot fail");
        }
    }
    head
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

/// Mean of each square of `scale` by `scale` pixels.
fn averaged(large: &[u8], width: usize, height: usize, scale: usize) -> Vec<u8> {
    let mut small = Vec::with_capacity(3 * width * height);
    let count = (scale * scale) as u32;
    let mut sums = vec![0_u32; 3 * width];
    for rows in large.chunks_exact(3 * width * scale * scale) {
        sums.fill(0);
        for row in rows.chunks_exact(3 * width * scale) {
            for (sum, block) in sums.chunks_exact_mut(3).zip(row.chunks_exact(3 * scale)) {
                for pixel in block.chunks_exact(3) {
                    sum.iter_mut()
                        .zip(pixel)
                        .for_each(|(sum, &part)| *sum += u32::from(part));
                }
            }
        }
        small.extend(sums.iter().map(|sum| ((sum + count / 2) / count) as u8));
    }
    small
}

fn encoded(pixels: &[u8], width: u32, height: u32) -> Result<Vec<u8>, PlotError> {
    let mut bytes = Vec::new();
    let mut encoder = png::Encoder::new(&mut bytes, width, height);
    encoder.set_color(png::ColorType::Rgb);
    encoder.set_depth(png::BitDepth::Eight);
    let mut writer = encoder.write_header().map_err(failure)?;
    writer.write_image_data(pixels).map_err(failure)?;
    writer.finish().map_err(failure)?;
    Ok(bytes)
}
