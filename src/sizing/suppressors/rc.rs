//! A resistor in series with a capacitor across the switch. The field's energy goes into the capacitor: with E of it and
//! a voltage that may rise by V beyond the supply, C = 2 E/V² is enough without any loss, which seeds the search; a
//! smaller capacitor lets the coil go sooner. The resistor damps the ringing, takes the step I0 R as the switch opens
//! and limits the discharge V/R as it closes; it is sought from the coil's own resistance on.

use super::{Choices, Search, Suppressor};
use crate::sizing::fillings::Filling;
use crate::sizing::standard_values::{Series, all_between, nearest};

/// Film capacitors beyond this are no snubbers [F].
const LARGEST: f64 = 10e-6;
/// Smallest snubber capacitance [F].
const SMALLEST: f64 = 100e-12;
/// Capacitance per ampere without a bound on the voltage [F/A] (common practice: 0.5 to 1 µF per ampere).
const PER_AMPERE: f64 = 1e-6;
/// The resistor lies within this range of the coil's own resistance.
const RANGE: (f64, f64) = (0.01, 10.0);

/// Across the switch.
pub const ACROSS_SWITCH: Suppressor = Suppressor {
    word: "rc_across_switch",
    family: "rc",
    about: "resistor and capacitor in series across the switch",
    place: "switch",
    elements: &["snubber_resistor", "snubber_capacitor"],
    choices: |facts, _| {
        let own = facts.nominal.open_voltage.abs() / facts.nominal.current.abs();
        let values = all_between(RANGE.0 * own, RANGE.1 * own, Series::E24);
        let near = nearest(own, Series::E24);
        let seed = values.iter().position(|&value| Some(value) == near);
        let resistors = Choices {
            seed: seed.unwrap_or(0),
            steps: values
                .iter()
                .map(|&value| Filling::resistors(value, Series::E24))
                .collect(),
            search: Search::Best,
        };
        let enough = match facts.headroom() {
            Some(room) if room > 0.0 => 2.0 * facts.energy_high / (room * room),
            Some(_) => LARGEST,
            None => PER_AMPERE * facts.current_high,
        };
        let mut values = all_between(SMALLEST, LARGEST, Series::E6);
        values.reverse();
        let steps = values
            .iter()
            .map(|&value| Filling::capacitors(value, Series::E6))
            .collect();
        let holds = |step: &[Filling]| match step.first() {
            Some(Filling::Standard(capacitor)) => capacitor.value >= enough,
            _ => false,
        };
        vec![resistors, Choices::harshest(steps, holds)]
    },
    wire: |facts, wiring| {
        let [plus, minus] = &facts.switch_nodes;
        let between = wiring.between.clone();
        wiring.add(0, format!("nodes: [{plus}, {between}]"));
        wiring.add(1, format!("nodes: [{between}, {minus}]"));
    },
};
