//! Stresses against closed forms.

use super::*;
use crate::signals::{RATINGS, RatingKind};

/// A waveform in equal pieces.
fn sampled(signal: impl Fn(f64) -> f64, to: f64, count: u32) -> Vec<Piece> {
    let edge = |k: u32| to * f64::from(k) / f64::from(count);
    (0..count)
        .map(|k| Piece::sampled(edge(k), edge(k + 1), &signal))
        .collect()
}

/// What a rating of 10 is used.
fn measured(key: &str, pieces: &[Piece], events: &[(Happening, f64)]) -> RatingUse {
    let mut meter = RatingMeter::new(RatingKind::find(key).expect(key));
    let mut told = 0;
    for piece in pieces {
        for &(happening, time) in events.iter().filter(|event| event.1 == piece.from) {
            meter.happened(happening, time);
            told += 1;
        }
        meter.feed(piece);
    }
    assert_eq!(told, events.len());
    meter.finish(10.0, None)
}

fn peak(key: &str, pieces: &[Piece]) -> f64 {
    measured(key, pieces, &[]).peak.expect(key)
}

fn close(got: f64, wanted: f64, bound: f64) {
    assert!(
        (got - wanted).abs() <= bound,
        "got {got:e}, wanted {wanted:e}"
    );
}

/// v = 3 - 8 cos t over one period: extremes -5 and 11, mean 3, effective sqrt(9 + 32), slope at most 8.
#[test]
fn simple_stresses_of_a_wave() {
    let wave = sampled(|t| 3.0 - 8.0 * t.cos(), std::f64::consts::TAU, 200);
    for (key, wanted) in [
        ("voltage", 11.0),
        ("reverse_voltage", 5.0),
        ("current", 11.0),
        ("current_surge", 11.0),
        ("current_mean", 3.0),
        ("power", 3.0),
        ("ripple_current", 41.0f64.sqrt()),
        ("voltage_rate", 8.0),
        ("flux_density", 11.0),
        ("working_voltage_dc", 5.0),
    ] {
        close(peak(key, &wave), wanted, 1e-4);
    }
    let used = measured("voltage", &wave, &[]);
    close(used.used.expect("used"), 1.1, 1e-6);
    close(used.time.expect("when"), std::f64::consts::PI, 1e-3);
    assert!(!used.holds() && measured("reverse_voltage", &wave, &[]).holds());
    let negative: Vec<Piece> = wave.iter().map(|piece| piece.map(|value| -value)).collect();
    assert_eq!(peak("power", &negative), 0.0);
    close(peak("current_mean", &negative), 3.0, 1e-9);
    close(peak("reverse_voltage", &negative), 11.0, 1e-6);
}

#[test]
fn every_rating_says_whether_it_is_evaluated() {
    for rating in RATINGS {
        let used = measured(rating.key, &[Piece::constant(0.0, 1.0, 1.0)], &[]);
        assert_eq!(used.peak.is_some(), rating.is_evaluated(), "{}", rating.key);
        assert_eq!(used.not_evaluated_yet, !rating.is_evaluated());
        assert_eq!(used.used, used.peak.map(|peak| peak / 10.0));
        let empty = measured(rating.key, &[], &[]);
        assert_eq!(
            (empty.peak, empty.holds()),
            (None, !rating.is_evaluated()),
            "{}",
            rating.key
        );
    }
}

#[test]
fn an_ideal_jump_has_no_rate_and_does_not_hold() {
    let jump = [
        Piece::constant(0.0, 1.0, 0.0),
        Piece::constant(1.0, 2.0, 5.0),
    ];
    let used = measured("voltage_rate", &jump, &[]);
    assert_eq!((used.peak, used.used, used.holds()), (None, None, false));
}

