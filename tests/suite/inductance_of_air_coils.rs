//! Guards: coils in air have the inductance that tables, exact formulas and independent quadrature give.

use crate::coils::Coil;
use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::magnetics::air::{loops, sheet};

const MU0: f64 = 4e-7 * std::f64::consts::PI;

fn sheet_of(diameter_mm: f64, length_mm: f64, turns: usize) -> f64 {
    let core = format!("shape: solenoid, mean_diameter: {diameter_mm} mm, length: {length_mm} mm");
    Coil::in_air(core, turns)
        .wound()
        .linkage
        .inductance_at_zero()
}

#[test]
fn the_end_correction_is_that_of_1909() {
    for row in rows(include_str!("../data/nagaoka.csv")) {
        let ratio = row.get("D_over_l");
        if ratio == 0.0 {
            continue; // the limit of an endless coil
        }
        let reached = sheet_of(20.0, 20.0 / ratio, 1) * (20.0 / ratio * 1e-3)
            / (MU0 * 1e-4 * std::f64::consts::PI);
        let exact = "H. Nagaoka 1909, formula with 34-digit elliptic integrals";
        check(
            "end correction of a solenoid",
            exact,
            reached,
            row.get("K_exact"),
            Bound::Relative(1e-10),
        );
        // The old table, quoted second-hand, has misprints beyond D/l = 4: up to 8.5e-6.
        let published = "H. Nagaoka 1909, six-figure table (second-hand)";
        if let Some(table) = row.number("K_published") {
            check(
                "end correction of a solenoid",
                published,
                reached,
                table,
                Bound::Absolute(1e-5),
            );
        }
    }
}

#[test]
fn the_current_sheet_is_the_mutual_inductance_integral() {
    let source = "Neumann's integral by 34-digit quadrature (stored)";
    for row in rows(include_str!("../data/current_sheet_quadrature.csv")) {
        let ratio = row.get("D_over_l");
        let reached = sheet::permeance(0.02, 0.02 / ratio);
        check(
            "current sheet",
            source,
            reached,
            row.get("L_per_turn2_H"),
            Bound::Relative(1e-13),
        );
        let reached = sheet_of(20.0, 20.0 / ratio, 100) / 1e4;
        check(
            "current sheet from a netlist",
            source,
            reached,
            row.get("L_per_turn2_H"),
            Bound::Relative(1e-9),
        );
    }
}

#[test]
fn one_layer_is_a_sheet_or_a_sum_of_circles() {
    for row in rows(include_str!("../data/solenoid_coils.csv")) {
        let (diameter, pitch) = (row.get("D_mm"), row.get("pitch_mm"));
        let turns = row.get("N") as usize;
        let reached = sheet_of(diameter, row.get("length_mm"), turns);
        check(
            "one-layer coil",
            "Lorenz 1879 current sheet",
            reached,
            row.get("L_sheet_H"),
            Bound::Relative(1e-8),
        );
        let core = format!(
            "shape: solenoid, mean_diameter: {diameter} mm, layers: 1, axial_pitch: {pitch} mm"
        );
        let wire = format!(
            "{{diameter: {} mm, outer_diameter: {0} mm}}",
            row.get("wire_d_mm")
        );
        let reached = Coil::in_air(core, turns)
            .of_wire(wire)
            .wound()
            .linkage
            .inductance_at_zero();
        let source = "sum of circles: Maxwell art. 701, Rosa and Grover 1912";
        check(
            "one-layer coil",
            source,
            reached,
            row.get("L_loops_H"),
            Bound::Relative(1e-8),
        );
        // Rosa's correction for round wire comes from sheets, not from circles; and the rule of thumb of 1928.
        let source = "Rosa 1906, round wire";
        check(
            "one-layer coil",
            source,
            reached,
            row.get("L_round_H"),
            Bound::Relative(1.2e-3),
        );
        let source = "Wheeler 1928, rule of thumb for coils longer than 0.4 diameters";
        if row.get("length_mm") > 0.4 * diameter {
            let sheet = row.get("L_sheet_H");
            check(
                "one-layer coil",
                source,
                sheet,
                row.get("L_wheeler1928_H"),
                Bound::Relative(1e-2),
            );
        }
    }
}

