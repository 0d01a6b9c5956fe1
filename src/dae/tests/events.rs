//! The clock's events are hit exactly, guards to the accuracy asked, and charges pass through both.

use super::problems::{Ball, Charger, Sharing};
use crate::dae::{
    Advance, Cause, Ending, METHODS, March, MarchError, Span, State, System, Tolerances, Trouble,
};
use std::ops::ControlFlow;

/// One event as it was shown.
#[derive(Clone, Debug)]
struct Seen {
    time: f64,
    causes: Vec<Cause>,
    before: Vec<f64>,
    after: Vec<f64>,
}

fn march(
    march: &mut March,
    system: &dyn System,
    until: f64,
    tolerance: f64,
) -> Result<Vec<Seen>, MarchError> {
    let tolerances = Tolerances::absolute(vec![tolerance; system.size()]);
    let mut seen = Vec::new();
    march.run(system, Span::new(until, &tolerances), &mut |advance| {
        if let Advance::Event {
            time,
            causes,
            x_before,
            x_after,
            ..
        } = advance
        {
            seen.push(Seen {
                time: *time,
                causes: causes.to_vec(),
                before: x_before.to_vec(),
                after: x_after.to_vec(),
            });
        }
        ControlFlow::Continue(())
    })?;
    Ok(seen)
}

#[test]
fn clock_and_guard_events_fall_where_the_closed_form_has_them() {
    for method in METHODS {
        let system = Charger::new();
        let state = State {
            time: 0.0,
            x: vec![0.0, 1.0],
            mode: vec![1.0, 0.0],
        };
        let mut whole = March::new(method, state);
        let events = march(&mut whole, &system, 2.0, 1e-7).unwrap();
        assert_eq!(events.len(), 2, "{}", method.name);
        assert_eq!(
            (events[0].time, events[0].causes.as_slice()),
            (1.0, [Cause::Time].as_slice())
        );
        let full = 1.0 - (-1.0_f64).exp();
        assert!((events[0].after[0] - full).abs() < 1e-5, "charge kept");
        assert!(
            (events[0].after[1] + events[0].after[0]).abs() < 1e-9,
            "current solved anew"
        );
        let crossed = 1.0 + (full / 0.5).ln();
        assert!(
            (events[1].time - crossed).abs() < 1e-5,
            "{}: {}",
            method.name,
            events[1].time
        );
        let end = 1.0 - 0.5 * (-(2.0 - crossed)).exp();
        assert!((whole.state.x[0] - end).abs() < 1e-5, "{}", method.name);
        assert_eq!(whole.state.time, 2.0);
    }
}

#[test]
fn a_guard_is_met_within_a_tolerance_and_never_before_it_has_risen() {
    for method in METHODS {
        for tolerance in [1e-3, 1e-5, 1e-7, 1e-9] {
            let state = State {
                time: 0.0,
                x: vec![0.0, 1.0],
                mode: vec![1.0, 0.0],
            };
            let events = march(
                &mut March::new(method, state),
                &Charger::new(),
                2.0,
                tolerance,
            )
            .unwrap();
            let over = 0.5 - events[1].before[0];
            assert!(
                (0.0..tolerance).contains(&over),
                "{} {tolerance:e}: {over:e}",
                method.name
            );
        }
    }
}

#[test]
fn a_switch_between_capacitors_keeps_their_charge() {
    // 1 F at 3 V meets 2 F at 0 V: 1 V, all of 3 C kept. A source then meets both at 5 V.
    for method in METHODS {
        let system = Sharing::new();
        let state = State {
            time: 0.0,
            x: vec![3.0, 0.0, 0.0, 0.0],
            mode: vec![0.0],
        };
        let mut whole = March::new(method, state);
        let events = march(&mut whole, &system, 3.0, 1e-6).unwrap();
        assert_eq!(events.len(), 2);
        let [first, second] = [&events[0], &events[1]];
        assert!((first.before[0] - 3.0).abs() < 1e-5 && first.before[1].abs() < 1e-9);
        assert!((first.after[0] - 1.0).abs() < 2e-6 && (first.after[1] - 1.0).abs() < 2e-6);
        assert!((second.after[0] - 5.0).abs() < 1e-9 && (second.after[1] - 5.0).abs() < 1e-9);
        assert!(
            second.after[2].abs() < 1e-3,
            "no impulse is left: {}",
            second.after[2]
        );
        assert!((whole.state.x[0] - 5.0).abs() < 1e-9);
    }
}

