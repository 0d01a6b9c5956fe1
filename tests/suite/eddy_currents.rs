//! Guards: shells of conducting iron follow the diffusion of the field, in frequency and in time, and lose what the field
//! loses.

use crate::netlists::{from_text, outcome, value};
use crate::record::{Bound, check};
use coilbreak::magnetics::eddy::{Section, Shells};
use coilbreak::magnetics::materials::{Magnetization, Smooth};
use num_complex::Complex64;
use std::f64::consts::PI;

const MU0: f64 = 4e-7 * PI;
const MU: f64 = 500.0 * MU0;
const RESISTIVITY: f64 = 0.12e-6;

/// Flux over the flux at rest, at an angular frequency: the ladder of the shells with a straight material.
fn of_ladder(shells: &Shells, length: f64, omega: f64) -> Complex64 {
    let s = Complex64::new(0.0, omega);
    let permeance = |k: usize| MU * shells.areas[k] / length;
    let last = shells.areas.len() - 1;
    let mut flux = Complex64::from(permeance(last));
    for k in (0..last).rev() {
        flux = permeance(k) + 1.0 / (s * shells.sheets[k] + 1.0 / flux);
    }
    flux / (MU * shells.areas.iter().sum::<f64>() / length)
}

/// tanh(z)/z, z = thickness/2 · √(s mu/rho): a sheet.
fn of_sheet(thickness: f64, omega: f64) -> Complex64 {
    let z = 0.5 * thickness * (Complex64::new(0.0, omega) * MU / RESISTIVITY).sqrt();
    z.tanh() / z
}

/// 2 I1(z)/(z I0(z)), z = radius · √(s mu/rho): a round bar; the ratio by its continued fraction,
/// I1/I0 = 1/(2/z + 1/(4/z + 1/(6/z + ...))).
fn of_bar(radius: f64, omega: f64) -> Complex64 {
    let z = radius * (Complex64::new(0.0, omega) * MU / RESISTIVITY).sqrt();
    let mut ratio = Complex64::from(0.0);
    for k in (1..=200).rev() {
        ratio = 1.0 / (f64::from(2 * k) / z + ratio);
    }
    2.0 * ratio / z
}

/// Angular frequencies from a thousandth of the corner to a hundred times it.
fn frequencies(corner: f64) -> impl Iterator<Item = f64> {
    (0..=100).map(move |k| corner * 10f64.powf(f64::from(k) / 20.0 - 3.0))
}

#[test]
fn shells_of_sheets_follow_the_diffusion_to_a_hundred_times_the_corner() {
    let thickness = 0.7e-3;
    let shells = Shells::new(Section::Sheets(thickness), 0.1, 2e-5, RESISTIVITY);
    let corner = RESISTIVITY * PI * PI / (MU * thickness * thickness);
    for omega in frequencies(corner) {
        let (reached, exact) = (of_ladder(&shells, 0.1, omega), of_sheet(thickness, omega));
        check(
            "eddy currents of sheets",
            "tanh(z)/z, the diffusion into a sheet (classic; from memory)",
            (reached / exact - 1.0).norm(),
            0.0,
            Bound::Absolute(0.02),
        );
    }
}

#[test]
fn shells_of_a_bar_follow_the_diffusion_to_a_hundred_times_the_corner() {
    let area = 50e-6;
    let radius = (area / PI).sqrt();
    let shells = Shells::new(Section::Round, 0.1, area, RESISTIVITY);
    let corner = RESISTIVITY * (2.404_825_557_695_773 / radius).powi(2) / MU;
    for omega in frequencies(corner) {
        let (reached, exact) = (of_ladder(&shells, 0.1, omega), of_bar(radius, omega));
        check(
            "eddy currents of a round bar",
            "2 I1(z)/(z I0(z)), the diffusion into a round bar (classic; from memory)",
            (reached / exact - 1.0).norm(),
            0.0,
            Bound::Absolute(0.02),
        );
    }
}