#[test]
fn a_thick_coil_is_the_integral_over_its_section() {
    let thick = |inner: f64, outer: f64, length: f64, turns: usize| {
        let core = format!(
            "shape: solenoid, inner_diameter: {} mm, outer_diameter: {} mm, length: {length} mm",
            2.0 * inner,
            2.0 * outer
        );
        Coil::in_air(core, turns)
            .wound()
            .linkage
            .inductance_at_zero()
    };
    for row in rows(include_str!("../data/thick_coils.csv")) {
        let (mean, depth) = (row.get("a_mm"), row.get("c_radial_mm"));
        let (inner, outer) = (mean - depth / 2.0, mean + depth / 2.0);
        let reached = thick(inner, outer, row.get("b_axial_mm"), row.get("N") as usize);
        let source = "uniform current over the section, two quadratures";
        check(
            "thick coil",
            source,
            reached,
            row.get("L_exact_H"),
            Bound::Relative(1e-8),
        );
        if depth == row.get("b_axial_mm") && mean == 1.5 * depth {
            let brooks = 1.6994e-6 * mean * 1e-3 * row.get("N").powi(2);
            let source = "H. B. Brooks 1931, best coil (constant from memory)";
            check("thick coil", source, reached, brooks, Bound::Relative(1e-4));
        }
    }
    for row in rows(include_str!("../data/thick_coils_bessel.csv")) {
        let reached = thick(
            row.get("inner_mm"),
            row.get("outer_mm"),
            row.get("length_mm"),
            1,
        );
        let source = "Bessel integral over wave numbers (stored)";
        check(
            "thick coil",
            source,
            reached,
            row.get("L_H"),
            Bound::Relative(1e-10),
        );
    }
}

#[test]
fn a_layered_coil_is_the_sum_over_its_turns() {
    for row in rows(include_str!("../data/layered_coils.csv")) {
        let (axial, radial) = (row.get("pitch_axial_mm"), row.get("pitch_radial_mm"));
        let layers = row.get("layers");
        let inner = 2.0 * row.get("a_mm") - layers * radial;
        let core = format!(
            "shape: solenoid, inner_diameter: {inner} mm, layers: {layers}, axial_pitch: {axial} mm, radial_pitch: {radial} mm"
        );
        let wire = format!(
            "{{diameter: {} mm, outer_diameter: {0} mm}}",
            row.get("bare_d_mm")
        );
        let turns = row.get("N") as usize;
        let wound = Coil::in_air(core, turns).of_wire(wire).wound();
        let reached = wound.linkage.inductance_at_zero();
        let source = "sum of circles: Maxwell art. 701, Rosa and Grover 1912";
        check(
            "layered coil",
            source,
            reached,
            row.get("L_loops_H"),
            Bound::Relative(1e-8),
        );
        if let Some(corrected) = row.number("L_corrected_H") {
            let source =
                "section with Rosa's insulation-space correction, 1912 eq. 93 (from memory)";
            check(
                "layered coil",
                source,
                reached,
                corrected,
                Bound::Relative(4e-4),
            );
        }
        let circle = std::f64::consts::TAU * row.get("a_mm") * 1e-3;
        let mean_turn = wound.geometry.mean_turn.expect("a solenoid has one");
        check(
            "mean turn of a layered coil",
            "geometry",
            mean_turn,
            circle,
            Bound::Relative(1e-12),
        );
    }
}

#[test]
fn turns_touch_where_no_pitch_is_told() {
    // 30 turns in each of 6 layers of wire of 0.5 mm over its insulation: the first row of the layered coils.
    let core = "shape: solenoid, inner_diameter: 21 mm, layers: 6";
    let touching = Coil::in_air(core, 180)
        .of_wire("{diameter: 0.45 mm, outer_diameter: 0.5 mm}")
        .wound();
    let source = "sum of circles: Maxwell art. 701, Rosa and Grover 1912";
    let reached = touching.linkage.inductance_at_zero();
    check(
        "layered coil, touching turns",
        source,
        reached,
        0.0006235315468,
        Bound::Relative(1e-8),
    );
    assert!(touching.remarks.is_empty(), "{:?}", touching.remarks);
}

#[test]
fn coaxial_circles_follow_maxwell() {
    for row in rows(include_str!("../data/coaxial_loops.csv")) {
        let mm = |name: &str| row.get(name) * 1e-3;
        let (one, other, distance) = (mm("A_mm"), mm("a_mm"), mm("d_mm"));
        let source = "Maxwell art. 701 at 34 digits";
        let reached = loops::mutual(one, other, distance);
        check(
            "coaxial circles",
            source,
            reached,
            row.get("M_H"),
            Bound::Relative(1e-10),
        );
        let slope = loops::mutual_slope(one, other, distance);
        let bound = if distance > 0.0 {
            Bound::Relative(1e-10)
        } else {
            Bound::Absolute(0.0)
        };
        check(
            "pull of coaxial circles",
            source,
            slope,
            row.get("dM_dd_H_per_m"),
            bound,
        );
    }
}
