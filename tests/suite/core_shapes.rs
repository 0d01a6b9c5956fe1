//! Guards: shapes given by their drawing come out as the published schemes say, with gaps wherever they are cut.

use crate::coils::Coil;
use crate::record::{Bound, check};
use crate::table::{Row, rows};
use coilbreak::magnetics::{Geometry, Wound};
use std::f64::consts::PI;

const MU0: f64 = 4e-7 * PI;
const FERRITE: &str = "{initial_permeability: 2000}";

/// An e_pair of the table, with more keys.
fn e_pair(row: &Row, more: &str) -> Wound {
    let mm = |name: &str| format!("{} mm", row.get(name));
    let core = format!(
        "shape: e_pair, width: {}, height: {}, depth: {}, window_depth: {}, window_width: {}, leg_width: {}{more}",
        mm("A"),
        mm("B"),
        mm("C"),
        mm("D"),
        mm("E"),
        mm("F")
    );
    Coil::on(FERRITE, core, 50).wound()
}

fn pairs() -> Vec<Row> {
    rows(include_str!("../data/e_pairs.csv"))
}

fn shape(core: &str) -> Geometry {
    wound(core).geometry
}

fn wound(core: &str) -> Wound {
    Coil::on(FERRITE, core, 50).wound()
}

#[test]
fn pairs_of_e_cores_follow_the_five_sections() {
    let source = "IEC 60205, five sections (scheme from memory)";
    for row in pairs() {
        let geometry = e_pair(&row, "").geometry;
        let figures = [
            (geometry.length, row.get("le_mm") * 1e-3),
            (geometry.area, row.get("Ae_mm2") * 1e-6),
            (geometry.volume, row.get("Ve_mm3") * 1e-9),
            (geometry.minimum_area, row.get("Amin_mm2") * 1e-6),
        ];
        for (reached, expected) in figures {
            check(
                "pair of E cores",
                source,
                reached,
                expected,
                Bound::Relative(1e-9),
            );
        }
        let [c, d, e, f] = ["C", "D", "E", "F"].map(|name| row.get(name) * 1e-3);
        let window = geometry.window.expect("an e_pair has one");
        let around = 2.0 * (f + c) + PI * 0.5 * (e - f);
        check(
            "mean turn and window",
            "geometry",
            geometry.mean_turn.expect("an e_pair has one"),
            around,
            Bound::Relative(1e-12),
        );
        check(
            "mean turn and window",
            "geometry",
            window.area,
            d * (e - f),
            Bound::Relative(1e-12),
        );
    }
}

#[test]
fn a_round_centre_leg_has_its_own_section() {
    let geometry = shape(
        "shape: e_pair, width: 40 mm, height: 20 mm, depth: 12 mm, window_depth: 14 mm, window_width: 28 mm, \
         leg_diameter: 13 mm",
    );
    // The same five sections with a disc, whose half has its centre of area at 4 r/(3 π) from the middle.
    let (r, leg, outer, back) = (6.5e-3, PI * 42.25e-6, 144e-6, 144e-6);
    let rim = r * (1.0 - 4.0 / (3.0 * PI));
    let parts = [
        (28e-3, outer),
        (15e-3, back),
        (28e-3, leg),
        (PI / 4.0 * 12e-3, 144e-6),
        (PI / 4.0 * (2.0 * rim + 6e-3), 0.5 * (leg + back)),
    ];
    let c1: f64 = parts.iter().map(|(length, area)| length / area).sum();
    let c2: f64 = parts
        .iter()
        .map(|(length, area)| length / (area * area))
        .sum();
    let source = "IEC 60205, five sections (scheme from memory)";
    check(
        "E cores with a round leg",
        source,
        geometry.length,
        c1 * c1 / c2,
        Bound::Relative(1e-12),
    );
    check(
        "E cores with a round leg",
        source,
        geometry.area,
        c1 / c2,
        Bound::Relative(1e-12),
    );
    check(
        "E cores with a round leg",
        source,
        geometry.minimum_area,
        leg,
        Bound::Relative(1e-12),
    );
    let turn = geometry.mean_turn.expect("an e_pair has one");
    check(
        "mean turn and window",
        "geometry",
        turn,
        PI * 20.5e-3,
        Bound::Relative(1e-12),
    );
}

