//! Panels below each other: who shares an axis, and who gets how much of the height.

use crate::report::chart::{Chart, CurvePanel, Panel};

use super::bars;
use super::panel::{STRIP, X_AXIS};
use super::range;

/// Between two panels [px].
pub const BETWEEN: f64 = 18.0;
/// Least height of a panel's frame [px].
const LOWEST: f64 = 110.0;

/// What stands above and below each panel's frame.
pub struct Stack<'a> {
    /// From top to bottom.
    pub panels: Vec<Slot<'a>>,
}

/// One panel's place.
pub struct Slot<'a> {
    /// The panel.
    pub panel: &'a Panel,
    /// Range of the shared x axis; unused for bars.
    pub x: (f64, f64),
    /// True where the x axis is written below.
    pub with_x_axis: bool,
    /// True where the names of its instants are written above.
    pub with_instants: bool,
}

impl Slot<'_> {
    /// Room above the frame [px].
    pub fn above(&self) -> f64 {
        if self.with_instants { STRIP } else { 0.0 }
    }

    /// Room below the frame [px].
    pub fn below(&self) -> f64 {
        match self.panel {
            Panel::Bars(_) => 0.0,
            Panel::Curves(_) if self.with_x_axis => X_AXIS,
            Panel::Curves(_) => 4.0,
        }
    }
}

impl<'a> Stack<'a> {
    /// The panels of a chart, neighbours with one x axis sharing its range.
    pub fn new(chart: &'a Chart) -> Self {
        let mut panels = Vec::new();
        for group in chart.panels.chunk_by(share_axis) {
            let curves: Vec<&CurvePanel> = group.iter().filter_map(as_curves).collect();
            let x = curves
                .first()
                .map_or((0.0, 1.0), |first| range::across(&first.x, &curves));
            for (number, panel) in group.iter().enumerate() {
                let instants = as_curves(panel).map_or(&[][..], |panel| &panel.instants);
                let above = number
                    .checked_sub(1)
                    .and_then(|before| as_curves(&group[before]));
                let told = above.is_some_and(|above| above.instants == instants);
                let with_x_axis = number + 1 == group.len();
                panels.push(Slot {
                    panel,
                    x,
                    with_x_axis,
                    with_instants: !instants.is_empty() && !told,
                });
            }
        }
        Stack { panels }
    }

    /// Curves take all the height there is; bars alone need no more than their rows.
    pub fn fills_the_page(&self) -> bool {
        let curves = |slot: &Slot<'_>| matches!(slot.panel, Panel::Curves(_));
        self.panels.is_empty() || self.panels.iter().any(curves)
    }

    /// Everything that is not frame.
    pub fn between(&self) -> f64 {
        let gaps = BETWEEN * self.panels.len().saturating_sub(1) as f64;
        gaps + self
            .panels
            .iter()
            .map(|slot| slot.above() + slot.below())
            .sum::<f64>()
    }

    /// Heights of the frames: bars take what their rows want, at most half where there are curves; curves share the rest.
    pub fn heights(&self, room: f64) -> Vec<f64> {
        let room = room - self.between();
        let wish = |slot: &Slot<'_>| match slot.panel {
            Panel::Bars(panel) => panel.bars.len().max(1) as f64 * bars::ROW + bars::FOOT,
            Panel::Curves(_) => 0.0,
        };
        let wishes: f64 = self.panels.iter().map(wish).sum();
        let curves = self
            .panels
            .iter()
            .filter(|slot| matches!(slot.panel, Panel::Curves(_)))
            .count() as f64;
        let for_bars = if curves > 0.0 { 0.5 * room } else { room };
        let squeeze = if wishes > for_bars {
            for_bars / wishes
        } else {
            1.0
        };
        let height = |slot: &Slot<'_>| match slot.panel {
            Panel::Bars(_) => (wish(slot) * squeeze).max(LOWEST),
            Panel::Curves(_) => ((room - wishes * squeeze) / curves).max(LOWEST),
        };
        self.panels.iter().map(height).collect()
    }
}

/// The panel where it has curves.
pub fn as_curves(panel: &Panel) -> Option<&CurvePanel> {
    match panel {
        Panel::Curves(panel) => Some(panel),
        Panel::Bars(_) => None,
    }
}

fn share_axis(above: &Panel, below: &Panel) -> bool {
    matches!((above, below), (Panel::Curves(above), Panel::Curves(below)) if above.x == below.x)
}
