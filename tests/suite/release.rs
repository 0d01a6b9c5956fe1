//! A linear coil lets go through eight suppressors: release time, voltages and energies against their closed forms.
//!
//! The clamp is a constant source behind a diode that is nearly ideal: an ideality factor of 0.01 leaves 0.26 mV where a
//! real junction has 26 mV. Its drop of some 6 mV at half the current is taken off the source; what is left of it over a
//! decade of current is 0.6 mV, 5e-5 of the coil's own 12 V or more. The switch opens at once; closed it has 1e-7 of the
//! coil's resistance, open 1e5 times it, which takes up to 1e-4 of the current at the highest clamp. A capacitance across
//! the coil that takes 1e-6 of the stored energy gives the node a law once the diode blocks.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use crate::table::{Row, rows};
use coilbreak::run::Outcome;

const SOURCE: &str = "i = (I0 + Vc/Rt) exp(-t/tau) - Vc/Rt, tests/data/coil_turnoff.csv";

/// What the approximations named above and the accuracy leave.
const CLOSE: Bound = Bound::Relative(2e-4);

fn netlist(row: &Row) -> String {
    let (inductance, resistance, supply) = (row.get("L_H"), row.get("R_ohm"), row.get("V"));
    let (clamp, series) = (row.get("Vc"), row.get("Rx_ohm"));
    let tau = inductance / resistance;
    // Half the current: what the diode drops in the middle of the release.
    let drop =
        0.01 * 1.380_649e-23 * 298.15 / 1.602_176_634e-19 * (0.5 * row.get("I0_A") / 1e-12).ln();
    // From the switched node to the rail: a bare resistor, or one where there is one, the diode and the clamp.
    let (mut between, mut at) = (String::new(), "drive");
    let bare = row.text("suppressor").starts_with("resistor");
    if series > 0.0 {
        let end = if bare { "rail" } else { "behind" };
        between +=
            &format!("  rx: {{kind: resistor, nodes: [drive, {end}], resistance: {series} Ω}}\n");
        at = end;
    }
    if !bare {
        between += &format!(
            "  d: {{kind: diode, anode: {at}, cathode: last, saturation_current: 1 pA, ideality_factor: 0.01}}
  clamp: {{kind: voltage_source, nodes: [last, rail], voltage: {} V}}\n",
            clamp - drop
        );
    }
    let mut readings = String::new();
    for (name, element) in [
        ("in_rx", "rx"),
        ("in_clamp", "clamp"),
        ("in_diode", "d"),
        ("in_winding", "r"),
    ] {
        if element == "r" || between.contains(&format!("  {element}:")) {
            readings += &format!(
                "  {name}: {{signal: power in {element}, take: integral, from: s opens}}\n"
            );
        }
    }
    let level = row.get("Irel_A");
    let zero = 1e-5 * row.get("I0_A");
    let capacitance = 2e-6 * row.get("E_stored_J") / row.get("V_switch_peak").powi(2);
    // Until all is over: the current is zero, or an exponential of twenty time constants has left 2e-9.
    let over = row
        .number("t_zero_ms")
        .map_or(20.0 * tau, |zero| 1.05e-3 * zero);
    format!(
        "elements:
  v: {{kind: voltage_source, nodes: [rail, ground], voltage: {supply} V}}
  r: {{kind: resistor, nodes: [rail, inner], resistance: {resistance} Ω}}
  l: {{kind: inductor, nodes: [inner, drive], inductance: {inductance} H}}
  s: {{kind: switch, nodes: [drive, ground], closed_resistance: {:e} Ω, open_resistance: {:e} Ω, transition: 0 s,
      initially: closed, opens_at: [{:e} s]}}
  c: {{kind: capacitor, nodes: [rail, drive], capacitance: {capacitance:e} F}}
{between}analysis: {{transient: {{duration: {:e} s, accuracy: 1e-5}}}}
readings:
  release: {{signal: winding current of l, take: time_until_last, falls_to: {level:e} A, from: s opens}}
  zero: {{signal: winding current of l, take: time_until, falls_to: {zero:e} A, from: s opens}}
  switch: {{signal: voltage across s, take: peak, from: s opens}}
  coil: {{signal: voltage from drive to rail, take: peak, from: s opens}}
{readings}",
        1e-7 * resistance,
        1e5 * resistance,
        0.1 * tau,
        0.1 * tau + over
    )
}

fn number(outcome: &Outcome, name: &str) -> f64 {
    outcome
        .reading(name)
        .and_then(|reading| reading.value)
        .unwrap_or(0.0)
}

#[test]
fn a_linear_coil_lets_go_as_the_closed_form_says() {
    for row in rows(include_str!("../data/coil_turnoff.csv")) {
        let out = outcome(&from_text(&netlist(&row), &[]));
        check(
            "release time",
            SOURCE,
            value(&out, "release"),
            1e-3 * row.get("t_release_ms"),
            CLOSE,
        );
        if let Some(zero) = row.number("t_zero_ms") {
            check(
                "time to zero",
                SOURCE,
                value(&out, "zero"),
                1e-3 * zero,
                Bound::Relative(5e-4),
            );
        }
        let supply = row.get("V");
        // An ideal short lifts the switch to V alone, the diode by its drop more.
        let voltage = Bound::Absolute(1e-4 * supply.max(row.get("V_switch_peak")));
        check(
            "switch voltage",
            SOURCE,
            value(&out, "switch"),
            row.get("V_switch_peak"),
            voltage,
        );
        check(
            "coil voltage",
            SOURCE,
            value(&out, "coil"),
            row.get("V_coil_peak").max(supply),
            voltage,
        );
        let energy = Bound::Absolute(3e-4 * row.get("E_stored_J"));
        // The clamp of the table is diode and source together.
        let clamp = number(&out, "in_clamp") + number(&out, "in_diode");
        for (reached, column) in [
            (number(&out, "in_rx"), "E_Rx_J"),
            (clamp, "E_clamp_J"),
            (number(&out, "in_winding"), "E_winding_J"),
        ] {
            check(
                "energy of the release",
                SOURCE,
                reached,
                row.get(column),
                energy,
            );
        }
    }
}
