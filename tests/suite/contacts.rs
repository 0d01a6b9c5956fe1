//! Guards: a mechanical contact rebounds as its train says, an arc burns and goes out by its minima, and each re-ignition lies
//! on the breakdown line of the gap.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::analysis::{Analysis, Settings, Simulation, Start, simulate::Shown};
use coilbreak::elements::arc::MATERIALS;
use coilbreak::elements::contact_pair::BURNS;
use coilbreak::run::{Netlist, method, pilot};
use std::ops::ControlFlow;

/// A linear coil of 0.3 H and 160 Ω at 24 V, interrupted by a silver contact without any suppressor.
const SHOWER: &str = "
elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}
  coil:   {kind: inductor, nodes: [rail, drive], inductance: 0.3 H, series_resistance: 160 Ω}
  float:  {kind: contact, nodes: [drive, ground], closed_resistance: 50 mΩ, open_resistance: 1 GΩ, transition: 0 s,
           initially: closed, opens_at: [0.1 ms],
           arc: {material: silver, capacitance: 150 pF, gap: 0.4 mm, opening_speed: 0.15 m/s, closing_speed: 0.3 m/s}}
analysis: {transient: {duration: 4 ms}}
readings:
  kick: {signal: voltage at drive, take: highest}
limits:
  bound: {reading: kick, at_most: 5 kV, margin: 0 %}
";

/// Breakdown voltage [V] of a growing gap [m] between silver contacts at 25 °C: 80 V/µm, the minimum 327 V of air, the uniform
/// field 24.22 kV/cm d g + 6.08 kV/√cm √(d g) with d = 293/T, and no less than twice 12 V. Sources as in `elements/arc.rs`.
fn line(gap: f64) -> f64 {
    let centimetres = 100.0 * gap * 293.0 / 298.15;
    let uniform = 1e3 * (24.22 * centimetres + 6.08 * centimetres.sqrt());
    (80e6 * gap).min(uniform.max(327.0)).max(24.0)
}

/// What is seen of an arc: its lighting or going out [s], the voltage [V] and the current of the coil [A] there.
#[derive(Clone, Copy, Debug)]
struct Seen {
    time: f64,
    lights: bool,
    voltage: f64,
    coil: f64,
}

/// Every arc of the contact `float` at node `drive`, with the coil's current.
fn arcs(netlist: &Netlist, accuracy: f64) -> Vec<Seen> {
    let Analysis::Transient(transient) = &netlist.analysis else {
        panic!("a transient")
    };
    let circuit = &netlist.circuit;
    let simulation = Simulation {
        circuit,
        settings: Settings::new(
            circuit.values()[transient.duration],
            accuracy,
            Start::OperatingPoint,
        ),
        method: method(),
        warm: None,
    };
    let tap = |text: &str| {
        circuit
            .tap(&text.parse().expect("a phrase"))
            .expect("it is there")
    };
    let (voltage, coil) = (tap("voltage at drive"), tap("current through coil"));
    let burns = circuit.find("float").expect("a contact").modes.start + BURNS;
    let scales = pilot(netlist).expect("the pilot run succeeds");
    let mut seen = Vec::new();
    simulation
        .run_scaled(&scales, &mut |circuit, shown, _| {
            if let Shown::Event { before, after, .. } = shown
                && before.mode[burns] != after.mode[burns]
            {
                seen.push(Seen {
                    time: before.time,
                    lights: after.mode[burns] != 0.0,
                    voltage: circuit.read(&voltage, before),
                    coil: circuit.read(&coil, before),
                });
            }
            ControlFlow::Continue(())
        })
        .expect("the run succeeds");
    seen
}

