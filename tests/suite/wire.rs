//! Guards: wire has the diameter, copper and resistance of its standards.

use crate::coils::{Coil, TWENTY};
use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::magnetics::wire::copper_ratio;

fn wire(text: impl Into<String>) -> coilbreak::magnetics::Wire {
    Coil::default().of_wire(text).wire()
}

#[test]
fn gauges_are_those_of_astm_b258_in_copper_of_iec_60028() {
    for row in rows(include_str!("../data/awg.csv")) {
        let wire = wire(format!("{{gauge: {} AWG}}", row.text("awg")));
        let source = "ASTM B258";
        let diameter = wire.bare_diameter.expect("round wire has one");
        check(
            "wire gauge",
            source,
            diameter * 1e3,
            row.get("d_mm"),
            Bound::Relative(1e-8),
        );
        check(
            "wire gauge",
            source,
            wire.copper * 1e6,
            row.get("area_mm2"),
            Bound::Relative(1e-8),
        );
        let ohms = |celsius: f64| wire.resistance_per_metre(celsius + 273.15);
        let source = "IEC 60028, 1/58 ohm mm²/m at 20 °C";
        check(
            "resistance of copper wire",
            source,
            ohms(20.0),
            row.get("R20_ohm_per_m"),
            Bound::Relative(1e-8),
        );
        // 0.00393 and 234.5 are not the same line: 1/0.00393 - 20 = 234.45.
        let source = "temperature coefficient 0.00393, another line than 234.5";
        for (celsius, column) in [
            (0.0, "R0C_ohm_per_m"),
            (80.0, "R80C_ohm_per_m"),
            (130.0, "R130C_ohm_per_m"),
        ] {
            check(
                "resistance of copper wire",
                source,
                ohms(celsius),
                row.get(column),
                Bound::Relative(1e-4),
            );
        }
    }
}

#[test]
fn metric_wire_has_its_copper() {
    for row in rows(include_str!("../data/metric_wire.csv")) {
        let wire = wire(format!("{{diameter: {} mm}}", row.text("d_nominal_mm")));
        let source = "IEC 60028, 1/58 ohm mm²/m at 20 °C";
        check(
            "metric wire",
            source,
            wire.copper * 1e6,
            row.get("area_mm2"),
            Bound::Relative(1e-7),
        );
        let reached = wire.resistance_per_metre(TWENTY);
        check(
            "metric wire",
            source,
            reached,
            row.get("R20_iec60028_ohm_per_m"),
            Bound::Relative(1e-7),
        );
    }
}

#[test]
fn a_winding_warms_by_the_resistance_method() {
    let mut copper = 0;
    for row in rows(include_str!("../data/resistance_method.csv")) {
        if row.get("k") != 234.5 {
            continue; // aluminium
        }
        let reached =
            row.get("R1_ohm") * copper_ratio(row.get("t2_C") + 273.15, row.get("t1_C") + 273.15);
        let source = "IEC 60034-1 and IEC 61810-1, resistance method (from memory)";
        check(
            "winding over temperature",
            source,
            reached,
            row.get("R2_ohm"),
            Bound::Relative(1e-8),
        );
        copper += 1;
    }
    assert_eq!(copper, 4);
}

#[test]
fn a_winding_resists_by_its_length_and_copper() {
    let core = "shape: solenoid, inner_diameter: 10 mm, outer_diameter: 18 mm, length: 20 mm";
    let wound = Coil::in_air(core, 1000)
        .of_wire("{diameter: 0.2 mm}")
        .wound();
    let metres = 1000.0 * std::f64::consts::PI * 14e-3;
    let expected = metres / 58e6 / (std::f64::consts::FRAC_PI_4 * 0.04e-6);
    let reached = wound.resistance.expect("wire and mean turn are known");
    check(
        "resistance of a winding",
        "length over copper",
        reached,
        expected,
        Bound::Relative(1e-12),
    );
    let foil = wire("{foil: {thickness: 0.1 mm, width: 20 mm}}").resistance_per_metre(TWENTY);
    check(
        "resistance of foil",
        "length over copper",
        foil,
        1.0 / 116.0,
        Bound::Relative(1e-12),
    );
    let litz = wire("{litz: {strands: 60, strand_diameter: 0.1 mm}}").resistance_per_metre(TWENTY);
    let strands = 1.0 / (58e6 * 60.0 * std::f64::consts::FRAC_PI_4 * 1e-8);
    check(
        "resistance of litz",
        "length over copper",
        litz,
        strands,
        Bound::Relative(1e-12),
    );
}

#[test]
fn a_crowded_window_is_told() {
    let remarks = |turns: usize| {
        let core =
            "shape: effective, length: 60 mm, area: 50 mm², mean_turn: 45 mm, window_area: 30 mm²";
        let coil = Coil::on("{initial_permeability: 2000}", core, turns);
        let words: Vec<&str> = coil
            .of_wire("{diameter: 0.2 mm, outer_diameter: 0.22 mm}")
            .wound()
            .remarks
            .iter()
            .map(|remark| remark.word)
            .collect();
        words
    };
    // Square cells of 0.22 mm: 620 turns fill 30 mm².
    assert_eq!(remarks(490), [""; 0]);
    assert_eq!(remarks(500), ["window-crowded"]);
    assert_eq!(remarks(625), ["window-overfilled"]);
}
