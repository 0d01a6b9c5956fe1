//! A flyback diode with a resistor in series across the coil: the kick is I0 R, the release (L/(Rc + R)) ln(I0/I) and less.

use super::{Choices, Suppressor, across};
use crate::sizing::fillings::Filling;
use crate::sizing::standard_values::{Series, all_between};

/// The resistor lies between a tenth and twenty times the coil's own resistance: below, the diode alone does as much;
/// above, the voltage is that of no suppressor.
const RANGE: (f64, f64) = (0.1, 20.0);

/// Diode and resistor.
pub const DIODE_RESISTOR: Suppressor = Suppressor {
    word: "diode_resistor",
    family: "diode_resistor",
    about: "flyback diode with a resistor in series, across the coil",
    place: "coil",
    elements: &["diode", "resistor"],
    choices: |facts, catalogue| {
        let diodes = across::diodes(catalogue);
        let own = facts.nominal.open_voltage.abs() / facts.nominal.current.abs();
        let values = all_between(RANGE.0 * own, RANGE.1 * own, Series::E24);
        let steps = values
            .iter()
            .map(|&value| Filling::resistors(value, Series::E24))
            .collect();
        let rise = |step: &[Filling]| match step.first() {
            Some(Filling::Standard(resistor)) => 1.05 * resistor.value * facts.current_high,
            _ => f64::INFINITY,
        };
        // Without a bound the kick is kept to the supply: R of the coil's own size (common practice).
        let room = facts.headroom().unwrap_or(facts.open_voltage_high);
        let room = room - across::forward(diodes.first(), facts.current_high);
        vec![
            Choices::sizes(diodes),
            Choices::harshest(steps, |step| rise(step) <= room),
        ]
    },
    wire: |facts, wiring| {
        let [plus, minus] = &facts.coil_nodes;
        let between = wiring.between.clone();
        wiring.add(0, format!("anode: {between}, cathode: {plus}"));
        wiring.add(1, format!("nodes: [{minus}, {between}]"));
    },
};
