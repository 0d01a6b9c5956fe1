//! Guards: rings have the constants of IEC 60205, and gaps the published fringing.

use crate::coils::Coil;
use crate::record::{Bound, check};
use crate::table::{Row, rows};

const MU0: f64 = 4e-7 * std::f64::consts::PI;

#[test]
fn a_ring_has_the_effective_figures_of_iec_60205() {
    for row in rows(include_str!("../data/ring_cores.csv")) {
        let core = format!(
            "shape: toroid, outer_diameter: {} mm, inner_diameter: {} mm, height: {} mm",
            row.get("OD_mm"),
            row.get("ID_mm"),
            row.get("h_mm")
        );
        let material = format!("{{initial_permeability: {}}}", row.get("mur"));
        let turns = row.get("N") as usize;
        let wound = Coil::on(material, core, turns).wound();
        let (geometry, source) = (&wound.geometry, "IEC 60205 ring of rectangular section");
        check(
            "ring core",
            source,
            geometry.length * 1e3,
            row.get("le_mm"),
            Bound::Relative(1e-9),
        );
        check(
            "ring core",
            source,
            geometry.area * 1e6,
            row.get("Ae_mm2"),
            Bound::Relative(1e-9),
        );
        check(
            "ring core",
            source,
            geometry.volume * 1e9,
            row.get("Ve_mm3"),
            Bound::Relative(1e-9),
        );
        let c1 = geometry.length / geometry.area * 1e-3;
        check(
            "ring core",
            source,
            c1,
            row.get("C1_per_mm"),
            Bound::Relative(1e-9),
        );
        let section = "mu0 mu N² h ln(D/d)/2π, exact for a ring";
        let reached = wound.linkage.inductance_at_zero();
        check(
            "inductance of a ring",
            section,
            reached,
            row.get("L_exact_H"),
            Bound::Relative(1e-9),
        );
        assert_eq!(wound.linkage.current_at_70_percent(0.0), None);
    }
}

#[test]
fn a_gapped_ring_is_iron_and_gap_in_series() {
    let core =
        "shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 6 mm, gap: 0.5 mm";
    let ring = Coil::on(
        "{initial_permeability: 2000}",
        format!("{core}, fringing: none"),
        40,
    )
    .wound();
    // Figures of the table's first ring; the gap is cut out of the iron.
    let (length, area) = (43.55172181e-3, 28.82718084e-6);
    let expected = 1600.0 * MU0 * area / ((length - 0.5e-3) / 2000.0 + 0.5e-3);
    let reached = ring.linkage.inductance_at_zero();
    check(
        "inductance of a gapped ring",
        "reluctances in series",
        reached,
        expected,
        Bound::Relative(1e-9),
    );
    // Thin shells in parallel, each of iron and gap: what a field without fringing does, within the thickness of the ring.
    let shells = |radius: f64| ((std::f64::consts::TAU * radius - 0.5e-3) / 2000.0 + 0.5e-3).ln();
    let parallel =
        1600.0 * MU0 * 6e-3 * 2000.0 / std::f64::consts::TAU * (shells(10e-3) - shells(5e-3));
    check(
        "inductance of a gapped ring",
        "shells in parallel",
        reached,
        parallel,
        Bound::Relative(0.05),
    );
    let fringed = Coil::on("{initial_permeability: 2000}", core, 40).wound();
    let fringing = fringed
        .geometry
        .fringing
        .as_ref()
        .expect("a gapped ring fringes");
    assert_eq!(fringing.rule, "muehlethaler");
    assert!(fringing.factor > 1.2 && fringed.linkage.inductance_at_zero() > 1.2 * reached);
}

fn leg(row: &Row, rule: &str) -> Coil {
    let side = |name: &str| row.get(name);
    let (section, area) = match row.text("shape") {
        "round" => {
            let d = side("a_or_d_mm");
            (
                format!("leg_diameter: {d} mm"),
                std::f64::consts::FRAC_PI_4 * d * d,
            )
        }
        _ => {
            let (a, b) = (side("a_or_d_mm"), side("b_or_d_mm"));
            (format!("leg_width: {a} mm, leg_depth: {b} mm"), a * b)
        }
    };
    let core = format!(
        "shape: effective, length: {} mm, area: {area} mm², gap: {} mm, fringing: {rule}, {section}, window_height: {} mm, leg_height: {} mm",
        row.get("le_mm"),
        row.get("lg_mm"),
        row.get("G_mm"),
        row.get("h_leg_mm")
    );
    Coil::on(
        format!("{{initial_permeability: {}}}", row.get("mur")),
        core,
        row.get("N") as usize,
    )
}

#[test]
fn a_gapped_leg_follows_each_rule() {
    let rules = [
        ("none", "", "L_no_fringe_H", "reluctances in series"),
        (
            "mclyman",
            "F_log",
            "L_log_H",
            "McLyman's handbook (from memory)",
        ),
        (
            "area_increase",
            "F_area",
            "L_area_H",
            "classical area-increase rule",
        ),
        (
            "muehlethaler",
            "F_conf",
            "L_conf_H",
            "Muehlethaler, Kolar, Ecklebe 2011 (from memory)",
        ),
    ];
    for row in rows(include_str!("../data/gapped_legs.csv")) {
        for (rule, factor, inductance, source) in rules {
            let wound = leg(&row, rule).wound();
            let reached = wound.linkage.inductance_at_zero();
            check(
                "gapped leg",
                source,
                reached,
                row.get(inductance),
                Bound::Relative(1e-8),
            );
            let fringing = wound.geometry.fringing.as_ref().expect("there is a gap");
            if !factor.is_empty() {
                check(
                    "fringing factor",
                    source,
                    fringing.factor,
                    row.get(factor),
                    Bound::Relative(1e-8),
                );
            }
        }
    }
}

#[test]
fn the_rule_of_drawn_shapes_is_near_the_field_solution() {
    // Round legs in one window each; no rule knows the window, so a tenth is all that can be had.
    let mut legs = 0;
    for row in rows(include_str!("../data/gapped_legs.csv")) {
        let Some(field) = row.number("F_numeric") else {
            continue;
        };
        let factor = leg(&row, "muehlethaler")
            .wound()
            .geometry
            .fringing
            .expect("there is a gap")
            .factor;
        let source = "own axisymmetric field solution of a round leg";
        check(
            "fringing of a round leg",
            source,
            factor,
            field,
            Bound::Relative(0.1),
        );
        legs += 1;
    }
    assert_eq!(legs, 4);
}

#[test]
fn a_ring_of_wire_has_its_length_and_fills_its_hole() {
    let core = "shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm";
    let wire = "{diameter: 0.5 mm, outer_diameter: 0.55 mm}";
    let of = |turns: usize| {
        Coil::on("{initial_permeability: 2000}", core, turns)
            .of_wire(wire)
            .wound()
    };
    // One layer of round wire: the section's sides and a circle of the wire's own diameter.
    let one = of(40).geometry.mean_turn.expect("a ring has one");
    let expected = 2.0 * (5e-3 + 5e-3) + std::f64::consts::PI * 0.55e-3;
    check(
        "mean turn of a ring",
        "geometry",
        one,
        expected,
        Bound::Relative(1e-12),
    );
    assert!(of(40).remarks.is_empty());
    assert!(of(80).geometry.mean_turn.expect("a ring has one") > one);
    assert_eq!(of(150).remarks[0].word, "window-crowded");
    assert_eq!(of(400).remarks[0].word, "window-overfilled");
}
