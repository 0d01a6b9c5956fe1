//! Colours. Curves use the set of Okabe and Ito (2008), told apart with every common colour blindness, in an order of
//! falling contrast on white; its yellow is left out, being unreadable there, and its vermilion is kept for limits.

/// A colour and how much of it covers the ground.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ink {
    /// Red, green, blue.
    pub rgb: (u8, u8, u8),
    /// 1 covers, 0 does not.
    pub opacity: f64,
}

const fn solid(red: u8, green: u8, blue: u8) -> Ink {
    Ink {
        rgb: (red, green, blue),
        opacity: 1.0,
    }
}

/// Titles, names, callouts.
pub const TEXT: Ink = solid(0x22, 0x22, 0x22);
/// Ticks, subtitles.
pub const QUIET_TEXT: Ink = solid(0x50, 0x50, 0x50);
/// Axis lines and the line of zero.
pub const AXIS: Ink = solid(0x80, 0x80, 0x80);
/// Grid lines.
pub const GRID: Ink = solid(0xe3, 0xe3, 0xe3);
/// Grid lines between the labelled ones of a logarithmic axis.
pub const FINE_GRID: Ink = solid(0xf1, 0xf1, 0xf1);
/// Leaders and lines of instants.
pub const LEADER: Ink = solid(0x90, 0x90, 0x90);
/// Limits (vermilion).
pub const LIMIT: Ink = solid(0xd5, 0x5e, 0x00);
/// Behind a callout, so that the grid does not run through it.
pub const VEIL: Ink = Ink {
    rgb: (0xff, 0xff, 0xff),
    opacity: 0.85,
};
/// The ground.
pub const GROUND: Ink = solid(0xff, 0xff, 0xff);

/// Blue, bluish green, reddish purple, orange, sky blue, near black.
const CURVES: [Ink; 6] = [
    solid(0x00, 0x72, 0xb2),
    solid(0x00, 0x9e, 0x73),
    solid(0xcc, 0x79, 0xa7),
    solid(0xe6, 0x9f, 0x00),
    solid(0x56, 0xb4, 0xe9),
    solid(0x33, 0x33, 0x33),
];

/// Colour of the curve of this number; after the last one the colours return, broken as [`dash_of`] says.
pub fn curve(number: usize) -> Ink {
    CURVES[number % CURVES.len()]
}

/// Pattern of the curve of this number: lengths drawn and left out, empty for a full line.
pub fn dash_of(number: usize) -> &'static [f64] {
    const PATTERNS: [&[f64]; 4] = [&[], &[8.0, 4.0], &[2.5, 3.5], &[10.0, 3.0, 2.5, 3.0]];
    PATTERNS[(number / CURVES.len()) % PATTERNS.len()]
}
