//! A suppressor diode: for both directions across the coil, where it has to block the supply while the switch is closed; for
//! one direction across the switch, where it has to block the supply while the switch is open.

use super::{Choices, Suppressor, across};
use crate::sizing::catalogue::{Catalogue, Part};
use crate::sizing::facts::Facts;
use crate::sizing::fillings::Filling;
use crate::units::VOLTAGE;

/// Across the coil.
pub const ACROSS_COIL: Suppressor = Suppressor {
    word: "suppressor_diode_across_coil",
    family: "suppressor_diode",
    about: "suppressor diode for both directions across the coil",
    place: "coil",
    elements: &["suppressor"],
    choices: |facts, catalogue| {
        let room = facts.headroom().unwrap_or(facts.open_voltage_high);
        steps(facts, catalogue, "both", room)
    },
    wire: |facts, wiring| {
        let [plus, minus] = &facts.coil_nodes;
        wiring.add(0, format!("nodes: [{minus}, {plus}]"));
    },
};

/// Across the switch.
pub const ACROSS_SWITCH: Suppressor = Suppressor {
    word: "suppressor_diode_across_switch",
    family: "suppressor_diode",
    about: "suppressor diode for one direction across the switch",
    place: "switch",
    elements: &["suppressor"],
    choices: |facts, catalogue| {
        let room = facts.headroom().unwrap_or(facts.open_voltage_high);
        steps(facts, catalogue, "one", room + facts.open_voltage_high)
    },
    wire: |facts, wiring| {
        let [plus, minus] = &facts.switch_nodes;
        wiring.add(0, format!("nodes: [{plus}, {minus}]"));
    },
};

/// Share of its breakdown voltage that a part breaks down at for certain no earlier (5 % tolerance, common practice).
const BLOCKS: f64 = 0.95;

/// Suppressors that block the supply, by breakdown voltage; the search begins at the last one that clamps within
/// `room` [V].
fn steps(facts: &Facts, catalogue: &Catalogue, directions: &str, room: f64) -> Vec<Choices> {
    let blocks = |part: &Part| {
        let breakdown = part.figure("breakdown_voltage", VOLTAGE).unwrap_or(0.0);
        part.word("directions") == directions && BLOCKS * breakdown > facts.open_voltage_high
    };
    let steps: Vec<Vec<Filling>> = catalogue
        .by_breakdown("suppressor_diode", blocks)
        .into_iter()
        .map(across::filled)
        .collect();
    let fits = |step: &[Filling]| {
        step.first()
            .is_some_and(|part| across::clamping(part, facts.current_high) <= room)
    };
    vec![Choices::harshest(steps, fits)]
}