#[test]
fn a_ground_gap_fringes_by_the_rules_of_a_gapped_leg() {
    // The centre leg of the first rows of the gapped legs: 12 mm by 12 mm, 13 mm high on either side.
    let source = "Muehlethaler, Kolar, Ecklebe 2011 (from memory)";
    for row in rows(include_str!("../data/gapped_legs.csv")) {
        let round = row.text("shape") == "round";
        let (a, b) = (row.get("a_or_d_mm"), row.number("b_or_d_mm").unwrap_or(0.0));
        let leg = if round {
            format!("leg_diameter: {a} mm")
        } else {
            format!("leg_width: {a} mm")
        };
        let depth = if round { a } else { b };
        let core = format!(
            "shape: e_pair, width: 60 mm, height: 30 mm, depth: {depth} mm, window_depth: {} mm, \
             window_width: 40 mm, {leg}, gap: {} mm",
            row.get("h_leg_mm"),
            row.get("lg_mm")
        );
        let fringing = shape(&core).fringing.expect("there is a gap");
        assert_eq!(fringing.rule, "muehlethaler");
        check(
            "fringing factor",
            source,
            fringing.factor,
            row.get("F_conf"),
            Bound::Relative(1e-8),
        );
        let by = |rule: &str| {
            let core = format!("{core}, fringing: {rule}");
            shape(&core).fringing.expect("there is a gap").factor
        };
        if !round {
            let source = "classical area increase";
            check(
                "fringing factor",
                source,
                by("area_increase"),
                row.get("F_area"),
                Bound::Relative(1e-8),
            );
            let source = "McLyman, handbook (from memory)";
            check(
                "fringing factor",
                source,
                by("mclyman"),
                row.get("F_log"),
                Bound::Relative(1e-8),
            );
        }
    }
}

#[test]
fn ground_gaps_and_spacers_add_up_in_series() {
    let row = &pairs()[0];
    let source = "reluctances in series, closed form";
    let bare = e_pair(row, "").geometry;
    let (leg, outers) = (144e-6, 144e-6);
    let henry = |wound: &Wound| wound.linkage.inductance_at_zero() / 2500.0;
    let expected = |iron_cut: f64, air: f64| {
        1.0 / (bare.length / (MU0 * 2000.0 * bare.area) - iron_cut / (MU0 * 2000.0) + air / MU0)
    };
    // Without fringing: a gap counts at its own leg's section, and what is ground away is no iron.
    let ground = e_pair(row, ", gap: 0.4 mm, fringing: none");
    let one = 0.4e-3 / leg;
    check(
        "gapped pair",
        source,
        henry(&ground),
        expected(one, one),
        Bound::Relative(1e-12),
    );
    let alias = e_pair(row, ", centre_gap: 0.4 mm, fringing: none");
    assert_eq!(henry(&alias), henry(&ground));
    let spacer = e_pair(row, ", spacer: 0.1 mm, fringing: none");
    let all = 0.1e-3 / leg + 0.1e-3 / outers;
    check(
        "gapped pair",
        source,
        henry(&spacer),
        expected(0.0, all),
        Bound::Relative(1e-12),
    );
    assert_eq!(spacer.geometry.gaps.len(), 2);
    let both = e_pair(row, ", gap: 0.4 mm, spacer: 0.1 mm, fringing: none");
    check(
        "gapped pair",
        source,
        henry(&both),
        expected(one, one + all),
        Bound::Relative(1e-12),
    );
    let three = e_pair(row, ", gap: [0.1 mm, 0.1 mm, 0.2 mm], fringing: none");
    check(
        "gapped pair",
        source,
        henry(&three),
        henry(&ground),
        Bound::Relative(1e-12),
    );
}