#[test]
fn a_ball_bounces_where_the_closed_form_has_it() {
    // Dropped from 1 m at g = 10 m/s2 with restitution 0.5: impacts at t1 = sqrt(2/g), then t1 (1 + 1), ...
    for method in METHODS {
        let state = State {
            time: 0.0,
            x: vec![1.0, 0.0],
            mode: vec![],
        };
        let mut whole = March::new(method, state);
        let events = march(&mut whole, &Ball::new(0.5), 1.2, 1e-8).unwrap();
        let fall = (0.2_f64).sqrt();
        for (event, known) in events.iter().zip([fall, 2.0 * fall, 2.5 * fall]) {
            assert!(
                (event.time - known).abs() < 1e-6,
                "{}: {} {known}",
                method.name,
                event.time
            );
        }
        let speed = events[0].after[1] / events[0].before[1];
        assert!((speed + 0.5).abs() < 1e-12, "{}: {speed}", method.name);
    }
}

#[test]
fn bounces_without_end_are_a_named_error() {
    // They pile up at 3 t1 = 1.3416 s.
    for method in METHODS {
        let state = State {
            time: 0.0,
            x: vec![1.0, 0.0],
            mode: vec![],
        };
        let error = march(&mut March::new(method, state), &Ball::new(0.5), 2.0, 1e-8).unwrap_err();
        assert_eq!(
            error.cause,
            Trouble::Chattering { guard: Some(0) },
            "{}",
            method.name
        );
        assert!(
            (error.time - 3.0 * (0.2_f64).sqrt()).abs() < 1e-4,
            "{}",
            error.time
        );
    }
}

#[test]
fn events_that_differ_by_rounding_are_one_instant() {
    for method in METHODS {
        let mut system = Sharing::new();
        system.second = 1.0 + 2.0 * f64::EPSILON;
        let state = State {
            time: 0.0,
            x: vec![3.0, 0.0, 0.0, 0.0],
            mode: vec![0.0],
        };
        let events = march(&mut March::new(method, state), &system, 3.0, 1e-6).unwrap();
        assert_eq!(events.len(), 1);
        assert_eq!(events[0].causes, [Cause::Time, Cause::Time]);
        assert!((events[0].after[0] - 5.0).abs() < 1e-9);
    }
}

#[test]
fn an_observer_stops_the_march() {
    let system = Charger::new();
    let tolerances = Tolerances::absolute(vec![1e-6; 2]);
    let state = State {
        time: 0.0,
        x: vec![0.0, 1.0],
        mode: vec![1.0, 0.0],
    };
    let mut whole = March::new(&METHODS[0], state);
    let ending = whole.run(
        &system,
        Span::new(2.0, &tolerances),
        &mut |advance| match advance {
            Advance::Step(step) if step.to > 0.5 => ControlFlow::Break(()),
            _ => ControlFlow::Continue(()),
        },
    );
    assert_eq!(ending, Ok(Ending::Stopped));
    assert!(whole.state.time > 0.5 && whole.state.time < 1.0);
}

/// Two unknowns that grow alike, each with a guard at 1 that turns it round, and a clock that ticks at that very instant.
struct Twins {
    pattern: crate::dae::Pattern,
}

impl System for Twins {
    fn size(&self) -> usize {
        2
    }
    fn pattern(&self) -> &crate::dae::Pattern {
        &self.pattern
    }
    fn evaluate(&self, at: crate::dae::Point<'_>, slopes: bool, out: &mut crate::dae::Evaluation) {
        out.f = vec![at.mode[0], at.mode[1]];
        out.q = at.x.to_vec();
        if slopes {
            out.df = vec![0.0; 2];
            out.dq = vec![1.0; 2];
        }
    }
    fn mode_size(&self) -> usize {
        3
    }
    fn next_event(&self, time: f64, _mode: &[f64]) -> f64 {
        if time < 1.0 { 1.0 } else { f64::INFINITY }
    }
    fn guard_size(&self) -> usize {
        2
    }
    fn guards(&self, at: crate::dae::Point<'_>, out: &mut [f64]) {
        out.copy_from_slice(&[at.x[0] - 1.0, at.x[1] - 1.0]);
    }
    fn transition(&self, cause: Cause, _time: f64, _x: &mut [f64], mode: &mut [f64]) -> bool {
        match cause {
            Cause::Guard(which) => mode[which] = 1.0,
            Cause::Time => mode[2] += 1.0,
        }
        true
    }
}

#[test]
fn guards_that_rise_at_one_instant_are_all_taken_and_the_clocks_event_with_them() {
    for method in METHODS {
        let system = Twins {
            pattern: crate::dae::Pattern::from_positions(2, &[(0, 0), (1, 1)]),
        };
        let state = State {
            time: 0.0,
            x: vec![0.0; 2],
            mode: vec![-1.0, -1.0, 0.0],
        };
        let mut whole = March::new(method, state);
        march(&mut whole, &system, 1.5, 1e-7).unwrap();
        assert_eq!(whole.state.mode, [1.0, 1.0, 1.0], "{}", method.name);
        for x in &whole.state.x {
            assert!((x - 0.5).abs() < 1e-6, "{}: {x}", method.name);
        }
    }
}
