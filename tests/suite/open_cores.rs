//! Guards: rods and slugs magnetize as field solutions and published demagnetizing factors say, and saturate soundly.

use crate::coils::Coil;
use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::magnetics::air::sheet::{end_correction, permeance};
use coilbreak::magnetics::open_core::Cylinder;
use std::f64::consts::PI;

const MU0: f64 = 4e-7 * PI;

#[test]
fn demagnetizing_factors_are_those_of_the_field() {
    let source = "own field solution by surface charges (open_cores.py)";
    let mut factors = 0;
    for row in rows(include_str!("../data/open_cores.csv")) {
        let Some(magnetometric) = row.number("N_m") else {
            continue;
        };
        let rod = Cylinder {
            diameter: 0.01,
            length: 0.01 * row.get("g"),
        };
        let chi = row.get("chi");
        let found = rod.in_a_field(chi).expect("it is solvable");
        let bound = Bound::Relative(0.04);
        check(
            "demagnetizing factor of a cylinder",
            source,
            found.demagnetizing,
            magnetometric,
            bound,
        );
        // Its middle is magnetized by the fluxmetric factor: M = H/(1/χ + N).
        let middle = found.crowding / (1.0 / chi + found.demagnetizing);
        let fluxmetric = 1.0 / middle - 1.0 / chi;
        check(
            "demagnetizing factor of a cylinder",
            source,
            fluxmetric,
            row.get("N_f"),
            bound,
        );
        factors += 1;
    }
    assert_eq!(factors, 12);
}

#[test]
fn a_weak_core_has_the_factor_of_its_current_sheet() {
    for slender in [1.0, 3.0, 10.0, 40.0, 100.0] {
        let rod = Cylinder {
            diameter: 0.01,
            length: 0.01 * slender,
        };
        let found = rod.in_a_field(1e-2).expect("it is solvable").demagnetizing;
        let source = "1 - K of the current sheet: exact for even magnetization (Nagaoka 1909)";
        let exact = 1.0 - end_correction(1.0, slender);
        check(
            "demagnetizing factor of a weak cylinder",
            source,
            found,
            exact,
            Bound::Relative(0.01),
        );
    }
}

#[test]
fn fluxmetric_factors_of_iron_rods_are_near_the_measured_ones() {
    // R. M. Bozorth, Ferromagnetism, 1951: cylinders of high permeability (from memory); measured, so a sixth at most.
    for (slender, measured) in [
        (2.0, 0.14),
        (5.0, 0.040),
        (10.0, 0.0172),
        (20.0, 0.00617),
        (50.0, 0.00129),
    ] {
        let rod = Cylinder {
            diameter: 0.01,
            length: 0.01 * slender,
        };
        let found = rod.in_a_field(1e5).expect("it is solvable");
        let fluxmetric = found.demagnetizing / found.crowding;
        let source = "measured on iron cylinders: Bozorth, Ferromagnetism, 1951 (from memory)";
        check(
            "fluxmetric factor of an iron rod",
            source,
            fluxmetric,
            measured,
            Bound::Relative(0.16),
        );
    }
}

#[test]
fn what_a_core_adds_to_a_coil_is_that_of_the_field() {
    let source = "own field solution by surface charges (open_cores.py)";
    let mut coils = 0;
    for row in rows(include_str!("../data/open_cores.csv")) {
        let Some(linkage) = row.number("linkage") else {
            continue;
        };
        // Diameters of 10 mm; one turn per diameter at 1 A in the table, one turn here.
        let (length, mean) = (10.0 * row.get("w"), 20.0 * row.get("b"));
        let material = format!("{{initial_permeability: {}}}", row.get("chi") + 1.0);
        let core = format!(
            "shape: solenoid, mean_diameter: {mean} mm, length: {length} mm, core_diameter: 10 mm, core_length: {} mm",
            10.0 * row.get("g")
        );
        let reached = Coil::on(&material, core, 1)
            .wound()
            .linkage
            .inductance_at_zero();
        let air = permeance(1e-3 * mean, 1e-3 * length);
        // A coil that covers less than half of its core magnetizes it most unevenly.
        let within = if row.get("w") < 0.5 * row.get("g") {
            0.09
        } else {
            0.06
        };
        let added = MU0 * 0.01 * linkage / row.get("w").powi(2);
        check(
            "core in a coil",
            source,
            reached - air,
            added,
            Bound::Relative(within),
        );
        check(
            "inductance with an open core",
            source,
            reached,
            air + added,
            Bound::Relative(within),
        );
        let rod = format!(
            "shape: rod, diameter: 10 mm, length: {} mm, winding_length: {length} mm, winding_diameter: {mean} mm",
            10.0 * row.get("g")
        );
        let same = Coil::on(material, rod, 1)
            .wound()
            .linkage
            .inductance_at_zero();
        check(
            "rod and slug",
            "one model",
            same,
            reached,
            Bound::Relative(1e-12),
        );
        coils += 1;
    }
    assert_eq!(coils, 45);
}

const IRON: &str = "{initial_permeability: 3000, saturation: 1.5 T}";
const SLUG: &str = "shape: solenoid, inner_diameter: 12 mm, outer_diameter: 24 mm, length: 30 mm, core_diameter: 10 mm, \
                    core_length: 40 mm";

