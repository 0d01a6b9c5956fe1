//! Pieces against closed forms, and properties that hold for every cubic.

use super::*;
use crate::signals::draw::Draw;

/// 2 - 3 s + 4 s² - 5 s³ on a range, as a piece.
fn known(from: f64, to: f64) -> Piece {
    Piece::sampled(from, to, |t| {
        let s = (t - from) / (to - from);
        2.0 - 3.0 * s + 4.0 * s * s - 5.0 * s * s * s
    })
}

fn close(got: f64, wanted: f64, bound: f64) {
    assert!(
        (got - wanted).abs() <= bound,
        "got {got:e}, wanted {wanted:e}"
    );
}

#[test]
fn a_cubic_is_reproduced_with_value_slope_and_integral() {
    let piece = known(1.0, 3.0);
    for k in 0..=20 {
        let s = f64::from(k) / 20.0;
        let t = 1.0 + 2.0 * s;
        close(
            piece.value_at(t),
            2.0 - 3.0 * s + 4.0 * s * s - 5.0 * s.powi(3),
            1e-14,
        );
        close(
            piece.slope_at(t),
            (-3.0 + 8.0 * s - 15.0 * s * s) / 2.0,
            1e-13,
        );
    }
    close(
        piece.integral(),
        2.0 * (2.0 - 1.5 + 4.0 / 3.0 - 1.25),
        1e-14,
    );
}

/// Integral of s⁶ over the unit range is 1/7; of (s - 1/2)⁶ it is 1/448.
#[test]
fn the_square_of_a_cubic_is_integrated_exactly() {
    close(
        Piece::sampled(0.0, 1.0, |s| s.powi(3)).integral_of_square(),
        1.0 / 7.0,
        1e-16,
    );
    let centred = Piece::sampled(0.0, 1.0, |s| (s - 0.5).powi(3));
    close(centred.integral_of_square(), 1.0 / 448.0, 1e-17);
}

/// |s - 1/2| has the integral 1/4; that of |(s - 1/4)(s - 1/2)(s - 3/4)| is taken by the midpoint rule.
#[test]
fn the_magnitude_is_integrated_from_zero_to_zero() {
    close(
        Piece::sampled(0.0, 1.0, |s| s - 0.5).integral_of_magnitude(),
        0.25,
        1e-15,
    );
    let shape = |s: f64| (s - 0.25) * (s - 0.5) * (s - 0.75);
    let count = 200_000;
    let by_hand: f64 = (0..count)
        .map(|k| shape((f64::from(k) + 0.5) / f64::from(count)).abs() / f64::from(count))
        .sum();
    close(
        Piece::sampled(0.0, 1.0, shape).integral_of_magnitude(),
        by_hand,
        1e-9,
    );
}

#[test]
fn the_ends_are_exact_and_hold_outside() {
    let piece = Piece {
        from: 0.1,
        to: 0.3,
        values: [1.0, 7.0, -4.0, 0.1],
    };
    for (time, value) in [(0.1, 1.0), (0.3, 0.1), (-5.0, 1.0), (9.0, 0.1)] {
        assert_eq!(piece.value_at(time), value);
    }
}

/// (s - 0.2)(s - 0.5)(s - 0.9): three zeros, turning points where 3 s² - 3.2 s + 0.73 = 0.
#[test]
fn zeros_and_turning_points_of_a_known_cubic() {
    let piece = Piece::sampled(0.0, 1.0, |s| (s - 0.2) * (s - 0.5) * (s - 0.9));
    let zeros: Vec<_> = piece.crossings(0.0).collect();
    for (crossing, (time, rising)) in zeros.iter().zip([(0.2, true), (0.5, false), (0.9, true)]) {
        close(crossing.time, time, 1e-15);
        assert_eq!(crossing.rising, rising);
    }
    assert_eq!(zeros.len(), 3);
    let root = (3.2f64.powi(2) - 4.0 * 3.0 * 0.73).sqrt();
    let turns: Vec<_> = piece.turning_points().map(|(time, _)| time).collect();
    close(turns[0], (3.2 - root) / 6.0, 1e-15);
    close(turns[1], (3.2 + root) / 6.0, 1e-15);
}

/// A touch counts as falling to the level and leaving it; a triple zero passes once; a constant never.
#[test]
fn touches_inflexions_and_rest() {
    let touch = Piece::sampled(0.0, 1.0, |s| (s - 0.5) * (s - 0.5));
    assert!(touch.crossings(0.0).count().is_multiple_of(2));
    assert_eq!(touch.crossings(1e-9).count(), 2);
    assert_eq!(touch.crossings(-1e-9).count(), 0);
    let triple = Piece::sampled(0.0, 1.0, |s| (s - 0.375).powi(3));
    let passed: Vec<_> = triple.crossings(0.0).collect();
    assert_eq!(passed.len(), 1);
    close(passed[0].time, 0.375, 1e-5);
    let rest = Piece::constant(0.0, 1.0, 3.0);
    assert_eq!(
        rest.crossings(3.0).count() + rest.turning_points().count(),
        0
    );
}

