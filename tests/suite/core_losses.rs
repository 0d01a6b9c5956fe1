//! Guards: core loss after a run is that of the improved generalised Steinmetz method, minor loops by themselves.

use crate::netlists::{from_text, outcome};
use crate::record::{Bound, check};
use crate::table::{Row, rows};
use coilbreak::magnetics::Steinmetz;
use coilbreak::magnetics::losses::{Improved, Loops};

const SUBJECT: &str = "core loss per volume";
const SOURCE: &str = "improved generalised Steinmetz, Venkatachalam et al. 2002, closed forms";

fn material(row: &Row) -> Steinmetz {
    Steinmetz {
        factor: row.get("k"),
        frequency_exponent: row.get("alpha"),
        flux_exponent: row.get("beta"),
    }
}

/// Loss per volume [J/m³] of straight pieces (duration [s], change [T]) that come back to their start.
fn period(law: Improved, pieces: &[(f64, f64)]) -> f64 {
    let mut loops = Loops::new(law, 0.0);
    let mut density = 0.0;
    for &(duration, change) in pieces {
        let rate = change.abs() / duration;
        density += change;
        loops.go(density, |a, b| (b - a).abs() * rate.powf(law.rate - 1.0));
    }
    loops.lost_per_period()
}

#[test]
fn sines_triangles_and_trapezoids_lose_their_closed_forms() {
    for row in rows(include_str!("../data/core_loss.csv")) {
        let law = Improved::of(material(&row));
        check(
            "factor of the improved law",
            SOURCE,
            law.factor,
            row.get("ki_exact"),
            Bound::Relative(1e-9),
        );
        let (frequency, peak) = (row.get("f_Hz"), row.get("Bpk_T"));
        let (period_time, swing) = (1.0 / frequency, 2.0 * peak);
        let lost = match row.text("wave") {
            "sine" => {
                // Many straight pieces: their loss tends to the sine's with the square of their number.
                let at = |k: i32| peak * (std::f64::consts::TAU * f64::from(k) / 2e5).sin();
                let pieces: Vec<(f64, f64)> = (0..200_000)
                    .map(|k| (period_time / 2e5, at(k + 1) - at(k)))
                    .collect();
                period(law, &pieces)
            }
            "triangle" => {
                let share = row.get("par");
                let rise = (share * period_time, swing);
                period(law, &[rise, ((1.0 - share) * period_time, -swing)])
            }
            "trapezoid" => {
                let edge = row.get("par") * period_time;
                period(law, &[(edge, swing), (edge, -swing)])
            }
            other => panic!("no wave {other}"),
        };
        check(
            SUBJECT,
            SOURCE,
            lost * frequency,
            row.get("Pv_W_per_m3"),
            Bound::Relative(1e-8),
        );
        if row.text("wave") == "sine" {
            check(
                SUBJECT,
                "Steinmetz under a sine",
                material(&row).sine(frequency, peak),
                row.get("Pv_W_per_m3"),
                Bound::Relative(1e-9),
            );
        }
    }
}

/// Pieces as the table writes them: `2 us:+50 mT | 3 us:+150 mT`.
fn pieces(row: &Row) -> Vec<(f64, f64)> {
    let number = |text: &str, unit: &str| -> f64 {
        let text = text.trim().trim_end_matches(unit).trim();
        text.trim_start_matches('+').parse().expect("a number")
    };
    row.text("segments")
        .split('|')
        .map(|piece| {
            let (duration, change) = piece.split_once(':').expect("duration : change");
            (1e-6 * number(duration, "us"), 1e-3 * number(change, "mT"))
        })
        .collect()
}

#[test]
fn segments_lose_their_sum() {
    for row in rows(include_str!("../data/core_loss_segments.csv")) {
        let law = Improved::of(material(&row));
        check(
            SUBJECT,
            SOURCE,
            period(law, &pieces(&row)) / row.get("T_s"),
            row.get("Pv_W_per_m3"),
            Bound::Relative(1e-8),
        );
    }
}

/// A netlist whose coil of 10 turns on 60 mm of permeability 100 carries a current given at instants [s] and flux
/// densities [T].
fn driven(row: &Row, wave: &str, analysis: &str) -> String {
    format!(
        "
materials:
  powder: {{initial_permeability: 100,
           steinmetz: {{factor: {} W/m³, frequency_exponent: {}, flux_exponent: {}}}}}
cores:
  core: {{shape: effective, length: 60 mm, area: 50 mm², material: powder}}
elements:
  drive: {{kind: current_source, nodes: [ground, a], current: {wave}}}
  coil: {{kind: coil, nodes: [a, ground], core: core, turns: 10, resistance: 10 mΩ, self_capacitance: 0 F}}
analysis: {{{analysis}}}
",
        row.get("k"),
        row.get("alpha"),
        row.get("beta"),
    )
}

