//! Guards: windings lose over frequency what Bessel's functions and Dowell's layers say, and their ladders too.

use crate::record::{Bound, check};
use crate::table::rows;
use coilbreak::magnetics::MU0;
use coilbreak::magnetics::losses::impedance::{Layers, skin_depth};
use coilbreak::magnetics::losses::{Impedance, Ladder};
use coilbreak::magnetics::wire::{COPPER, copper_ratio};
use std::f64::consts::PI;

/// Frequency [Hz] at which the skin depth [m] in copper at 20 °C is this.
fn frequency_of(depth: f64) -> f64 {
    COPPER / (PI * MU0 * depth * depth)
}

#[test]
fn an_isolated_round_wire_has_the_impedance_of_bessels_functions() {
    let diameter = 0.5e-3;
    for row in rows(include_str!("../data/skin_round.csv")) {
        let x = row.get("radius_over_delta");
        let frequency = frequency_of(0.5 * diameter / x);
        let reached = Impedance::isolated(diameter, COPPER).at(frequency);
        let subject = "skin effect of round wire";
        let source = "Kelvin 1889, Bessel functions computed";
        check(
            subject,
            source,
            reached.re,
            row.get("Rac_over_Rdc"),
            Bound::Relative(1e-10),
        );
        // Im Z/R = (x²/4) L/L_dc: at direct current the inside holds µ0/8π per metre.
        check(
            subject,
            source,
            reached.im / (0.25 * x * x),
            row.get("Lint_over_Lint_dc"),
            Bound::Relative(1e-10),
        );
    }
}

/// Resistance ratio of layers of sheet whose thickness is `ratio` skin depths.
fn sheets(ratio: f64, layers: f64) -> f64 {
    let thickness = 0.3e-3;
    let impedance = Impedance::sheets(thickness, 1.0, layers, COPPER);
    impedance.at(frequency_of(thickness / ratio)).re
}

#[test]
fn layers_of_sheet_have_dowells_resistance() {
    for row in rows(include_str!("../data/dowell.csv")) {
        let ratio = row.get("thickness_over_delta");
        for layers in 1..=6 {
            check(
                "layers of sheet",
                "Dowell 1966",
                sheets(ratio, f64::from(layers)),
                row.get(&format!("F_{layers}_layers")),
                Bound::Relative(1e-10),
            );
        }
    }
}

#[test]
fn the_best_sheet_is_as_thick_as_published() {
    for row in rows(include_str!("../data/foil_optimum.csv")) {
        let layers = row.get("layers_p");
        // Resistance at one frequency and one breadth: the ratio over the thickness, at its least (golden section).
        let resistance = |ratio: f64| sheets(ratio, layers) / ratio;
        let (mut low, mut high) = (0.1, 3.0);
        let golden = 0.5 * (5f64.sqrt() - 1.0);
        while high - low > 1e-9 {
            let (a, b) = (high - golden * (high - low), low + golden * (high - low));
            if resistance(a) < resistance(b) {
                high = b;
            } else {
                low = a;
            }
        }
        let (subject, source) = ("best sheet", "Hurley, Gath and Breslin 2000 on Dowell 1966");
        let best = row.get("D_opt_exact");
        check(subject, source, low, best, Bound::Relative(1e-6));
        check(
            subject,
            source,
            sheets(best, layers),
            row.get("F_at_opt"),
            Bound::Relative(1e-6),
        );
    }
}

/// The conductors of a row of the table of round wires, its resistivity [Ω m] and frequency [Hz].
fn row_of_wires(row: &crate::table::Row) -> (f64, Layers, f64, f64) {
    let layers = Layers {
        count: row.get("layers"),
        pitch: row.get("pitch_mm") * 1e-3,
    };
    // The table's copper: 1/58 at 20 °C, 0.00393 per kelvin, another line than 234.5.
    let resistivity = COPPER * (1.0 + 0.00393 * (row.get("T_C") - 20.0));
    (row.get("d_mm") * 1e-3, layers, resistivity, row.get("f_Hz"))
}

#[test]
fn layers_of_round_wire_have_the_resistance_of_dowells_foil() {
    for row in rows(include_str!("../data/round_wire_layers.csv")) {
        let (diameter, layers, resistivity, frequency) = row_of_wires(&row);
        let impedance = Impedance::equivalent_foil(diameter, layers, resistivity);
        let (subject, source) = ("layers of round wire", "Dowell 1966, equivalent foil");
        check(
            subject,
            source,
            impedance.at(frequency).re,
            row.get("F"),
            Bound::Relative(1e-8),
        );
        check(
            subject,
            source,
            skin_depth(frequency, resistivity) * 1e3,
            row.get("delta_mm"),
            Bound::Relative(1e-8),
        );
    }
}

/// The derivative of a function by central differences of the fourth order.
fn slope(f: impl Fn(f64) -> f64, at: f64) -> f64 {
    let h = 1e-3 * at;
    (8.0 * (f(at + h) - f(at - h)) - (f(at + 2.0 * h) - f(at - 2.0 * h))) / (12.0 * h)
}