/// A coil on a core of straight iron whose current is switched on at once.
fn switched_on(eddy: &str, duration: f64, reading: &str) -> f64 {
    let text = format!(
        "
materials:
  iron: {{initial_permeability: 500, resistivity: 0.12 µΩ m}}
cores:
  bar: {{shape: effective, length: 100 mm, area: 50 mm², material: iron, {eddy}}}
elements:
  source: {{kind: current_source, nodes: [ground, top], current: 1 A}}
  coil: {{kind: coil, nodes: [top, ground], core: bar, turns: 100, resistance: 1 Ω, self_capacitance: 0 F}}
analysis: {{transient: {{duration: {duration:e} s, start: zero, accuracy: 1e-6}}}}
readings:
  read: {{signal: {reading}, take: final}}
"
    );
    value(&outcome(&from_text(&text, &[])), "read")
}

/// What is left of the flux's rise after a step of the field at the surface: for a sheet Σ 8/((2k + 1)² pi²)
/// exp(-(2k + 1)² pi² t/(4 T)) with T = mu thickness²/(4 rho).
fn left_of_rise(t: f64) -> f64 {
    (0..200)
        .map(|k| (f64::from(2 * k + 1) * PI).powi(2))
        .map(|square| 8.0 / square * (-0.25 * square * t).exp())
        .sum()
}

#[test]
fn flux_rises_into_a_sheet_as_the_series_says() {
    let thickness: f64 = 2e-3;
    let time = MU * thickness * thickness / (4.0 * RESISTIVITY);
    for share in [0.01, 0.03, 0.1, 0.3, 1.0, 2.0] {
        let eddy = "eddy_currents: laminated, lamination: 2 mm";
        let reached = switched_on(eddy, share * time, "flux density in coil");
        check(
            "flux that rises into a sheet",
            "series of the diffusion into a sheet after a step (classic; from memory)",
            reached / (MU * 1000.0),
            1.0 - left_of_rise(share),
            Bound::Relative(5e-3),
        );
    }
}

#[test]
fn a_solid_core_holds_its_flux_and_sheets_hold_it_less() {
    let netlist = |eddy: &str| {
        let path = concat!(
            env!("CARGO_MANIFEST_DIR"),
            "/netlists/relay_solid_core.yaml"
        );
        let text = std::fs::read_to_string(path).expect("it is shipped");
        assert!(text.contains("eddy_currents: solid}"));
        let outcome = outcome(&from_text(
            &text.replace("eddy_currents: solid}", eddy),
            &[],
        ));
        assert!(outcome.ledger.imbalance < 1e-3);
        (
            value(&outcome, "current_gone"),
            value(&outcome, "flux_gone"),
        )
    };
    let solid = netlist("eddy_currents: solid}");
    let sheets = netlist("eddy_currents: laminated, lamination: 0.5 mm}");
    let none = netlist("eddy_currents: none}");
    assert!(solid.1 > 1.4 * none.1, "{solid:?} against {none:?}");
    assert!(
        sheets.1 > none.1 && sheets.1 < 1.05 * none.1,
        "{sheets:?} against {none:?}"
    );
    // Where the core's currents carry the flux, the winding need not.
    assert!(solid.0 < none.0, "{solid:?} against {none:?}");
}

