//! The clock's events are hit exactly, guards to the accuracy asked, and charges pass through.

use super::problems::Charger;
use crate::dae::{Advance, Cause, METHODS, March, Span, State, Tolerances};
use std::ops::ControlFlow;

#[test]
fn clock_and_guard_events_fall_where_the_closed_form_has_them() {
    for method in METHODS {
        let system = Charger::new();
        let tolerances = Tolerances::absolute(vec![1e-7; 2]);
        let state = State {
            time: 0.0,
            x: vec![0.0, 1.0],
            mode: vec![1.0, 0.0],
        };
        let mut march = March::new(method, state);
        let mut events = Vec::new();
        march
            .run(&system, Span::new(2.0, &tolerances), &mut |advance| {
                if let Advance::Event {
                    time,
                    causes,
                    x_before,
                    x_after,
                    ..
                } = advance
                {
                    events.push((*time, causes.to_vec(), x_before[0], x_after[0], x_after[1]));
                }
                ControlFlow::Continue(())
            })
            .unwrap();
        assert_eq!(events.len(), 2, "{}", method.name);
        assert_eq!(
            (events[0].0, events[0].1.as_slice()),
            (1.0, [Cause::Time].as_slice())
        );
        let full = 1.0 - (-1.0_f64).exp();
        assert!((events[0].3 - full).abs() < 1e-5 && (events[0].4 + events[0].3).abs() < 1e-9);
        let crossed = 1.0 + (full / 0.5).ln();
        assert!(
            (events[1].0 - crossed).abs() < 1e-5,
            "{}: {} for {crossed}",
            method.name,
            events[1].0
        );
        assert!(
            events[1].2 <= 0.5 && events[1].2 > 0.5 - 1e-7,
            "{}: {}",
            method.name,
            events[1].2
        );
        let end = 1.0 - 0.5 * (-(2.0 - crossed)).exp();
        assert!(
            (march.state.x[0] - end).abs() < 1e-5,
            "{}: {} for {end}",
            method.name,
            march.state.x[0]
        );
    }
}
