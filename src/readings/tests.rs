//! Every reading against closed forms, with the order at which it converges, and where nothing is found.

use super::*;
use crate::signals::draw::Draw;
use crate::signals::{EventLog, EventPhrase, Happening, Instant, Owner, Window};
use crate::units;
use std::f64::consts::{PI, TAU};

fn sampled(signal: impl Fn(f64) -> f64, from: f64, to: f64, count: u32) -> Vec<Piece> {
    let edge = |k: u32| from + (to - from) * f64::from(k) / f64::from(count);
    (0..count)
        .map(|k| Piece::sampled(edge(k), edge(k + 1), &signal))
        .collect()
}

fn steps(values: &[f64]) -> Vec<Piece> {
    let piece = |(k, &value): (usize, &f64)| Piece::constant(k as f64, (k + 1) as f64, value);
    values.iter().enumerate().map(piece).collect()
}

fn take_in(window: Window, word: &str, ask: Ask, pieces: &[Piece], log: &EventLog) -> Outcome {
    let kind = ReadingKind::find(word).expect(word);
    let mut taking = Taking::new(window, (kind.make)(&ask), (kind.result)(units::VOLTAGE));
    pieces.iter().for_each(|piece| taking.feed(piece, log));
    taking.finish()
}

fn take(word: &str, ask: Ask, pieces: &[Piece]) -> Outcome {
    take_in(Window::default(), word, ask, pieces, &EventLog::default())
}

fn value(word: &str, ask: Ask, pieces: &[Piece]) -> Option<f64> {
    take(word, ask, pieces).value_and_time().0
}

fn time(word: &str, ask: Ask, pieces: &[Piece]) -> Option<f64> {
    take(word, ask, pieces).value_and_time().1
}

const NONE: Ask = Ask {
    level: 0.0,
    rising: false,
};

fn falls_to(level: f64) -> Ask {
    Ask {
        level,
        rising: false,
    }
}

fn rises_to(level: f64) -> Ask {
    Ask {
        level,
        rising: true,
    }
}

/// Errors at about 12, 24, 48 and 96 pieces against the closed form fall at least with `order`, down to rounding. Each is the
/// worst of eight near counts, as the error at one place depends on where in its piece it lies.
fn converges(word: &str, ask: Ask, signal: impl Fn(f64) -> f64, to: f64, wanted: f64, order: f64) {
    let error = |count| {
        let got = value(word, ask, &sampled(&signal, 0.0, to, count)).expect(word);
        (got - wanted).abs() / wanted.abs().max(1.0)
    };
    let errors = [12, 24, 48, 96].map(|count| (count..count + 8).map(error).fold(0.0, f64::max));
    let fall = (errors[0] / errors[3]).log2() / 3.0;
    assert!(
        fall > order - 0.3 || errors[3] < 1e-13,
        "{word}: order {fall:.2}, {errors:?}"
    );
    assert!(errors[3] < 1e-6, "{word}: {errors:?}");
}

/// v = 2 + 5 sin(t + 0.4) over one period from 0: closed forms of sine and circle.
#[test]
fn readings_of_a_sine_converge_to_their_closed_forms() {
    let signal = |t: f64| 2.0 + 5.0 * (t + 0.4).sin();
    let above = PI - 2.0 * (0.4f64).asin();
    for (word, ask, wanted, order) in [
        ("highest", NONE, 7.0, 4.0),
        ("lowest", NONE, -3.0, 4.0),
        ("peak", NONE, 7.0, 4.0),
        ("ripple", NONE, 10.0, 4.0),
        ("mean", NONE, 2.0, 4.0),
        ("rms", NONE, (4.0f64 + 12.5).sqrt(), 4.0),
        ("integral", NONE, 2.0 * TAU, 4.0),
        ("final", NONE, 2.0 + 5.0 * 0.4f64.sin(), 4.0),
        // A slope of interpolation loses one order.
        ("fastest_change", NONE, 5.0, 3.0),
        ("time_above", falls_to(4.0), above, 4.0),
        ("time_below", falls_to(4.0), TAU - above, 4.0),
        ("first_time", falls_to(4.0), PI - 0.4f64.asin() - 0.4, 4.0),
        ("last_time", rises_to(2.0), TAU - 0.4, 4.0),
        ("time_until", rises_to(6.0), 0.8f64.asin() - 0.4, 4.0),
        ("time_until_last", falls_to(2.0), PI - 0.4, 4.0),
    ] {
        converges(word, ask, signal, TAU, wanted, order);
    }
}

