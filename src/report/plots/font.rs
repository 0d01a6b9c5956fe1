//! The embedded font: registered once, measured for the layout.

use std::sync::OnceLock;

use plotters::style::{FontDesc, FontFamily, FontStyle, register_font};

use super::PlotError;
use crate::report::drawing::{Font, Measure};

/// The embedded family first, then what most readers have.
pub const FAMILY: &str = "DejaVu Sans, Verdana, sans-serif";

/// The library's size of a font in bitmaps spans ascent and descent, (1901 + 483)/2048 em of DejaVu Sans.
pub const BITMAP_SIZE_PER_EM: f64 = 2384.0 / 2048.0;

/// The embedded font, ready for measuring and painting.
pub struct Embedded;

impl Embedded {
    /// Registers the font where that was not done before.
    pub fn get() -> Result<Self, PlotError> {
        static READY: OnceLock<bool> = OnceLock::new();
        let ready = READY.get_or_init(|| {
            register_font(FAMILY, FontStyle::Normal, dejavu::sans::regular()).is_ok()
                && register_font(FAMILY, FontStyle::Bold, dejavu::sans::bold()).is_ok()
        });
        match ready {
            true => Ok(Embedded),
            false => Err(PlotError("the embedded font is damaged".to_string())),
        }
    }
}

/// The library's name of a weight.
pub fn weight(font: Font) -> FontStyle {
    if font.bold {
        FontStyle::Bold
    } else {
        FontStyle::Normal
    }
}

impl Measure for Embedded {
    fn width(&self, text: &str, font: Font) -> f64 {
        // Measured at 1000 pixels an em, because the library rounds to whole ones.
        let size = 1000.0 * BITMAP_SIZE_PER_EM;
        match FontDesc::new(FontFamily::Name(FAMILY), size, weight(font)).layout_box(text) {
            Ok(((left, _), (right, _))) => f64::from(right - left) / 1000.0 * font.size,
            // Wider than any text comes out, so that nothing is cut.
            Err(_) => font.size * text.chars().count() as f64,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Advances of DejaVu Sans 2.37 from its `hmtx` table: 0 is 1303 and i 569 of 2048 units.
    #[test]
    fn widths_are_those_of_the_font() {
        let font = Font {
            size: 20.0,
            bold: false,
        };
        let measure = Embedded::get().expect("the font is whole");
        assert!((measure.width("00", font) - 20.0 * 2.0 * 1303.0 / 2048.0).abs() < 0.05);
        assert!((measure.width("iiii", font) - 20.0 * 4.0 * 569.0 / 2048.0).abs() < 0.05);
        assert!(measure.width("Wide", Font { bold: true, ..font }) > measure.width("Wide", font));
        assert_eq!(measure.width("", font), 0.0);
    }
}
