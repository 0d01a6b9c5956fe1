//! A flyback diode across the coil: hardly any kick, and the slowest release, (L/R) ln(I0/I) and less.

use super::{Choices, Suppressor, across};

/// The diode.
pub const DIODE: Suppressor = Suppressor {
    word: "diode",
    family: "diode",
    about: "flyback diode across the coil",
    place: "coil",
    elements: &["diode"],
    choices: |_, catalogue| vec![Choices::sizes(across::diodes(catalogue))],
    wire: |facts, wiring| {
        let [plus, minus] = &facts.coil_nodes;
        wiring.add(0, format!("anode: {minus}, cathode: {plus}"));
    },
};