/// Solid iron as thirty nested shells of equal depth, by its own equations, against the five of the element: a step of the
/// supply drives the outer iron into saturation while the inner is still empty.
#[test]
fn a_saturating_front_moves_inward_as_in_many_shells() {
    let text = "
materials:
  iron: {initial_permeability: 3000, saturation: 1.5 T, resistivity: 0.12 µΩ m}
cores:
  bar: {shape: effective, length: 60 mm, area: 50 mm², gap: 0.05 mm, material: iron, eddy_currents: solid}
elements:
  source: {kind: current_source, nodes: [ground, top], current: 0.1 A}
  coil: {kind: coil, nodes: [top, ground], core: bar, turns: 4000, resistance: 1 Ω, self_capacitance: 0 F}
analysis: {transient: {duration: 40 ms, start: zero, accuracy: 1e-5}}
readings:
  b1: {signal: flux density in coil, take: value_at, at: 1 ms}
  b2: {signal: flux density in coil, take: value_at, at: 3 ms}
  b3: {signal: flux density in coil, take: value_at, at: 10 ms}
  b4: {signal: flux density in coil, take: value_at, at: 30 ms}
";
    let outcome = outcome(&from_text(text, &[]));
    let many = many_shells(&[1e-3, 3e-3, 10e-3, 30e-3]);
    for (name, expected) in ["b1", "b2", "b3", "b4"].iter().zip(many) {
        check(
            "a saturating front in solid iron",
            "thirty shells of equal depth, implicit Euler with 20 000 steps",
            value(&outcome, name),
            expected,
            Bound::Relative(0.05),
        );
    }
}

/// Mean flux density [T] at given instants by small implicit steps: unknown are the fluxes within each radius; between
/// two shells H falls by the current that a change of the flux within drives, and the outermost has what the
/// ampere-turns and the gap leave it. Newton's iteration on a tridiagonal matrix.
fn many_shells(instants: &[f64]) -> Vec<f64> {
    const COUNT: usize = 30;
    const STEPS: usize = 20_000;
    let (length, gap, area, force) = (0.06, 0.05e-3, 50e-6, 400.0);
    let iron = Smooth::new(3000.0, 1.5);
    let width = (area / PI).sqrt() / COUNT as f64;
    let areas: Vec<f64> = (0..COUNT)
        .map(|k| PI * width * width * (2 * k + 1) as f64)
        .collect();
    let step = 30e-3 / STEPS as f64;
    // Fall of H per change of the flux within a shell, to the middle of the next or to the surface.
    let fall = |k: usize| {
        let depth = if k + 1 < COUNT { width } else { 0.5 * width };
        depth / (RESISTIVITY * 2.0 * PI * width * (k + 1) as f64 * step)
    };
    let mut flux = vec![0.0; COUNT];
    let mut found = Vec::new();
    let mut next = instants.iter().peekable();
    for n in 1..=STEPS {
        let before = flux.clone();
        for _ in 0..50 {
            let inside = |k: usize| if k == 0 { 0.0 } else { flux[k - 1] };
            let fields: Vec<(f64, f64)> = (0..COUNT)
                .map(|k| iron.field((flux[k] - inside(k)) / areas[k]))
                .collect();
            // Rows: H of the next (of the surface) less H of this one less the fall; columns k - 1, k, k + 1.
            let mut rows: Vec<[f64; 4]> = (0..COUNT)
                .map(|k| {
                    let own = fields[k].1 / areas[k];
                    let (outer, slope) = match fields.get(k + 1) {
                        Some(&(h, slope)) => (h, slope / areas[k + 1]),
                        None => (
                            (force - flux[k] / (area * MU0) * gap) / length,
                            gap / (area * MU0 * length),
                        ),
                    };
                    let excess = outer - fields[k].0 - fall(k) * (flux[k] - before[k]);
                    let right = if k + 1 < COUNT { slope } else { 0.0 };
                    [own, -slope - own - fall(k), right, excess]
                })
                .collect();
            for k in 1..COUNT {
                let factor = rows[k][0] / rows[k - 1][1];
                rows[k][1] -= factor * rows[k - 1][2];
                rows[k][3] -= factor * rows[k - 1][3];
            }
            let mut change = 0.0;
            let mut largest = 0.0_f64;
            for k in (0..COUNT).rev() {
                change = (rows[k][3] - rows[k][2] * change) / rows[k][1];
                flux[k] -= change;
                largest = largest.max(change.abs());
            }
            if largest < 1e-14 {
                break;
            }
        }
        if next
            .peek()
            .is_some_and(|&&at| at <= step * n as f64 + 1e-12)
        {
            next.next();
            found.push(flux[COUNT - 1] / area);
        }
    }
    found
}