/// ber and bei of order 0 or 2, DLMF 10.65.1 and 10.65.3 (power series).
fn kelvin(order: u32, x: f64) -> (f64, f64) {
    let (mut re, mut im) = (0.0, 0.0);
    let mut term = (0.5 * x).powi(order as i32) / (1..=order).map(f64::from).product::<f64>();
    for k in 0..80u32 {
        // (x/2)^(order + 2k)/(k! (order + k)!) exp(j (3/4 order + k/2) π)
        let angle = PI * (0.75 * f64::from(order) + 0.5 * f64::from(k));
        re += term * angle.cos();
        im += term * angle.sin();
        term *= 0.25 * x * x / (f64::from(k + 1) * f64::from(order + k + 1));
    }
    (re, im)
}

#[test]
fn layers_of_round_wire_have_ferreiras_resistance() {
    // γ/2 [(ber bei' - bei ber')/(ber'² + bei'²) - 2π η² (4(m² - 1)/3 + 1) (ber2 ber' + bei2 bei')/(ber² + bei²)], γ =
    // d/(√2 δ), η = (d/pitch) √π/2 (from memory).
    let source = "Ferreira 1994, Kelvin functions";
    let (diameter, resistivity) = (0.4e-3, COPPER);
    for x in [0.2, 0.6, 1.0, 1.7, 2.5, 4.0, 6.0] {
        let frequency = frequency_of(0.5 * diameter / x);
        let gamma = 2f64.sqrt() * x;
        let ((ber, bei), (ber2, bei2)) = (kelvin(0, gamma), kelvin(2, gamma));
        let (dber, dbei) = (
            slope(|x| kelvin(0, x).0, gamma),
            slope(|x| kelvin(0, x).1, gamma),
        );
        for (count, pitch) in [(1.0, 0.45e-3), (3.0, 0.45e-3), (8.0, 0.9e-3)] {
            let fill = diameter / pitch * 0.5 * PI.sqrt();
            let own = (ber * dbei - bei * dber) / (dber * dber + dbei * dbei);
            let across = -2.0
                * PI
                * fill
                * fill
                * (4.0 * (count * count - 1.0) / 3.0 + 1.0)
                * (ber2 * dber + bei2 * dbei)
                / (ber * ber + bei * bei);
            let expected = 0.5 * gamma * (own + across);
            let layers = Layers { count, pitch };
            let reached = Impedance::rounds(diameter, layers, resistivity)
                .at(frequency)
                .re;
            check(
                "layers of round wire",
                source,
                reached,
                expected,
                Bound::Relative(1e-8),
            );
        }
    }
}

#[test]
fn a_bundle_of_one_layer_far_apart_loses_as_its_own_field_says() {
    // At low frequency a strand across a field H loses π r⁴ (ω µ0 H)²/(4 ρ) per metre (H peak, half of it in the mean; any text
    // on eddy currents; from memory); the bundle's own field has the mean square I²/(8 π² R²).
    let (strand, strands, bundle) = (0.1e-3, 60.0, 1e-3);
    let layers = Layers {
        count: 1.0,
        pitch: 1.0,
    };
    let impedance = Impedance::strands(strand, strands, bundle, layers, COPPER);
    let frequency = 1e3;
    let omega = 2.0 * PI * frequency;
    let r: f64 = 0.5 * strand;
    let square = 1.0 / (8.0 * PI * PI * (0.5 * bundle).powi(2));
    let lost = strands * PI * r.powi(4) * (omega * MU0).powi(2) * square / (4.0 * COPPER);
    let resistance = COPPER / (strands * PI * r * r);
    let own = Impedance::isolated(strand, COPPER).at(frequency).re;
    check(
        "bundle of strands",
        "eddy loss of a cylinder across a field",
        impedance.at(frequency).re - own,
        lost / resistance,
        Bound::Relative(1e-4),
    );
}

#[test]
fn hot_copper_has_the_skin_depth_of_its_resistance() {
    for row in rows(include_str!("../data/round_wire_layers.csv")) {
        let kelvin = row.get("T_C") + 273.15;
        let depth = skin_depth(row.get("f_Hz"), COPPER * copper_ratio(kelvin, 293.15));
        check(
            "skin depth of warm copper",
            "temperature coefficient 0.00393, another line than 234.5",
            depth * 1e3,
            row.get("delta_mm"),
            Bound::Relative(1e-4),
        );
    }
}

#[test]
fn ladders_follow_bessel_and_dowell_to_a_hundred_corners() {
    // The corner is the first pole: where the current begins to leave the middle.
    let foils = (1..=6).map(|m| Impedance::sheets(0.3e-3, 1.0, f64::from(m), COPPER));
    let wires = rows(include_str!("../data/round_wire_layers.csv"));
    let wires = wires.iter().flat_map(|row| {
        let (diameter, layers, resistivity, _) = row_of_wires(row);
        [
            Impedance::equivalent_foil(diameter, layers, resistivity),
            Impedance::rounds(diameter, layers, resistivity),
        ]
    });
    let alone = [Impedance::isolated(0.5e-3, COPPER)];
    for impedance in alone.into_iter().chain(foils).chain(wires) {
        let ladder = Ladder::of(impedance);
        for step in 0..=120 {
            let frequency = impedance.corner() * 10f64.powf(2.0 - 0.05 * f64::from(step));
            let (reached, exact) = (ladder.at(frequency), impedance.at(frequency));
            let source = "the exact law, Bessel or Dowell";
            let subject = "ladder of a winding";
            check(subject, source, reached.re, exact.re, Bound::Relative(0.02));
            check(subject, source, reached.im, exact.im, Bound::Relative(0.02));
        }
    }
}