#[test]
fn each_reignition_lies_on_the_breakdown_line_and_no_arc_burns_below_its_minima() {
    let netlist = from_text(SHOWER, &[]);
    let seen = arcs(&netlist, 1e-4);
    let lit: Vec<&Seen> = seen.iter().filter(|seen| seen.lights).collect();
    assert!(lit.len() > 300, "{} arcs", lit.len());
    for arc in &lit {
        let gap = 0.15 * (arc.time - 1e-4);
        // Half a volt: the accuracy 1e-4 of a swing of 1 kV and more.
        check(
            "re-ignition of an opening contact",
            "breakdown line of a gap in air, sources in elements/arc.rs",
            arc.voltage,
            line(gap),
            Bound::Absolute(0.5),
        );
        assert!(arc.voltage > 12.0, "{arc:?}");
    }
    // A spark discharges the contact's own capacitance through milliohms: the voltage is what the accuracy holds, and with it
    // the current at its end to what that voltage drives.
    for end in seen.iter().filter(|seen| !seen.lights) {
        check(
            "voltage of an arc as it goes out",
            "minimum voltage and current of silver, R. Holm 1967 (from memory)",
            end.voltage,
            12.0 + 0.4 * 0.05,
            Bound::Absolute(0.1),
        );
    }
    // The coil cannot push the contact above what the gap holds.
    let kick = value(&outcome(&netlist), "kick");
    assert!(kick < line(0.4e-3) && kick > 327.0, "{kick}");
}

/// Between two arcs the coil rings into the contact's capacitance: L di/dt = V - R i - v, C dv/dt = i, whose solution is
/// elementary: with a = R/2L and w² = 1/(L C) - a², a deviation (v0 - V, i0) turns and decays.
#[test]
fn between_reignitions_the_coil_rings_as_the_closed_form_says() {
    let netlist = from_text(SHOWER, &["elements.float.open_resistance=1e15 Ω"]);
    let seen = arcs(&netlist, 1e-5);
    let (l, r, c, v) = (0.3, 160.0, 150e-12, 24.0);
    let a = r / (2.0 * l);
    let w = (1.0f64 / (l * c) - a * a).sqrt();
    let pairs = seen
        .windows(2)
        .filter(|pair| !pair[0].lights && pair[1].lights);
    let mut checked = 0;
    for pair in pairs {
        let t = pair[1].time - pair[0].time;
        let (u0, i0) = (pair[0].voltage - v, pair[0].coil);
        // u = v - V: u'' + 2 a u' + (a² + w²) u = 0, u' = (i)/C at the start, the coil's current alone.
        let slope = i0 / c;
        let u = (-a * t).exp() * (u0 * (w * t).cos() + (slope + a * u0) / w * (w * t).sin());
        check(
            "voltage between two arcs",
            "closed form of the damped ring",
            pair[1].voltage,
            u + v,
            Bound::Absolute(0.1),
        );
        checked += 1;
    }
    assert!(checked > 300);
}

/// 24 V behind 40 Ω and 20 mH: 0.6 A falls towards (24 V - 12 V)/40.05 Ω and goes out at 0.4 A:
/// t = (L/R) ln((I0 - I1)/(0.4 A - I1)).
#[test]
fn a_stationary_arc_burns_until_its_minimum_current() {
    let text = "
elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 24 V}
  coil:   {kind: inductor, nodes: [rail, drive], inductance: 20 mH, series_resistance: 40 Ω}
  float:  {kind: contact, nodes: [drive, ground], closed_resistance: 50 mΩ, open_resistance: 1 GΩ, transition: 0 s,
           initially: closed, opens_at: [0.1 ms],
           arc: {minimum_voltage: 12 V, minimum_current: 0.4 A, capacitance: 20 pF, gap: 1 mm,
                 opening_speed: 0.5 m/s, closing_speed: 0.5 m/s}}
analysis: {transient: {duration: 3 ms}}
readings:
  left: {signal: current through coil, take: final}
";
    let netlist = from_text(text, &[]);
    let seen = arcs(&netlist, 1e-5);
    assert!(seen[0].lights && !seen[1].lights, "{:?}", &seen[..2]);
    let (start, end) = (24.0 / 40.05, 12.0 / 40.05);
    let lasts = 20e-3 / 40.05 * ((start - end) / (0.4f64 - end)).ln();
    check(
        "duration of a stationary arc",
        "closed form of a coil against a constant voltage",
        seen[1].time - seen[0].time,
        lasts,
        Bound::Relative(1e-4),
    );
    check(
        "current of an arc as it goes out",
        "the minimum current that is given",
        seen[1].coil,
        0.4,
        Bound::Relative(1e-3),
    );
    let outcome = outcome(&netlist);
    assert!(
        outcome.ledger.imbalance < 1e-3,
        "{}",
        outcome.ledger.imbalance
    );
}