/// Off until 1, inrush to 9 at 1.5, 2 until the opening at 3, where the current falls at once.
#[test]
fn contacts_make_their_inrush_and_break_what_flowed() {
    let pieces = [
        Piece::constant(0.0, 1.0, 0.0),
        Piece::sampled(1.0, 2.0, |t| 2.0 + 28.0 * (t - 1.0) * (2.0 - t)),
        Piece::constant(2.0, 3.0, -2.0),
        Piece::constant(3.0, 4.0, 12.0),
    ];
    let events = [(Happening::Closes, 1.0), (Happening::Opens, 3.0)];
    let made = measured("making_current", &pieces, &events);
    close(made.peak.expect("made"), 9.0, 1e-12);
    close(made.time.expect("when"), 1.5, 1e-12);
    let broken = measured("breaking_current", &pieces, &events);
    assert_eq!((broken.peak, broken.time), (Some(2.0), Some(3.0)));
    for key in ["making_current", "breaking_current"] {
        let idle = measured(key, &pieces, &[]);
        assert_eq!(
            (idle.peak, idle.time, idle.holds()),
            (Some(0.0), None, true)
        );
    }
    let at_once = measured("breaking_current", &pieces[2..], &[(Happening::Opens, 2.0)]);
    assert_eq!(at_once.peak, Some(2.0));
}

/// 5 for one piece, 30 during a pulse, 24 at the end: a working voltage of 24.
#[test]
fn the_working_voltage_leaves_pulses_out() {
    let pieces = [
        Piece::constant(0.0, 1.0, -5.0),
        Piece::constant(1.0, 1.1, 300.0),
        Piece::constant(1.1, 3.0, 24.0),
    ];
    let used = measured("working_voltage_dc", &pieces, &[]);
    assert_eq!((used.peak, used.time), (Some(24.0), Some(3.0)));
}

/// P exp(-t/tau) holds P tau; V I (1 - t/T) holds V I T/2 (a constant clamp on a linear coil without resistance).
#[test]
fn one_pulse_holds_its_closed_form() {
    let decay = sampled(|t| 40.0 * (-t / 0.02).exp(), 1.0, 2000);
    close(peak("pulse_energy", &decay), 0.8, 0.8e-3);
    let ramp = [
        Piece::constant(0.0, 1.0, 0.0),
        Piece::sampled(1.0, 1.5, |t| 60.0 * (1.5 - t) / 0.5),
        Piece::constant(1.5, 9.0, 0.0),
    ];
    let used = measured("repetitive_energy", &ramp, &[]);
    close(used.peak.expect("a pulse"), 15.0, 15e-6);
    close(used.time.expect("when"), 1.0, 1e-12);
}

/// Bursts of 1 ms at 100 W every 10 ms, after 50 ms of leakage at 0.1 mW and with it in between.
#[test]
fn pulses_far_apart_are_counted_one_by_one() {
    let mut pieces = vec![Piece::constant(0.0, 0.05, 1e-4)];
    for k in 0..30 {
        let from = 0.05 + 0.01 * f64::from(k);
        let rise = |t: f64| 400.0 * (t - from) * (from + 1e-3 - t) / 1e-6 + 1e-4;
        pieces.push(Piece::sampled(from, from + 1e-3, rise));
        pieces.push(Piece::constant(from + 1e-3, from + 0.01, 1e-4));
    }
    // The parabola of height 100 W holds two thirds of its rectangle.
    close(peak("pulse_energy", &pieces), 100e-3 * 2.0 / 3.0, 1e-6);
}

/// A clamp that conducts in every other half of a ringing: one pulse, all bursts together.
#[test]
fn bursts_of_one_ringing_are_one_pulse() {
    let mut pieces = Vec::new();
    for k in 0..8 {
        let from = 2.0 * f64::from(k);
        pieces.push(Piece::constant(from, from + 1.0, 10.0));
        pieces.push(Piece::constant(from + 1.0, from + 2.0, 0.0));
    }
    pieces.push(Piece::constant(16.0, 90.0, 0.0));
    pieces.push(Piece::constant(90.0, 91.0, 30.0));
    close(peak("pulse_energy", &pieces), 80.0, 1e-12);
}

#[test]
fn a_part_that_is_always_loud_has_one_pulse_and_one_that_gives_has_none() {
    close(
        peak("pulse_energy", &[Piece::constant(0.0, 3.0, 0.5)]),
        1.5,
        1e-15,
    );
    assert_eq!(
        peak("pulse_energy", &[Piece::constant(0.0, 3.0, -0.5)]),
        0.0
    );
    assert_eq!(peak("pulse_energy", &[Piece::constant(0.0, 3.0, 0.0)]), 0.0);
}