/// A coil's current 60 mA exp(-t/3 ms) in units of mA and ms: t = tau ln(I0/I), integral I0 tau (1 - exp(-T/tau)).
#[test]
fn readings_of_an_exponential_converge_to_their_closed_forms() {
    let signal = |t: f64| 60.0 * (-t / 3.0).exp();
    let left = (-20.0f64 / 3.0).exp();
    for (word, ask, wanted, order) in [
        ("time_until", falls_to(8.0), 3.0 * (60.0f64 / 8.0).ln(), 4.0),
        (
            "time_until_last",
            falls_to(8.0),
            3.0 * (60.0f64 / 8.0).ln(),
            4.0,
        ),
        ("integral", NONE, 180.0 * (1.0 - left), 4.0),
        ("mean", NONE, 9.0 * (1.0 - left), 4.0),
        (
            "rms",
            NONE,
            (60.0f64.powi(2) * 1.5 * (1.0 - left * left) / 20.0).sqrt(),
            4.0,
        ),
        ("highest", NONE, 60.0, 4.0),
        ("lowest", NONE, 60.0 * left, 4.0),
    ] {
        converges(word, ask, signal, 20.0, wanted, order);
    }
    let pieces = sampled(signal, 0.0, 20.0, 400);
    assert_eq!(time("fastest_change", NONE, &pieces), Some(0.0));
    let slope = value("fastest_change", NONE, &pieces).expect("a slope");
    assert!((slope - 20.0).abs() < 1e-4, "{slope}");
    let outcome = take("time_until", falls_to(0.0), &pieces);
    assert_eq!(
        (outcome.taken, outcome.remark),
        (None, Some("it stays above the level"))
    );
}

/// 10 exp(-t/4) cos(2 pi t): first and last passing of a level, found by scanning and halving the function itself.
#[test]
fn first_and_last_passing_of_a_ringing_signal_differ_as_they_must() {
    let signal = |t: f64| 10.0 * (-t / 4.0).exp() * (TAU * t).cos();
    let level = 1.3;
    let mut falls = Vec::new();
    for k in 0..100_000 {
        let (mut a, mut b) = (f64::from(k) * 1e-4, f64::from(k + 1) * 1e-4);
        if signal(a) > level && signal(b) <= level {
            while b - a > 1e-15 * b.max(1e-3) && 0.5 * (a + b) > a && 0.5 * (a + b) < b {
                let middle = 0.5 * (a + b);
                if signal(middle) > level {
                    a = middle
                } else {
                    b = middle
                }
            }
            falls.push(b);
        }
    }
    // 10 exp(-8/4) = 1.35 is the last crest above the level.
    assert_eq!(falls.len(), 9);
    let pieces = sampled(signal, 0.0, 10.0, 4000);
    for (word, wanted) in [
        ("first_time", falls[0]),
        ("last_time", falls[8]),
        ("time_until_last", falls[8]),
    ] {
        let got = value(word, falls_to(level), &pieces).expect(word);
        assert!((got - wanted).abs() < 1e-8, "{word}: {got} for {wanted}");
    }
}