#[test]
fn a_touch_at_an_end_counts_once_over_two_pieces() {
    let down = Piece::sampled(0.0, 1.0, |s| 1.0 - s);
    let up = Piece::sampled(1.0, 2.0, |s| s - 1.0);
    let all: Vec<_> = down
        .crossings(0.0)
        .chain(up.crossings(0.0))
        .map(|c| (c.time, c.rising))
        .collect();
    assert_eq!(all, [(1.0, false), (1.0, true)]);
}

#[test]
fn an_instant_has_values_and_no_extent() {
    let instant = Piece::instant(2.0, 5.0);
    assert_eq!((instant.value_at(2.0), instant.slope_at(2.0)), (5.0, 0.0));
    assert_eq!(
        (
            instant.integral(),
            instant.integral_of_square(),
            instant.time_above(1.0)
        ),
        (0.0, 0.0, 0.0)
    );
    assert_eq!(instant.steepest(), (2.0, 0.0));
    let jump = Piece {
        values: [1.0, 1.0, 3.0, 3.0],
        ..instant
    };
    let passed: Vec<_> = jump.crossings(2.0).map(|c| (c.time, c.rising)).collect();
    assert_eq!(passed, [(2.0, true)]);
}

/// Slope of s³ - 1.5 s² is steepest in the middle, -0.75; of s³ at the end, 3.
#[test]
fn the_steepest_place() {
    let (time, slope) =
        Piece::sampled(0.0, 2.0, |t| (t / 2.0).powi(3) - 1.5 * (t / 2.0).powi(2)).steepest();
    close(time, 1.0, 1e-12);
    close(slope, 0.375, 1e-14);
    let (time, slope) = Piece::sampled(0.0, 1.0, |t| t.powi(3)).steepest();
    assert_eq!(time, 1.0);
    close(slope, 3.0, 1e-13);
}

/// Values over twelve decades with large offsets: what is found is never beaten by dense sampling, zeros are
/// zeros, sides alternate, and the parts of a piece add up to it.
#[test]
fn properties_hold_for_random_cubics() {
    let mut draw = Draw::new(7);
    for _ in 0..20_000 {
        let scale = 10f64.powf(draw.between(-6.0, 6.0));
        let offset = if draw.between(0.0, 1.0) < 0.3 {
            draw.between(-100.0, 100.0) * scale
        } else {
            0.0
        };
        let values = [0; 4].map(|_| offset + scale * draw.between(-1.0, 1.0));
        let from = draw.between(-1.0, 1.0);
        let piece = Piece {
            from,
            to: from + 10f64.powf(draw.between(-9.0, 2.0)),
            values,
        };
        let size = scale + offset.abs();
        let highest = piece.extremes().map(|e| e.1).fold(f64::MIN, f64::max);
        let lowest = piece.extremes().map(|e| e.1).fold(f64::MAX, f64::min);
        for k in 0..=50 {
            let value = piece.value_at(from + piece.duration() * f64::from(k) / 50.0);
            assert!(value <= highest + 1e-14 * size && value >= lowest - 1e-14 * size);
        }
        let level = offset + scale * draw.between(-1.0, 1.0);
        check_crossings(&piece, level, size);
        check_parts(
            &piece,
            from + piece.duration() * draw.between(0.0, 1.0),
            level,
            size,
        );
    }
}

fn check_crossings(piece: &Piece, level: f64, size: f64) {
    let (mut above, mut time) = (piece.first() > level, piece.from);
    for crossing in piece.crossings(level) {
        assert!(crossing.time >= time && crossing.time <= piece.to);
        assert_ne!(crossing.rising, above);
        // The instant is rounded to the clock: the value may be off by the slope over that rounding.
        let rounding =
            piece.steepest().1 * 4.0 * f64::EPSILON * (piece.to.abs() + piece.from.abs());
        close(
            piece.value_at(crossing.time),
            level,
            1e-13 * size + rounding,
        );
        (above, time) = (crossing.rising, crossing.time);
    }
    assert_eq!(above, piece.last() > level);
}

fn check_parts(piece: &Piece, middle: f64, level: f64, size: f64) {
    let (Some(left), Some(right)) = (piece.within(-9e9, middle), piece.within(middle, 9e9)) else {
        panic!("the middle lies inside");
    };
    let span = size * piece.duration();
    // Rounding of the middle instant moves the parts' inner places.
    let clock = 8.0 * f64::EPSILON * (piece.from.abs() + piece.to.abs()) * piece.steepest().1;
    let slack = 1e-13 * span + clock * piece.duration();
    close(left.integral() + right.integral(), piece.integral(), slack);
    let squares = left.integral_of_square() + right.integral_of_square();
    close(squares, piece.integral_of_square(), 4.0 * size * slack);
    assert!(piece.integral_of_magnitude() + slack >= piece.integral().abs());
    let above = left.time_above(level) + right.time_above(level);
    assert!((0.0..=piece.duration() * (1.0 + 1e-12)).contains(&above));
}
