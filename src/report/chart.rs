//! What a plot shows, without saying how it is drawn: panels with one quantity each, curves, limits, marks, bars.
//!
//! All numbers are SI values in the unit named beside them; the drawing chooses prefixes. Names may be any text.

/// One picture: a title, the answer below it, panels from top to bottom and the caution that belongs to them.
#[derive(Clone, Debug, Default)]
pub struct Chart {
    /// What is shown.
    pub title: String,
    /// The answer in a line; empty for none.
    pub subtitle: String,
    /// From top to bottom. Neighbours with the same x axis share one.
    pub panels: Vec<Panel>,
    /// What the reader must know before trusting the picture.
    pub caution: Option<String>,
}

/// One quantity.
#[derive(Clone, Debug)]
pub enum Panel {
    /// Curves over an axis.
    Curves(CurvePanel),
    /// Horizontal bars with their values.
    Bars(BarPanel),
}

/// Curves of one quantity over a common axis.
#[derive(Clone, Debug, Default)]
pub struct CurvePanel {
    /// Across: time, current, a swept value.
    pub x: Axis,
    /// Upwards: the quantity.
    pub y: Axis,
    /// Each is named at its end. One name has one colour in all panels of a chart.
    pub curves: Vec<Curve>,
    /// Bounds on the quantity.
    pub limits: Vec<LimitLine>,
    /// Places on the x axis worth a line: an opening, a bound on a time.
    pub instants: Vec<Instant>,
    /// Points worth a label: a peak.
    pub marks: Vec<Mark>,
}

/// What an axis measures.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Axis {
    /// The quantity in words: `voltage at drive`.
    pub label: String,
    /// Its SI unit without prefix, empty for none.
    pub unit: String,
    /// From and to; None takes what the data need. What lies outside is not drawn.
    pub range: Option<(f64, f64)>,
    /// How values are laid out.
    pub scale: Scale,
}

impl Axis {
    /// A linear axis over all data.
    pub fn new(label: &str, unit: &str) -> Self {
        Axis {
            label: label.to_string(),
            unit: unit.to_string(),
            ..Axis::default()
        }
    }

    /// The same over a given range.
    pub fn between(self, from: f64, to: f64) -> Self {
        Axis {
            range: Some((from, to)),
            ..self
        }
    }

    /// The same with equal lengths for equal ratios; values at or below zero are left out.
    pub fn logarithmic(self) -> Self {
        Axis {
            scale: Scale::Logarithmic,
            ..self
        }
    }
}

/// How values are laid out along an axis.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Scale {
    /// Equal lengths for equal differences.
    #[default]
    Linear,
    /// Equal lengths for equal ratios.
    Logarithmic,
}

/// A curve: points in the order they are joined; one with a value that is not finite is a gap.
#[derive(Clone, Debug, Default)]
pub struct Curve {
    /// What it is called at its end.
    pub name: String,
    /// (x, y) in SI units.
    pub points: Vec<(f64, f64)>,
    /// How points are shown.
    pub style: Style,
}

/// How the points of a curve are shown.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Style {
    /// Joined by straight lines.
    #[default]
    Line,
    /// Joined, the line broken: what is compared with.
    Dashed,
    /// Each value held until the next point: counts, shares.
    Steps,
    /// Discs alone: samples, candidates.
    Points,
    /// Discs on stems from zero: a spectrum.
    Stems,
}

/// A bound, drawn across the panel and named beside it.
#[derive(Clone, Debug)]
pub struct LimitLine {
    /// As it reads: `driver limit 60 V`.
    pub label: String,
    /// Where it lies on the y axis.
    pub value: f64,
}

/// A place on the x axis, drawn up the panel and named above it.
#[derive(Clone, Debug, PartialEq)]
pub struct Instant {
    /// As it reads: `k1_driver opens`.
    pub label: String,
    /// Where it lies on the x axis.
    pub at: f64,
}

/// A point with a label.
#[derive(Clone, Debug)]
pub struct Mark {
    /// Place on the x axis.
    pub x: f64,
    /// Place on the y axis.
    pub y: f64,
    /// As it reads: `peak 412 V at 20.1 ms`.
    pub label: String,
}

/// Horizontal bars with a common zero, largest room for names.
#[derive(Clone, Debug, Default)]
pub struct BarPanel {
    /// The quantity in words: `energy dissipated`.
    pub label: String,
    /// Its SI unit without prefix.
    pub unit: String,
    /// From top to bottom.
    pub bars: Vec<Bar>,
}

/// One bar.
#[derive(Clone, Debug)]
pub struct Bar {
    /// What it is called.
    pub name: String,
    /// Its length; negative to the left, a dash where it is not finite.
    pub value: f64,
}

/// Size of a picture in pixels as a screen counts them.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Size {
    /// From side to side, 320 to 4000.
    pub width: u32,
    /// From top to bottom, at least what the panels need, at most 4000.
    pub height: u32,
}

impl Default for Size {
    fn default() -> Self {
        Size {
            width: 1200,
            height: 800,
        }
    }
}