const VOLUME: f64 = 60e-3 * 50e-6;
/// Current per flux density [A/T].
const PER_TESLA: f64 = 60e-3 / (10.0 * 100.0 * coilbreak::magnetics::MU0);

#[test]
fn a_run_states_the_loss_of_its_cores_beside_the_ledger() {
    for row in rows(include_str!("../data/core_loss_segments.csv")) {
        let (mut time, mut density) = (0.0, 0.0);
        let mut points = "[0 s, 0 A]".to_owned();
        for (duration, change) in pieces(&row) {
            time += duration;
            density += change;
            points += &format!(", [{time:e} s, {:e} A]", density * PER_TESLA);
        }
        let analysis = format!("transient: {{duration: {time:e} s, start: zero, accuracy: 1e-6}}");
        let out = outcome(&from_text(
            &driven(&row, &format!("{{points: [{points}]}}"), &analysis),
            &[],
        ));
        let core = &out.core_losses[0];
        assert_eq!(core.name, "coil");
        check(
            "core loss of a run",
            SOURCE,
            core.mean_power,
            VOLUME * row.get("Pv_W_per_m3"),
            Bound::Relative(1e-6),
        );
    }
}

#[test]
fn a_period_of_a_sine_loses_what_steinmetz_says() {
    let table = rows(include_str!("../data/core_loss.csv"));
    for row in table.iter().filter(|row| row.text("wave") == "sine") {
        let (frequency, peak) = (row.get("f_Hz"), row.get("Bpk_T"));
        // A bias moves nothing, and the period is cut at no turning point.
        let wave = format!(
            "{{sine: {{offset: {:e} A, amplitude: {:e} A, frequency: {frequency:e} Hz, phase: 40 deg}}}}",
            PER_TESLA * 0.05,
            PER_TESLA * peak
        );
        let analysis = format!(
            "steady_state: {{period: {:e} s, accuracy: 1e-6}}",
            1.0 / frequency
        );
        let out = outcome(&from_text(&driven(row, &wave, &analysis), &[]));
        check(
            "core loss of a run",
            "Steinmetz under a sine",
            out.core_losses[0].mean_power,
            VOLUME * row.get("Pv_W_per_m3"),
            Bound::Relative(1e-4),
        );
        // Nothing in the balance knows of it.
        let account = out.accounts.iter().find(|(name, _)| name == "coil");
        let (_, account) = account.expect("every element has an account");
        assert!(account.gap() < 1e-6 * account.turnover);
    }
}

#[test]
fn a_leg_loses_by_its_own_flux_and_eddy_currents_besides_raise_a_caution() {
    let frequency = 5e4;
    let netlist = |core: &str| {
        format!(
            "
materials:
  ferrite: {{initial_permeability: 2000, resistivity: 1 µΩ m, steinmetz: {{factor: 1.2 W/m³, frequency_exponent: 1.45, flux_exponent: 2.6}}}}
cores:
  core: {{shape: effective, length: 60 mm, area: 50 mm², material: ferrite{core}}}
elements:
  drive: {{kind: voltage_source, nodes: [a, ground], voltage: {{sine: {{amplitude: 30 V, frequency: {frequency:e} Hz, phase: 90 deg}}}}}}
  t1: {{kind: transformer, core: core, leakage: 1 µH, windings: {{
        first: {{nodes: [a, ground], turns: 20, resistance: 1 µΩ}}, second: {{nodes: [b, ground], turns: 10, resistance: 1 µΩ}}}}}}
  load: {{kind: resistor, nodes: [b, ground], resistance: 10 kΩ}}
analysis: {{steady_state: {{period: {:e} s, accuracy: 1e-6}}}}
readings:
  swing: {{signal: flux density in t1.second, take: ripple}}
",
            1.0 / frequency
        )
    };
    let out = outcome(&from_text(&netlist(""), &[]));
    let law = Steinmetz {
        factor: 1.2,
        frequency_exponent: 1.45,
        flux_exponent: 2.6,
    };
    // The windings' microohms leave a mean flux that hardly decays; what loses is the swing.
    let reading = out.reading("swing").and_then(|reading| reading.value);
    let peak = 0.5 * reading.expect("a swing is always found");
    assert_eq!(out.core_losses.len(), 1);
    assert_eq!(out.core_losses[0].name, "t1");
    check(
        "core loss of a transformer",
        "Steinmetz under a sine",
        out.core_losses[0].mean_power,
        VOLUME * law.sine(frequency, peak),
        Bound::Relative(1e-4),
    );
    let twice = |out: &coilbreak::run::Outcome| {
        let cautions = out.cautions.iter();
        cautions
            .filter(|caution| caution.word == "core-loss-twice")
            .count()
    };
    assert_eq!(twice(&out), 0);
    let laminated = netlist(", eddy_currents: laminated, lamination: 0.05 mm");
    assert_eq!(twice(&outcome(&from_text(&laminated, &[]))), 1);
}
