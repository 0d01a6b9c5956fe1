//! What a core shape comes out as: a magnetic path, a mean turn, a winding window, and remarks on them.

use super::MU0;
use super::fringing::Fringing;
use super::gaps::Gap;
use super::moving::MovingGap;
use super::winding::WindingPlan;

/// Geometry of one magnetic path. SI units.
#[derive(Clone, Debug, PartialEq)]
pub struct Geometry {
    /// Effective length of the path [m].
    pub length: f64,
    /// Effective area [m²].
    pub area: f64,
    /// Smallest section [m²]: the flux density peaks there.
    pub minimum_area: f64,
    /// Section of the material itself [m²]; differs from `area` where a core is open and its winding reaches beyond it.
    pub section: f64,
    /// Effective volume [m³].
    pub volume: f64,
    /// Length of the path inside the core's material [m]; 0 for a coil in air.
    pub iron: f64,
    /// Length of air [m], of section `area`, in series with the material: the gap over its fringing factor, or for a
    /// coil in air the length that has its permeance.
    pub air: f64,
    /// All gaps as drawn, one by one.
    pub gaps: Vec<Gap>,
    /// The fringing rule and its factor over all gaps; None where there is no gap to fringe.
    pub fringing: Option<Fringing>,
    /// The gap that an armature closes, where the shape has one; it is among the gaps too.
    pub moving: Option<MovingGap>,
    /// Mean length of a turn [m], where the shape tells it.
    pub mean_turn: Option<f64>,
    /// The space for windings, where the shape tells it.
    pub window: Option<Window>,
    /// Length of a layer of winding, along the leg [m], where the shape tells it.
    pub layer_breadth: Option<f64>,
    /// What somebody should know.
    pub remarks: Vec<Remark>,
}

/// The space for windings.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Window {
    /// Area [m²].
    pub area: f64,
    /// The share of it that square cells of the insulated wire can fill in practice.
    pub practical_fill: f64,
}

/// A caution that belongs to a figure.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Remark {
    /// A word to look up: `window-overfilled`.
    pub word: &'static str,
    /// A sentence that says it all.
    pub text: String,
}

impl Remark {
    /// A remark.
    pub fn new(word: &'static str, text: impl Into<String>) -> Self {
        Remark {
            word,
            text: text.into(),
        }
    }
}

/// Why no geometry, material or winding comes out; the reader turns it into a message on the key.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fault {
    /// A word to look up.
    pub word: &'static str,
    /// The key at fault.
    pub key: &'static str,
    /// What is wrong, as a sentence.
    pub text: String,
    /// What would be right.
    pub help: &'static str,
}

impl std::fmt::Display for Fault {
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        out.write_str(&self.text)
    }
}

impl std::error::Error for Fault {}

impl Geometry {
    /// A closed path of constant section, all in the core's material.
    pub fn closed(length: f64, area: f64) -> Self {
        Geometry {
            length,
            area,
            minimum_area: area,
            section: area,
            volume: length * area,
            iron: length,
            air: 0.0,
            gaps: Vec::new(),
            fringing: None,
            moving: None,
            mean_turn: None,
            window: None,
            layer_breadth: None,
            remarks: Vec::new(),
        }
    }

    /// A coil in air whose flux per ampere-turn is `permeance` [H]; `area` [m²] is that of the mean turn.
    pub fn in_air(length: f64, area: f64, permeance: f64) -> Self {
        Geometry {
            iron: 0.0,
            air: MU0 * area / permeance,
            ..Geometry::closed(length, area)
        }
    }

    /// Puts a gap of the path's own section into it.
    pub fn with_gap(self, gap: f64, fringing: Option<Fringing>) -> Self {
        let area = self.area;
        self.with_gaps(vec![Gap {
            place: "gap",
            length: gap,
            area,
            fringing,
        }])
    }

    /// Puts gaps into the path: in series with the material, each shorter by its fringing factor and counted at the
    /// path's section.
    pub fn with_gaps(mut self, gaps: Vec<Gap>) -> Self {
        let (mut straight, mut fringed) = (0.0, 0.0);
        for gap in &gaps {
            let length = gap.length * self.area / gap.area;
            let factor = gap
                .fringing
                .as_ref()
                .map_or(1.0, |fringing| fringing.factor);
            straight += length;
            fringed += length / factor;
        }
        self.air += fringed;
        let mut told = gaps.iter().filter_map(|gap| gap.fringing.as_ref());
        if let Some(first) = told.next() {
            self.fringing = Some(Fringing {
                factor: if fringed > 0.0 {
                    straight / fringed
                } else {
                    first.factor
                },
                within: gaps
                    .iter()
                    .all(|gap| gap.fringing.as_ref().is_none_or(|fringing| fringing.within)),
                ..first.clone()
            });
        }
        // Gaps of one kind have one caution.
        for gap in &gaps {
            let remark = gap
                .fringing
                .as_ref()
                .and_then(|fringing| fringing.remark.clone());
            self.remarks
                .extend(remark.filter(|remark| !self.remarks.contains(remark)));
        }
        self.gaps = gaps;
        self
    }

    /// Gives the geometry its window, and the caution where a winding crowds it.
    pub fn wind(&mut self, window: Window, winding: Option<&WindingPlan>) {
        self.window = Some(window);
        self.remarks
            .extend(winding.and_then(|winding| winding.crowding(window)));
    }
}