#[test]
fn a_fall_needs_a_value_above_first() {
    let kick = sampled(|t| 8.0 * t * (2.0 - t), 0.0, 2.0, 5);
    let got = value("time_until", falls_to(6.0), &kick).expect("it falls back");
    assert!((got - 1.5).abs() < 1e-14, "{got}");
    let below = take("time_until", falls_to(9.0), &kick);
    assert_eq!(
        below.remark,
        Some("it is never above the level, so it cannot fall to it")
    );
    assert_eq!(below.value_and_time(), (None, None));
    assert_eq!(
        take("last_time", rises_to(-1.0), &kick).remark,
        Some("it is never below the level, so it cannot rise to it")
    );
    assert_eq!(
        take("last_time", rises_to(9.0), &kick).remark,
        Some("it stays below the level")
    );
    // At the level when the window begins is not above it; the crest touches 8.
    assert_eq!(
        value("first_time", falls_to(1.0), &steps(&[1.0, 0.0])),
        None
    );
    assert_eq!(
        value("first_time", falls_to(1.0), &steps(&[2.0, 1.0])),
        Some(1.0)
    );
    assert_eq!(
        value(
            "first_time",
            rises_to(8.0),
            &sampled(|t| 8.0 * t, 0.0, 1.0, 3)
        ),
        Some(1.0)
    );
}

#[test]
fn the_last_fall_counts_even_when_the_signal_rises_again() {
    let pieces = steps(&[5.0, 1.0, 5.0, 1.0, 5.0]);
    assert_eq!(value("last_time", falls_to(3.0), &pieces), Some(3.0));
    let mut passing = Passing::new(falls_to(3.0));
    pieces.iter().for_each(|piece| passing.feed(piece));
    assert_eq!(
        (passing.first(), passing.last(), passing.is_still_ahead()),
        (Some(1.0), Some(3.0), true)
    );
}

#[test]
fn both_values_of_a_jump_count() {
    let pieces = steps(&[1.0, 7.0, -9.0, 2.0]);
    assert_eq!(
        (
            value("highest", NONE, &pieces),
            time("highest", NONE, &pieces)
        ),
        (Some(7.0), Some(1.0))
    );
    assert_eq!(
        (value("peak", NONE, &pieces), time("peak", NONE, &pieces)),
        (Some(9.0), Some(2.0))
    );
    assert_eq!(value("ripple", NONE, &pieces), Some(16.0));
    assert_eq!(value("mean", NONE, &pieces), Some(0.25));
    let jump = take("fastest_change", NONE, &pieces);
    assert_eq!(
        (jump.taken, jump.remark),
        (None, Some("it jumps: give the edge a duration"))
    );
    let mut almost = steps(&[0.0, 1.0]);
    almost[0] = Piece::sampled(0.0, 1.0, |t| t + 1e-6);
    let slope = value("fastest_change", NONE, &almost)
        .expect("a disagreement in the sixth digit is no jump");
    assert!((slope - 1.0).abs() < 1e-14);
}

#[test]
fn a_window_by_an_event_starts_the_count() {
    let driver = Owner::parse("k1_driver");
    let opens = EventPhrase::parse("k1_driver opens").expect("an event");
    let window = Window {
        from: Some(Instant::Event(opens)),
        to: Some(Instant::Time(6.0)),
    };
    let signal = |t: f64| {
        if t < 2.0 {
            10.0
        } else {
            10.0 * (2.0 - t).exp()
        }
    };
    let run = |word: &str, ask| {
        let kind = ReadingKind::find(word).expect(word);
        let mut taking = Taking::new(window.clone(), (kind.make)(&ask), units::VOLTAGE);
        let mut log = EventLog::default();
        for piece in sampled(signal, 0.0, 8.0, 800) {
            if piece.from == 2.0 {
                log.note(&driver, Happening::Opens, 2.0);
            }
            taking.feed(&piece, &log);
        }
        assert!(taking.is_over());
        let (value, time) = taking.finish().value_and_time();
        (value.expect(word), time)
    };
    let (until, at) = run("time_until", falls_to(5.0));
    assert!((until - 2.0f64.ln()).abs() < 1e-9 && at == Some(2.0 + until));
    let (first, _) = run("first_time", falls_to(5.0));
    assert!((first - 2.0 - 2.0f64.ln()).abs() < 1e-9);
    assert_eq!(run("highest", NONE), (10.0, Some(2.0)));
    let (last, at) = run("final", NONE);
    assert!((last - 10.0 * (-4.0f64).exp()).abs() < 1e-9 && at == Some(6.0));
}