#[test]
fn several_gaps_fringe_less_than_one_of_their_length() {
    let row = &pairs()[0];
    let one = e_pair(row, ", gap: 1.2 mm").geometry;
    let three = e_pair(row, ", gap: [0.4 mm, 0.4 mm, 0.4 mm]").geometry;
    let of = |geometry: &Geometry| geometry.fringing.clone().expect("there are gaps").factor;
    assert!(of(&three) < of(&one));
    // Each of the three has a third of the leg: the same as one gap in a window a third as deep.
    let third = shape(
        "shape: e_pair, width: 40 mm, height: 20 mm, depth: 12 mm, window_depth: 4.6666666666666667 mm, \
         window_width: 28 mm, leg_width: 12 mm, gap: 0.4 mm",
    );
    check(
        "several gaps",
        "a third of the leg for each of three",
        of(&three),
        of(&third),
        Bound::Relative(1e-12),
    );
}

#[test]
fn an_inductance_factor_finds_its_gap() {
    let source = "the gap put back by hand";
    for row in &pairs() {
        for gap in [0.05, 0.2, 0.7] {
            let gapped = e_pair(row, &format!(", gap: {gap} mm"));
            let factor = gapped.linkage.inductance_at_zero() / 2500.0;
            let found = e_pair(row, &format!(", inductance_factor: {} H", factor));
            let length = found.geometry.gaps[0].length;
            check(
                "gap of an inductance factor",
                source,
                length,
                gap * 1e-3,
                Bound::Relative(1e-9),
            );
            let reached = found.linkage.inductance_at_zero() / 2500.0;
            check(
                "inductance of an inductance factor",
                "as written",
                reached,
                factor,
                Bound::Relative(1e-12),
            );
        }
    }
    let ring = "shape: toroid, outer_diameter: 20 mm, inner_diameter: 10 mm, height: 5 mm, inductance_factor: 120 nH";
    let effective = "shape: effective, length: 60 mm, area: 50 mm², inductance_factor: 120 nH";
    let pot = "shape: pot, diameter: 22 mm, height: 7 mm, window_depth: 5 mm, window_diameter: 18 mm, \
               leg_diameter: 9 mm, inductance_factor: 120 nH";
    let frame = "shape: u_pair, width: 30 mm, height: 20 mm, depth: 10 mm, window_depth: 12 mm, window_width: 12 mm, \
                 inductance_factor: 120 nH";
    for core in [ring, effective, pot, frame] {
        let reached = wound(core).linkage.inductance_at_zero() / 2500.0;
        check(
            "inductance of an inductance factor",
            "as written",
            reached,
            120e-9,
            Bound::Relative(1e-12),
        );
    }
}

#[test]
fn u_cores_of_one_section_have_its_length() {
    // Legs and backs 9 mm wide: 4 window depths, 2 window widths, and four quarter circles of 9 mm across both halves.
    let core = "shape: u_pair, width: 30 mm, height: 21 mm, depth: 10 mm, window_depth: 12 mm, window_width: 12 mm";
    let geometry = shape(core);
    let length = 48e-3 + 24e-3 + PI * 9e-3;
    let source = "IEC 60205, sections in series (scheme from memory)";
    check(
        "pair of U cores",
        source,
        geometry.length,
        length,
        Bound::Relative(1e-12),
    );
    check(
        "pair of U cores",
        source,
        geometry.area,
        90e-6,
        Bound::Relative(1e-12),
    );
    // A spacer opens both legs, in series.
    let spacer = wound(&format!("{core}, spacer: 0.2 mm, fringing: none"));
    let expected = 2500.0 * MU0 * 90e-6 / (length / 2000.0 + 0.4e-3);
    let reached = spacer.linkage.inductance_at_zero();
    check(
        "pair of U cores",
        "reluctances in series, closed form",
        reached,
        expected,
        Bound::Relative(1e-12),
    );
}

