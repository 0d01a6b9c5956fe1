//! Thinning keeps what an eye and a table look for.

use super::*;
use crate::signals::draw::Draw;
use crate::units;

/// A run of random pieces with jumps.
fn random_trace(seed: u64, count: usize) -> Trace {
    let mut draw = Draw::new(seed);
    let mut trace = Trace::new("voltage at a", units::VOLTAGE);
    let (mut time, mut value) = (0.0, 0.0);
    for _ in 0..count {
        let to = time + 10f64.powf(draw.between(-6.0, 0.0));
        if draw.below(10) == 0 {
            value = draw.between(-3.0, 3.0);
        }
        let values = [
            value,
            draw.between(-1.0, 1.0),
            draw.between(-1.0, 1.0),
            draw.between(-1.0, 1.0),
        ];
        trace.pieces.push(Piece {
            from: time,
            to,
            values,
        });
        (time, value) = (to, values[3]);
    }
    trace
}

fn range(values: impl Iterator<Item = f64>) -> (f64, f64) {
    values.fold((f64::MAX, f64::MIN), |(low, high), v| {
        (low.min(v), high.max(v))
    })
}

#[test]
fn thinning_keeps_extremes_order_ends_and_the_number_asked_for() {
    for seed in 0..200 {
        let trace = random_trace(seed, 500);
        let (from, to) = trace.span().expect("pieces");
        let whole = range(trace.pieces.iter().flat_map(Piece::extremes).map(|e| e.1));
        for points in [4, 40, 401] {
            let samples = thinned(&trace, from, to, points);
            assert!(samples.len() <= points, "{} of {points}", samples.len());
            assert_eq!(range(samples.iter().map(|s| s.value)), whole);
            assert!(samples.windows(2).all(|pair| pair[0].time <= pair[1].time));
            let ends = (
                samples.first().map(|s| s.time),
                samples.last().map(|s| s.time),
            );
            assert_eq!(ends, (Some(from), Some(to)));
        }
    }
}

#[test]
fn a_short_kick_in_a_long_run_stays() {
    let mut trace = Trace::new("voltage at drive", units::VOLTAGE);
    trace.pieces.push(Piece::constant(0.0, 0.5, 0.0));
    trace.pieces.push(Piece::sampled(0.5, 0.5 + 1e-6, |t| {
        4e14 * (t - 0.5) * (0.5 + 1e-6 - t)
    }));
    trace.pieces.push(Piece::constant(0.5 + 1e-6, 1.0, 0.0));
    let samples = thinned(&trace, 0.0, 1.0, 100);
    let top = samples.iter().map(|s| s.value).fold(0.0, f64::max);
    assert!((top - 100.0).abs() < 1e-2, "{top}");
}

/// Straight lines between the samples of a sine differ from it by at most (2 pi/N)²/8 with N intervals a period.
#[test]
fn a_smooth_curve_is_followed_closely() {
    let mut trace = Trace::new("voltage at a", units::VOLTAGE);
    let omega = std::f64::consts::TAU;
    for k in 0..40 {
        let from = f64::from(k) / 40.0;
        trace
            .pieces
            .push(Piece::sampled(from, from + 1.0 / 40.0, |t| {
                (omega * t).sin()
            }));
    }
    let samples = thinned(&trace, 0.0, 1.0, 400);
    let bound = (omega / 100.0).powi(2) / 8.0;
    for pair in samples.windows(2) {
        let middle = 0.5 * (pair[0].time + pair[1].time);
        let error = 0.5 * (pair[0].value + pair[1].value) - (omega * middle).sin();
        assert!(error.abs() <= bound * 1.01, "{error:e} against {bound:e}");
    }
}

#[test]
fn a_table_has_two_lines_at_a_jump_and_every_trace_in_each() {
    let mut a = Trace::new("voltage at a", units::VOLTAGE);
    a.pieces = vec![
        Piece::constant(0.0, 1.0, 1.0),
        Piece::constant(1.0, 2.0, 5.0),
    ];
    let mut b = Trace::new("voltage at b", units::VOLTAGE);
    b.pieces = vec![Piece::sampled(0.0, 2.0, |t| t)];
    let table = rows(&[a, b], 0.0, 2.0, 8);
    let wanted = [
        (0.0, 1.0, 0.0),
        (1.0, 1.0, 1.0),
        (1.0, 5.0, 1.0),
        (2.0, 5.0, 2.0),
    ];
    assert_eq!(table.len(), wanted.len());
    for (row, (time, a, b)) in table.iter().zip(wanted) {
        assert_eq!((row.time, row.values[0]), (time, a));
        assert!((row.values[1] - b).abs() < 1e-15);
    }
}

#[test]
fn nothing_gives_nothing() {
    let empty = Trace::new("voltage at a", units::VOLTAGE);
    assert!(thinned(&empty, 0.0, 1.0, 100).is_empty());
    assert!(rows(&[empty], 0.0, 1.0, 100).is_empty());
    assert!(rows(&[], 0.0, 1.0, 100).is_empty());
    let mut instant = Trace::new("voltage at a", units::VOLTAGE);
    instant.pieces.push(Piece::instant(0.0, 3.0));
    assert_eq!(thinned(&instant, 0.0, 0.0, 100).len(), 1);
}
