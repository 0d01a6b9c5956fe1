//! Guards: what a circuit asks for beyond the ordinary is answered rightly: charges that jump, kicks of megavolts beside
//! a junction, megaamperes beside microamperes. Source of every exact value: the formula beside it.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use coilbreak::run::Outcome;

const BOLTZMANN_OVER_CHARGE: f64 = 1.380649e-23 / 1.602176634e-19;

fn account(outcome: &Outcome, name: &str) -> coilbreak::analysis::ledger::Account {
    let found = outcome.accounts.iter().find(|(known, _)| known == name);
    found.unwrap_or_else(|| panic!("no account of {name}")).1
}

#[test]
fn a_source_that_jumps_charges_a_junction_by_its_own_law() {
    // q = 2 C b (1 - u) with u = sqrt(1 - v/b): the integral of v dq from u = 1 to U is 2 C b² (U³/3 - U + 2/3).
    let (c, b, jump): (f64, f64, f64) = (100e-12, 0.7, 200.0);
    let u = (1.0 + jump / b).sqrt();
    let energy = 2.0 * c * b * b * (u.powi(3) / 3.0 - u + 2.0 / 3.0);
    let out = outcome(&from_text(
        "elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: {steps: {at: [[0 s, 0 V], [1 µs, 200 V]]}}}
  d: {kind: diode, anode: ground, cathode: a, saturation_current: 1 pA, ideality_factor: 1.5,
      junction_capacitance: 100 pF}
analysis: {transient: {duration: 2 µs}}
",
        &[],
    ));
    let source = "integral of v dq of the abrupt junction's charge";
    let found = account(&out, "d");
    for joules in [found.absorbed, found.stored] {
        check(
            "energy that a jump puts into a depletion charge",
            source,
            joules,
            energy,
            Bound::Relative(1e-5),
        );
    }
    assert!(out.ledger.imbalance < 1e-6, "{:e}", out.ledger.imbalance);
}

#[test]
fn a_junction_in_a_kick_of_megavolts_heats_as_its_current_says() {
    // i = I exp(-t/tau), tau = L/R: the junction takes the integral of i n k T/q ln(i/Is), I tau n k T/q (ln(I/Is) - 1),
    // its series resistance Rs I² tau/2, and nothing thereafter.
    let (current, tau) = (1.0, 365e-6 / 1e7);
    let slope = 1.6 * BOLTZMANN_OVER_CHARGE * 298.15;
    let heat = current * tau * slope * ((current / 1e-11_f64).ln() - 1.0)
        + 66.0 * current * current * tau / 2.0;
    let out = outcome(&from_text(
        "elements:
  l: {kind: inductor, nodes: [a, ground], inductance: 365 µH, initial_current: -1 A}
  r: {kind: resistor, nodes: [a, b], resistance: 10 MΩ}
  d: {kind: diode, anode: b, cathode: ground, saturation_current: 10 pA, ideality_factor: 1.6, series_resistance: 66 Ω}
analysis: {transient: {duration: 200 ms, start: zero}}
",
        &[],
    ));
    check(
        "heat of a junction in a kick",
        "integral of its own laws over an exponential decay",
        account(&out, "d").dissipated,
        heat,
        Bound::Relative(1e-3),
    );
    assert!(out.ledger.imbalance < 1e-4, "{:e}", out.ledger.imbalance);
}

#[test]
fn beside_megaamperes_a_loop_at_rest_stays_at_rest() {
    // The first diode is laid across a source far beyond its knee; a second one and a coil hang on the same node in a
    // loop of their own, in which no current has a reason to flow.
    let out = outcome(&from_text(
        "cores:
  core: {shape: effective, length: 10 mm, area: 3 mm², gap: 0.3 mm}
elements:
  s: {kind: voltage_source, nodes: [a, ground], voltage: -1.45 V}
  d: {kind: diode, anode: ground, cathode: a, saturation_current: 20 fA, ideality_factor: 1.2,
      junction_capacitance: 9.5 nF, transit_time: 50 ns}
  z: {kind: zener, anode: a, cathode: b, saturation_current: 180 pA, ideality_factor: 1.9, transit_time: 6 ns,
      breakdown_voltage: 16 V, breakdown_resistance: 140 mΩ}
  l: {kind: coil, nodes: [b, a], core: core, turns: 2, resistance: 40 mΩ, self_capacitance: 0 F}
analysis: {transient: {duration: 9 ms, start: zero}}
readings:
  through: {signal: current through l, take: peak}
  across: {signal: voltage across l, take: peak}
  main: {signal: current through d, take: peak}
",
        &[],
    ));
    assert!(value(&out, "main") > 1e6, "{}", value(&out, "main"));
    for reading in ["through", "across"] {
        let source = "a loop without a source";
        check(
            "loop at rest beside megaamperes",
            source,
            value(&out, reading),
            0.0,
            Bound::Absolute(1e-7),
        );
    }
}
