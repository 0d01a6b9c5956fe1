//! A winding on a shape: what it takes of the window, and its resistance.

use super::geometry::{Remark, Window};
use super::wire::Wire;

/// What a shape needs to know of the winding it carries.
#[derive(Clone, Debug)]
pub struct WindingPlan {
    /// Number of turns, 1 or more.
    pub turns: usize,
    /// The wire, where the coil names one.
    pub wire: Option<Wire>,
}

impl WindingPlan {
    /// Share of a window [m²] that square cells of the insulated wire take; None without a wire.
    pub fn fill(&self, window: f64) -> Option<f64> {
        let wire = self.wire.as_ref()?;
        Some(self.turns as f64 * wire.cell / window)
    }

    /// A caution where the window is too full.
    pub fn crowding(&self, window: Window) -> Option<Remark> {
        let fill = self.fill(window.area)?;
        let percent = 100.0 * fill;
        if fill > 1.0 {
            let text = format!("window overfilled: the winding takes {percent:.0} % of its window");
            return Some(Remark::new("window-overfilled", text));
        }
        (fill > window.practical_fill).then(|| {
            let text = format!(
                "window crowded: the winding takes {percent:.0} % of its window, in practice {:.0} % can be filled",
                100.0 * window.practical_fill
            );
            Remark::new("window-crowded", text)
        })
    }

    /// Resistance [Ω] of the winding at a `temperature` [K] with a mean turn [m]; None without a wire.
    pub fn resistance(&self, mean_turn: f64, temperature: f64) -> Option<f64> {
        let wire = self.wire.as_ref()?;
        Some(self.turns as f64 * mean_turn * wire.resistance_per_metre(temperature))
    }
}