#[test]
fn pot_cores_come_near_the_standard_one() {
    // IEC 60133, the 22 mm size (from memory): middle of the drawing's tolerances, two slots of 3.8 mm, hole 4.55 mm.
    let geometry = shape(
        "shape: pot, diameter: 21.6 mm, height: 6.7 mm, window_depth: 4.7 mm, window_diameter: 18.3 mm, \
         leg_diameter: 9.25 mm, hole_diameter: 4.55 mm, slot_width: 3.8 mm",
    );
    let source =
        "IEC 60133, 22 mm size: length 31.5 mm, area 63.4 mm², smallest 51.3 mm² (from memory)";
    check(
        "pot core",
        source,
        geometry.length,
        31.5e-3,
        Bound::Relative(0.03),
    );
    check(
        "pot core",
        source,
        geometry.area,
        63.4e-6,
        Bound::Relative(0.05),
    );
    check(
        "pot core",
        source,
        geometry.minimum_area,
        51.3e-6,
        Bound::Relative(0.03),
    );
    let constant = geometry.length / geometry.area;
    check("pot core", source, constant, 0.497e3, Bound::Relative(0.05));
    let turn = geometry.mean_turn.expect("a pot has one");
    check(
        "mean turn and window",
        "geometry",
        turn,
        PI * 13.775e-3,
        Bound::Relative(1e-12),
    );
}

#[test]
fn a_pot_core_is_the_sum_of_its_sections() {
    let geometry = shape(
        "shape: pot, diameter: 30 mm, height: 10 mm, window_depth: 7 mm, window_diameter: 25 mm, leg_diameter: 12 mm",
    );
    let (r2, r3, r4, h, back) = (6e-3f64, 12.5e-3f64, 15e-3f64, 14e-3, 3e-3);
    let (ring, post) = (PI * (r4 * r4 - r3 * r3), PI * r2 * r2);
    let s1 = r2 - r2 / 2f64.sqrt();
    let s2 = ((r3 * r3 + r4 * r4) / 2.0).sqrt() - r3;
    let a4 = 0.5 * PI * (r4 * r4 - r3 * r3 + 2.0 * r3 * back);
    let a5 = 0.5 * PI * (r2 * r2 + 2.0 * r2 * back);
    let l4 = 0.25 * PI * (2.0 * s2 + back);
    let l5 = 0.25 * PI * (2.0 * s1 + back);
    let c1 = h / ring + (r3 / r2).ln() / (PI * back) + h / post + l4 / a4 + l5 / a5;
    let c2 = h / (ring * ring)
        + (r3 - r2) / (2.0 * (PI * back).powi(2) * r2 * r3)
        + h / (post * post)
        + l4 / (a4 * a4)
        + l5 / (a5 * a5);
    let source = "IEC 60205, pot cores (formulas from memory)";
    check(
        "pot core by its formulas",
        source,
        geometry.length,
        c1 * c1 / c2,
        Bound::Relative(1e-12),
    );
    check(
        "pot core by its formulas",
        source,
        geometry.area,
        c1 / c2,
        Bound::Relative(1e-12),
    );
    check(
        "pot core by its formulas",
        source,
        geometry.volume,
        c1.powi(3) / (c2 * c2),
        Bound::Relative(1e-12),
    );
}

const YOKE: &str = "shape: yoke, core_diameter: 8 mm, core_length: 25 mm, pole_diameter: 11 mm, frame_width: 16 mm, \
                    frame_thickness: 2 mm, frame_distance: 12 mm, armature_thickness: 2 mm, gap: 0.6 mm, \
                    residual_gap: 0.05 mm, hinge_gap: 0.1 mm";