#[test]
fn a_value_at_an_instant_is_the_one_before_a_jump() {
    let pieces = steps(&[1.0, 7.0]);
    let at = |time| {
        let outcome = take_in(
            Window::at(Instant::Time(time)),
            "value_at",
            NONE,
            &pieces,
            &EventLog::default(),
        );
        outcome.value_and_time()
    };
    assert_eq!(at(0.0), (Some(1.0), Some(0.0)));
    assert_eq!(at(1.0), (Some(1.0), Some(1.0)));
    assert_eq!(at(1.5), (Some(7.0), Some(1.5)));
    assert_eq!(at(2.0), (Some(7.0), Some(2.0)));
    assert_eq!(at(3.0), (None, None));
}

#[test]
fn what_has_no_window_is_nothing_and_says_why() {
    let event = EventPhrase::parse("k1 opens").expect("an event");
    let never = Window {
        from: Some(Instant::Event(event)),
        to: None,
    };
    for kind in READINGS {
        let outcome = take_in(
            never.clone(),
            kind.word,
            NONE,
            &steps(&[1.0, 2.0]),
            &EventLog::default(),
        );
        assert_eq!(
            (outcome.taken, outcome.remark),
            (None, Some("its window never begins")),
            "{}",
            kind.word
        );
        let outcome = take_in(
            Window::default(),
            kind.word,
            NONE,
            &[],
            &EventLog::default(),
        );
        assert!(outcome.taken.is_none() && outcome.remark.is_some());
    }
    let backwards = Window {
        from: Some(Instant::Time(1.5)),
        to: Some(Instant::Time(0.5)),
    };
    let outcome = take_in(
        backwards,
        "mean",
        NONE,
        &steps(&[1.0, 2.0]),
        &EventLog::default(),
    );
    assert_eq!(outcome.remark, Some("its window ends before it begins"));
}

#[test]
fn a_single_instant_has_readings() {
    let instant = [Piece::instant(0.0, -3.0)];
    for (word, wanted) in [
        ("mean", -3.0),
        ("rms", 3.0),
        ("peak", 3.0),
        ("final", -3.0),
        ("ripple", 0.0),
        ("integral", 0.0),
    ] {
        assert_eq!(value(word, NONE, &instant), Some(wanted), "{word}");
    }
}

/// Cutting the same waveform elsewhere changes no reading beyond rounding.
#[test]
fn readings_do_not_depend_on_where_pieces_end() {
    let mut draw = Draw::new(11);
    for _ in 0..300 {
        let (mut whole, mut cut, mut from) = (Vec::new(), Vec::new(), 0.0);
        let mut value = draw.between(-1.0, 1.0);
        for _ in 0..20 {
            let to = from + 10f64.powf(draw.between(-3.0, 0.0));
            let inner = [
                value,
                draw.between(-2.0, 2.0),
                draw.between(-2.0, 2.0),
                draw.between(-2.0, 2.0),
            ];
            let piece = Piece {
                from,
                to,
                values: inner,
            };
            let middle = draw.between(from, to);
            cut.extend(
                [piece.within(from, middle), piece.within(middle, to)]
                    .into_iter()
                    .flatten(),
            );
            whole.push(piece);
            (from, value) = (to, inner[3]);
        }
        let ask = Ask {
            level: draw.between(-1.0, 1.0),
            rising: draw.below(2) == 0,
        };
        for kind in READINGS {
            let (a, b) = (take(kind.word, ask, &whole), take(kind.word, ask, &cut));
            let (a, b) = (a.value_and_time().0, b.value_and_time().0);
            let close = match (a, b) {
                (Some(a), Some(b)) => (a - b).abs() <= 1e-9 * a.abs().max(1.0),
                (a, b) => a == b,
            };
            assert!(close, "{}: {a:?} and {b:?}", kind.word);
        }
    }
}
