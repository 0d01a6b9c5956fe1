//! What suppressors have in common: the flyback diode, and where the closed forms that seed a search come from.
//!
//! A clamp of constant voltage Vc across the coil of a circuit that rests at V lifts the switch to V + Vc, so the seed
//! is the last step with V + Vc within what the switch is allowed, all at their highest. The search by simulation then goes
//! on from there.

use crate::sizing::catalogue::{Catalogue, Part};
use crate::sizing::fillings::Filling;
use crate::units::{CURRENT, RATIO, RESISTANCE, VOLTAGE};

/// All flyback diodes, smaller ones first. A diode that is made to break down is none.
pub fn diodes(catalogue: &Catalogue) -> Vec<Filling> {
    let plain = |part: &Part| part.figure("breakdown_voltage", VOLTAGE).is_none();
    filled(catalogue.select("diode", plain))
}

/// Parts as fillings.
pub fn filled(parts: Vec<Part>) -> Vec<Filling> {
    parts.into_iter().map(Filling::Part).collect()
}

/// Highest clamping voltage of a part at a current [A]: breakdown with its tolerance, the slope resistance or clamping
/// point with it.
pub fn clamping(filling: &Filling, current: f64) -> f64 {
    let Filling::Part(part) = filling else {
        return 0.0;
    };
    let breakdown = part
        .figure("breakdown_voltage", VOLTAGE)
        .unwrap_or(f64::INFINITY);
    let at = part.figure("breakdown_current", CURRENT).unwrap_or(0.0);
    let slope = part
        .figure("breakdown_resistance", RESISTANCE)
        .unwrap_or(0.0);
    // Parts in breakdown are sold within 5 % (common practice); the simulation takes the spread as written.
    1.05 * breakdown + slope * (current - at)
}

/// Forward voltage of a flyback diode at a current [A], from its junction law at room temperature.
pub fn forward(filling: Option<&Filling>, current: f64) -> f64 {
    let Some(Filling::Part(part)) = filling else {
        return 0.0;
    };
    let saturation = part.figure("saturation_current", CURRENT).unwrap_or(1e-9);
    let ideality = part.figure("ideality_factor", RATIO).unwrap_or(1.0);
    let series = part.figure("series_resistance", RESISTANCE).unwrap_or(0.0);
    0.0257 * ideality * (current / saturation).ln_1p() + series * current
}
