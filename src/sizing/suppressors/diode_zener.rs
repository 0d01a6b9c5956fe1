//! A flyback diode with a zener in series against it, across the coil: a kick of constant voltage Vc, and a release of
//! (L/R) ln((I0 + Vc/R)/(I + Vc/R)).

use super::{Choices, Suppressor, across};
use crate::sizing::fillings::Filling;

/// Diode and zener.
pub const DIODE_ZENER: Suppressor = Suppressor {
    word: "diode_zener",
    family: "diode_zener",
    about: "flyback diode with a zener in series, across the coil",
    place: "coil",
    elements: &["diode", "zener"],
    choices: |facts, catalogue| {
        let diodes = across::diodes(catalogue);
        let steps: Vec<Vec<Filling>> = catalogue
            .by_breakdown("zener", |_| true)
            .into_iter()
            .map(across::filled)
            .collect();
        let current = facts.current_high;
        // Without a bound the zener is as high as the supply (common practice).
        let room = facts.headroom().unwrap_or(facts.open_voltage_high);
        let room = room - across::forward(diodes.first(), current);
        let fits = |step: &[Filling]| {
            step.first()
                .is_some_and(|zener| across::clamping(zener, current) <= room)
        };
        vec![Choices::sizes(diodes), Choices::harshest(steps, fits)]
    },
    wire: |facts, wiring| {
        let [plus, minus] = &facts.coil_nodes;
        let between = wiring.between.clone();
        wiring.add(0, format!("anode: {between}, cathode: {plus}"));
        wiring.add(1, format!("anode: {between}, cathode: {minus}"));
    },
};