#[test]
fn a_saturated_slug_leaves_the_coil_in_air_and_its_polarization() {
    let slug = Coil::on(IRON, SLUG, 1000).wound().linkage;
    let air = Coil::in_air(
        "shape: solenoid, inner_diameter: 12 mm, outer_diameter: 24 mm, length: 30 mm",
        1000,
    )
    .wound()
    .linkage;
    let source = "the coil alone: nothing is left of iron's permeability far out";
    let far = slug.linkage_at(1e6);
    check(
        "saturated slug",
        source,
        slug.inductance(far),
        air.inductance_at_zero(),
        Bound::Relative(1e-6),
    );
    // All of 1.5 T links by the coil's mean field in the slug: with an even field it would be turns times section.
    let left = far - 1e6 * air.inductance_at_zero();
    let most = 1000.0 * PI / 4.0 * 1e-4 * 1.5;
    assert!(left > 0.6 * most && left < most, "{left} of {most}");
    let at = |current: f64| slug.linkage_at(current);
    let mut last = 0.0;
    for step in 1..200 {
        let linkage = at(0.05 * f64::from(step));
        let (current, slope) = slug.current(linkage);
        check(
            "slug, current over linkage",
            "its own inverse",
            current,
            0.05 * f64::from(step),
            Bound::Relative(1e-10),
        );
        let h = 1e-5 * linkage;
        let difference = (slug.current(linkage + h).0 - slug.current(linkage - h).0) / (2.0 * h);
        check(
            "slug, inductance",
            "differences",
            slope,
            difference,
            Bound::Relative(1e-6),
        );
        assert!(linkage > last);
        last = linkage;
    }
    // A core of the first magnetization gives as much again as an open one can: far below its own permeability.
    let gain = slug.inductance_at_zero() / air.inductance_at_zero();
    assert!(gain > 3.0 && gain < 20.0, "{gain}");
    let knee = slug.current_at_70_percent(0.0).expect("it saturates");
    let left = slug.inductance(slug.linkage_at(knee)) / slug.inductance_at_zero();
    check(
        "slug, knee",
        "70 % of the inductance",
        left,
        0.7,
        Bound::Relative(1e-9),
    );
}

#[test]
fn slugs_outside_the_checked_range_raise_a_caution() {
    let cautioned = |core: &str| {
        let remarks = Coil::on(IRON, core, 100).wound().remarks;
        remarks
            .iter()
            .any(|remark| remark.word == "open-core-range")
    };
    assert!(!cautioned(SLUG));
    let coil = "shape: solenoid, mean_diameter: 12 mm, length: 30 mm";
    assert!(cautioned(&format!(
        "{coil}, core_diameter: 10 mm, core_length: 5 mm"
    )));
    assert!(cautioned(&format!(
        "{coil}, core_diameter: 1 mm, core_length: 200 mm"
    )));
    assert!(cautioned(
        "shape: rod, diameter: 10 mm, length: 100 mm, winding_length: 5 mm"
    ));
    assert!(!cautioned("shape: rod, diameter: 10 mm, length: 100 mm"));
}

#[test]
fn a_winding_on_a_rod_takes_its_layers() {
    let rod = "shape: rod, diameter: 8 mm, length: 50 mm, winding_length: 40 mm";
    let turn = |turns: usize| {
        let wound = Coil::on(IRON, rod, turns)
            .of_wire("{diameter: 0.45 mm, outer_diameter: 0.5 mm}")
            .wound();
        wound.geometry.mean_turn.expect("a rod has one")
    };
    // 80 turns lie side by side.
    check(
        "mean turn of a rod",
        "geometry",
        turn(80),
        PI * 8.5e-3,
        Bound::Relative(1e-12),
    );
    check(
        "mean turn of a rod",
        "geometry",
        turn(81),
        PI * 9e-3,
        Bound::Relative(1e-12),
    );
}

#[test]
fn the_field_enters_a_solid_slug_at_the_same_pace_under_any_coil() {
    // Sheet conductance times a shell's permeance per mu: the time that diffusion takes is the slug's own, radius²/8 of a
    // bar over resistivity in all (Stoll, The Analysis of Eddy Currents, 1974: Σ over modes, from memory).
    let material = "{initial_permeability: 3000, saturation: 1.5 T, resistivity: 0.12 µΩ m}";
    let pace = |coil: &str| {
        let core = format!(
            "shape: solenoid, {coil}, core_diameter: 10 mm, core_length: 40 mm, eddy_currents: solid"
        );
        let wound = Coil::on(material, core, 100).wound();
        let shells = wound.shells.expect("its iron conducts");
        let iron = wound.geometry.iron;
        let within = |k: usize| shells.areas[k + 1..].iter().sum::<f64>();
        let whole: f64 = shells.areas.iter().sum();
        // The mean delay of the flux per permeability: Σ G (share within)² · section/length.
        let delay = |k: usize| shells.sheets[k] * (within(k) / whole).powi(2) * whole / iron;
        (0..shells.sheets.len()).map(delay).sum::<f64>()
    };
    let source = "radius²/(8 resistivity) of a round bar, from 2 I1(z)/(z I0(z)) at low frequency";
    let exact = 5e-3f64.powi(2) / (8.0 * 0.12e-6);
    for coil in [
        "mean_diameter: 10.5 mm, length: 40 mm",
        "mean_diameter: 16 mm, length: 30 mm",
        "inner_diameter: 12 mm, outer_diameter: 40 mm, length: 40 mm",
    ] {
        check(
            "eddy currents of a slug",
            source,
            pace(coil),
            exact,
            Bound::Relative(0.01),
        );
    }
}