#[test]
fn a_relays_magnet_is_its_iron_its_gaps_and_its_leakage() {
    let magnet = Coil::on("{initial_permeability: 1000000000}", YOKE, 1000).wound();
    let moving = magnet.geometry.moving.clone().expect("a yoke has one");
    // A bar before a plane, as the capacitance of a wire above the ground: 2 π ε/arcosh(h/r); a third counts.
    let leakage = 2.0 * PI * MU0 / (12.0f64 / 4.0).acosh() * 25e-3 / 3.0;
    let source =
        "bar along a plane by images, a third of it for the linkage (Roters 1941, from memory)";
    check(
        "leakage of a relay's frame",
        source,
        moving.leakage,
        leakage,
        Bound::Relative(1e-12),
    );
    // A pole before a plate is half of two poles twice as far apart.
    let (pole, gap) = (PI / 4.0 * 121e-6, 0.65e-3);
    let fringe = 2.0 / PI * (1.0 + (PI * 25e-3 / (4.0 * gap)).ln());
    let factor = (1.0 + fringe * 2.0 * gap / 11e-3).powi(2);
    let before = MU0 * pole * factor / gap;
    let hinge = 0.1e-3 / (MU0 * 32e-6);
    let reluctance = hinge + 1.0 / (before + leakage);
    let source = "gaps and leakage as reluctances, closed form";
    check(
        "magnet of a relay",
        source,
        moving.reluctance(0.6e-3).0,
        reluctance,
        Bound::Relative(1e-12),
    );
    let reached = magnet.linkage.inductance_at_zero();
    check(
        "magnet of a relay",
        source,
        reached,
        1e6 / reluctance,
        Bound::Relative(1e-6),
    );
    check(
        "magnet of a relay",
        source,
        moving.area,
        pole,
        Bound::Relative(1e-12),
    );
    assert_eq!((moving.residual, moving.gap), (0.05e-3, 0.6e-3));
    let told = Coil::on(FERRITE, format!("{YOKE}, leakage: 20 nH"), 1000).wound();
    assert_eq!(told.geometry.moving.expect("a yoke has one").leakage, 20e-9);
}

#[test]
fn a_relays_iron_is_the_sum_of_its_sections() {
    let geometry = shape(YOKE);
    let (core, strip) = (PI / 4.0 * 64e-6, 32e-6);
    let rim = 4e-3 * (1.0 - 4.0 / (3.0 * PI));
    let quarter = |one: f64, other: f64| PI / 4.0 * (one + other);
    let parts = [
        (25e-3, core),
        (2.0 * quarter(rim, 1e-3), 0.5 * (core + strip)),
        (2.0 * 8e-3, strip),
        (2.0 * quarter(1e-3, 1e-3), strip),
        (25e-3, strip),
    ];
    let c1: f64 = parts.iter().map(|(length, area)| length / area).sum();
    let c2: f64 = parts
        .iter()
        .map(|(length, area)| length / (area * area))
        .sum();
    let source = "IEC 60205, sections in series (scheme from memory)";
    check(
        "magnet of a relay",
        source,
        geometry.length,
        c1 * c1 / c2,
        Bound::Relative(1e-12),
    );
    check(
        "magnet of a relay",
        source,
        geometry.area,
        c1 / c2,
        Bound::Relative(1e-12),
    );
    assert_eq!(geometry.minimum_area, strip);
}

#[test]
fn gaps_beyond_the_rules_raise_a_caution() {
    let row = &pairs()[0];
    let cautioned = |more: &str| {
        let remarks = e_pair(row, more).remarks;
        remarks.iter().any(|remark| remark.word == "fringing-range")
    };
    assert!(!cautioned(", gap: 1 mm") && !cautioned(", spacer: 1 mm"));
    // More than a quarter of the outer legs' 6 mm, of the centre leg's 12 mm.
    assert!(cautioned(", spacer: 2 mm") && cautioned(", gap: 4 mm"));
    // Beyond the leg's height the rule means nothing.
    let beyond = e_pair(row, ", gap: 20 mm");
    assert!(beyond.remarks[0].text.contains("counted as none"));
    assert_eq!(
        beyond.geometry.fringing.expect("there is a gap").factor,
        1.0
    );
}