/// With a current that the supply feeds for ever an arc stays, at its voltage: (48 V - 12 V)/(24 Ω + 0.05 Ω).
#[test]
fn an_arc_that_the_supply_feeds_stays() {
    let text = "
elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 48 V}
  load:   {kind: resistor, nodes: [rail, drive], resistance: 24 Ω}
  float:  {kind: contact, nodes: [drive, ground], closed_resistance: 50 mΩ, open_resistance: 1 GΩ, transition: 0 s,
           initially: closed, opens_at: [0.1 ms],
           arc: {material: silver, capacitance: 20 pF, gap: 1 mm, column_field: 2 V/mm,
                 opening_speed: 0.5 m/s, closing_speed: 0.5 m/s}}
analysis: {transient: {duration: 5 ms}}
readings:
  left: {signal: current through load, take: final}
";
    let netlist = from_text(text, &[]);
    check(
        "current of an arc that stays",
        "Ohm's law behind the arc's voltage at its gap",
        value(&outcome(&netlist), "left"),
        (48.0 - 14.0) / 24.05,
        Bound::Relative(1e-6),
    );
}

/// Open time of a train: first (1 - e^n)/(1 - e); each touch lasts as long as the flight that follows it.
#[test]
fn a_closing_contact_rebounds_as_its_geometric_series_says() {
    let text = "
elements:
  supply: {kind: voltage_source, nodes: [rail, ground], voltage: 10 V}
  load:   {kind: resistor, nodes: [rail, out], resistance: 1 kΩ}
  k1:     {kind: contact, nodes: [out, ground], closed_resistance: 1 µΩ, open_resistance: 1 TΩ, transition: 0 s,
           initially: open, closes_at: [1 ms], bounce: {count: 4, first_duration: 0.4 ms, restitution: 0.6}}
analysis: {transient: {duration: 5 ms}}
readings:
  open: {signal: voltage at out, take: time_above, level: 5 V, from: k1 closes}
  last: {signal: voltage at out, take: last_time, falls_to: 5 V}
";
    let netlist = from_text(text, &[]);
    let outcome = outcome(&netlist);
    let series = 0.4e-3 * (1.0 - 0.6f64.powi(4)) / (1.0 - 0.6);
    let source = "geometric series";
    let bound = Bound::Relative(1e-9);
    check(
        "rebounds of a contact",
        source,
        value(&outcome, "open"),
        series,
        bound,
    );
    check(
        "rebounds of a contact",
        source,
        value(&outcome, "last"),
        1e-3 + 2.0 * series,
        bound,
    );
}

#[test]
fn the_minima_of_contact_materials_lie_where_the_books_have_them() {
    let table = rows(include_str!("../data/arc_minima.csv"));
    for (name, word) in [
        ("Ag silver", "silver"),
        ("Au gold", "gold"),
        ("Cu copper", "copper"),
        ("Ni nickel", "nickel"),
        ("Pd palladium", "palladium"),
        ("Pt platinum", "platinum"),
        ("W tungsten", "tungsten"),
        ("Rh rhodium", "rhodium"),
        ("AgCdO / AgSnO2", "silver_tin_oxide"),
    ] {
        let row = table
            .iter()
            .find(|row| row.text("material") == name)
            .unwrap_or_else(|| panic!("no {name}"));
        let material = MATERIALS
            .iter()
            .find(|material| material.0 == word)
            .unwrap_or_else(|| panic!("no {word}"));
        let middle = |what: &str, unit: &str| {
            let at = |end: &str| row.get(&format!("{what}_{end}_{unit}"));
            (
                0.5 * (at("low") + at("high")),
                0.5 * (at("high") - at("low")) + 1e-12,
            )
        };
        for (reached, (expected, off)) in [
            (material.1, middle("Vm", "V")),
            (material.2, middle("Im", "A")),
        ] {
            check(
                "minima of arcs",
                "R. Holm 1967, P. Slade (ed.), from memory",
                reached,
                expected,
                Bound::Absolute(off),
            );
        }
    }
    assert_eq!(MATERIALS.len(), 9);
}

#[test]
fn a_shower_beyond_the_steps_allowed_says_so() {
    let netlist = from_text(SHOWER, &["analysis.transient.most_steps=500"]);
    let failure = coilbreak::run::run(&netlist, &mut |_, _| ControlFlow::Continue(()))
        .expect_err("five hundred steps are too few");
    assert!(format!("{failure:?}").contains("most_steps"), "{failure:?}");
}
