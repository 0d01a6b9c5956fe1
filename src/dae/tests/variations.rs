//! Variations are the derivatives of the solution: against closed forms, and against differences of whole marches.

use super::problems::{Ball, Charger, Sharing, Written};
use crate::dae::{
    Advance, Cause, Evaluation, METHODS, March, Method, Pattern, Point, Shadows, Span, State,
    System, Tolerances, Variations,
};
use std::ops::ControlFlow;

/// Tolerance of the marches.
const FINE: f64 = 1e-11;

/// Marches to `until` with columns; events' shifts of the last column, and the columns at the end.
fn carry(
    method: &'static Method,
    system: &dyn System,
    columns: Vec<Option<Shadows<'_, dyn System + '_>>>,
    charges: &[f64],
    state: State,
    (until, tolerance): (f64, f64),
) -> (Vec<f64>, Vec<Vec<f64>>, State) {
    let n = system.size();
    let tolerances = Tolerances::absolute(vec![tolerance; n]);
    let count = columns.len();
    let mut variations = Variations::new(system, columns, vec![1.0; n]);
    variations
        .start_from_charges(system, state.point(), charges)
        .unwrap();
    let mut march = March::new(method, state);
    let mut shifts = Vec::new();
    march
        .run_varied(
            system,
            Span::new(until, &tolerances),
            Some(&mut variations),
            &mut |advance| {
                if let Advance::Event {
                    varied: Some(moved),
                    ..
                } = advance
                {
                    shifts.push(*moved.shifts.last().unwrap());
                }
                ControlFlow::Continue(())
            },
        )
        .unwrap();
    let rows = (0..count).map(|k| variations.x(k).to_vec()).collect();
    (shifts, rows, march.state)
}

/// Unknowns at the end of a march without columns.
fn end(method: &'static Method, system: &dyn System, state: State, until: f64) -> Vec<f64> {
    let tolerances = Tolerances::absolute(vec![FINE; system.size()]);
    let mut march = March::new(method, state);
    march
        .run(system, Span::new(until, &tolerances), &mut |_| {
            ControlFlow::Continue(())
        })
        .unwrap();
    march.state.x
}

fn close(method: &Method, what: &str, found: f64, known: f64) {
    let error = (found - known).abs();
    assert!(
        error <= 1e-6 * known.abs().max(1e-3),
        "{} {what}: {found} for {known}",
        method.name
    );
}

/// q = C v discharged through R: parameters in q and in f.
fn discharge(resistance: f64, capacitance: f64) -> impl System {
    Written::new(1, move |_, x, q, f, dq, df| {
        (q[0], f[0]) = (capacitance * x[0], x[0] / resistance);
        (dq[0], df[0]) = (capacitance, 1.0 / resistance);
    })
}

#[test]
fn a_discharge_moves_with_resistance_and_capacitance_as_its_closed_form_does() {
    // v = v0 exp(-t/(R C)) with v0 kept: dv/dR = v t/(R^2 C), dv/dC = v t/(R C^2), dv/dv0 = v/v0.
    let (r, c, v0, t) = (2.0, 0.7, 3.0, 1.1);
    for method in METHODS {
        let system = discharge(r, c);
        let (more, less) = (
            discharge(r * (1.0 + 1e-5), c),
            discharge(r * (1.0 - 1e-5), c),
        );
        let by_resistance: Shadows<'_, dyn System> = Shadows {
            more: &more,
            less: &less,
            step: 1e-5 * r,
        };
        let (more, less) = (
            discharge(r, c * (1.0 + 1e-5)),
            discharge(r, c * (1.0 - 1e-5)),
        );
        let by_capacitance: Shadows<'_, dyn System> = Shadows {
            more: &more,
            less: &less,
            step: 1e-5 * c,
        };
        let state = State {
            time: 0.0,
            x: vec![v0],
            mode: vec![],
        };
        let columns = vec![Some(by_resistance), Some(by_capacitance), None];
        // The voltage stands still: dq/dC = v0.
        let (_, found, state) = carry(method, &system, columns, &[0.0, v0, c], state, (t, FINE));
        let v = v0 * (-t / (r * c)).exp();
        close(method, "v", state.x[0], v);
        close(method, "dv/dR", found[0][0], v * t / (r * r * c));
        close(method, "dv/dC", found[1][0], v * t / (r * c * c));
        close(method, "dv/dv0", found[2][0], v / v0);
    }
}

#[test]
fn derivatives_between_the_ends_of_steps_follow_the_closed_form() {
    let (r, c) = (2.0, 0.7);
    for method in METHODS {
        let system = discharge(r, c);
        let tolerances = Tolerances::absolute(vec![1e-9]);
        let mut variations = Variations::new(&system, vec![None], vec![1.0]);
        let state = State {
            time: 0.0,
            x: vec![1.0],
            mode: vec![],
        };
        variations
            .start_from_charges(&system, state.point(), &[c])
            .unwrap();
        let mut worst = 0.0_f64;
        March::new(method, state)
            .run_varied(
                &system,
                Span::new(2.0, &tolerances),
                Some(&mut variations),
                &mut |advance| {
                    if let Advance::Step(step) = advance {
                        let varied = step.varied.unwrap();
                        for share in [0.0, 0.2, 0.5, 0.8, 1.0] {
                            let time = step.from + share * (step.to - step.from);
                            let (value, slope) = varied.dense(0).one(share, 0, 1);
                            let known = (-time / (r * c)).exp();
                            worst = worst.max((value - known).abs());
                            let slope = slope / (step.to - step.from);
                            worst = worst.max(1e-2 * (slope + known / (r * c)).abs());
                        }
                    }
                    ControlFlow::Continue(())
                },
            )
            .unwrap();
        assert!(worst < 2e-6, "{}: {worst:e}", method.name);
    }
}

#[test]
fn a_guard_and_the_instant_that_it_makes_move_with_the_start() {
    // Up to time 1 towards 1 V, then down to 0.5 V at 1 + ln(v1/0.5), then towards 1 V again.
    for method in METHODS {
        let start = |v: f64| State {
            time: 0.0,
            x: vec![v, 1.0 - v],
            mode: vec![1.0, 0.0],
        };
        let system = Charger::new();
        let (shifts, found, _) = carry(
            method,
            &system,
            vec![None],
            &[1.0, 0.0],
            start(0.2),
            (2.0, FINE),
        );
        let v1 = 1.0 - 0.8 * (-1.0_f64).exp();
        let crossed = 1.0 + (v1 / 0.5).ln();
        let shift = (-1.0_f64).exp() / v1;
        close(method, "clock", shifts[0], 0.0);
        close(method, "instant", shifts[1], shift);
        close(
            method,
            "end",
            found[0][0],
            -0.5 * (-(2.0 - crossed)).exp() * shift,
        );
        close(
            method,
            "current",
            found[0][1],
            0.5 * (-(2.0 - crossed)).exp() * shift,
        );
    }
}

#[test]
fn impacts_move_with_height_and_speed_as_the_closed_form_does() {
    // From height z at speed v: impact after (v + w)/g at speed w = sqrt(v^2 + 2 g z); then a throw at r w.
    for method in METHODS {
        let (z, v, g, r, t) = (1.0, 0.3, 10.0, 0.5, 0.8);
        let state = State {
            time: 0.0,
            x: vec![z, v],
            mode: vec![],
        };
        let directions = [1.0, 0.0, 0.0, 1.0];
        let (shifts, found, _) = carry(
            method,
            &Ball::new(r),
            vec![None, None],
            &directions,
            state,
            (t, FINE),
        );
        let w = f64::sqrt(v * v + 2.0 * g * z);
        for (k, (dw, dv)) in [(g / w, 0.0), (v / w, 1.0)].into_iter().enumerate() {
            let (hit, dhit) = ((v + w) / g, (dv + dw) / g);
            let dspeed = r * dw + g * dhit;
            let dheight = r * dw * (t - hit) - (r * w - g * (t - hit)) * dhit;
            close(method, "height", found[k][0], dheight);
            close(method, "speed", found[k][1], dspeed);
            if k == 1 {
                close(method, "impact", shifts[0], dhit);
            }
        }
    }
}

#[test]
fn capacitors_that_meet_share_what_they_are_given_more() {
    for method in METHODS {
        let state = State {
            time: 0.0,
            x: vec![3.0, 0.0, 0.0, 0.0],
            mode: vec![0.0],
        };
        let mut system = Sharing::new();
        system.second = 9.0;
        let directions = [1.0, 0.0, 0.0, 0.0, 0.0, 2.0, 0.0, 0.0];
        let (_, found, _) = carry(
            method,
            &system,
            vec![None, None],
            &directions,
            state.clone(),
            (1.5, 1e-7),
        );
        for (row, share) in found.iter().zip([1.0 / 3.0, 2.0 / 3.0]) {
            for voltage in &row[..2] {
                assert!((voltage - share).abs() < 1e-5, "{}: {row:?}", method.name);
            }
        }
        // Put across a source, nothing of it is left.
        system.second = 2.0;
        let (_, found, _) = carry(
            method,
            &system,
            vec![None, None],
            &directions,
            state,
            (2.5, 1e-7),
        );
        for row in &found {
            assert!(
                row.iter().all(|value| value.abs() < 1e-9),
                "{}: {row:?}",
                method.name
            );
        }
    }
}

/// A capacitor of 1 F that a current charges; where it passes a level, a source of current sets out on a ramp from what
/// it gives then (`memory`), which lasts `ramp` and ends in a fixed current that draws it down; at a clock's instant
/// `period` the source jumps back.
struct Ramped {
    pattern: Pattern,
    level: f64,
    ramp: f64,
    drain: f64,
    period: f64,
}

impl Ramped {
    fn new([level, ramp, drain, period]: [f64; 4]) -> Self {
        Ramped {
            pattern: Pattern::from_positions(2, &[(0, 0), (0, 1), (1, 0), (1, 1)]),
            level,
            ramp,
            drain,
            period,
        }
    }
    fn parameters(&self) -> [f64; 4] {
        [self.level, self.ramp, self.drain, self.period]
    }
}

impl System for Ramped {
    fn size(&self) -> usize {
        2
    }
    fn pattern(&self) -> &Pattern {
        &self.pattern
    }
    /// x0 [V], x1: source's current [A]. mode: 0 charging, 1 on the ramp, 2 draining; since; current left from.
    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        let (v, i) = (at.x[0], at.x[1]);
        let given = match at.mode[0] {
            0.0 => 1.0,
            1.0 => at.mode[2] - (at.mode[2] + self.drain) * (at.time - at.mode[1]) / self.ramp,
            _ => -self.drain,
        };
        out.q.copy_from_slice(&[v + 0.1 * v * v, 0.0]);
        out.f
            .copy_from_slice(&[0.3 * v - i, i - given * (1.0 + 0.2 * v)]);
        if slopes {
            out.dq.copy_from_slice(&[1.0 + 0.2 * v, 0.0, 0.0, 0.0]);
            out.df.copy_from_slice(&[0.3, -0.2 * given, -1.0, 1.0]);
        }
    }
    fn mode_size(&self) -> usize {
        4
    }
    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let clock = self.period * (mode[3] + 1.0);
        let arrival = if mode[0] == 1.0 {
            mode[1] + self.ramp
        } else {
            f64::INFINITY
        };
        let clock = if clock > time {
            clock
        } else {
            clock + self.period
        };
        clock.min(arrival)
    }
    fn guard_size(&self) -> usize {
        1
    }
    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        out[0] = if at.mode[0] == 0.0 {
            at.x[0] - self.level
        } else {
            -1.0
        };
    }
    fn transition(&self, cause: Cause, time: f64, x: &mut [f64], mode: &mut [f64]) -> bool {
        if let Cause::Guard(_) = cause {
            (mode[0], mode[1], mode[2]) = (1.0, time, 0.5 * x[1]);
        } else if mode[0] == 1.0 && time == mode[1] + self.ramp {
            mode[0] = 2.0;
        } else {
            (mode[0], mode[3]) = (0.0, mode[3] + 1.0);
        }
        true
    }
}

#[test]
fn columns_are_the_differences_of_whole_marches() {
    // Two and a half periods: guards that write instants and levels into the modes, ramps that arrive, a clock whose
    // instants depend on a parameter, jumps of the drive.
    let base = [0.7, 0.4, 0.35, 1.3];
    let begin = |v: f64| State {
        time: 0.0,
        x: vec![v, 1.0 + 0.2 * v],
        mode: vec![0.0; 4],
    };
    for method in METHODS.iter().filter(|method| method.order > 2) {
        let system = Ramped::new(base);
        let with = |k: usize, share: f64| {
            let mut parameters = system.parameters();
            parameters[k] *= 1.0 + share;
            Ramped::new(parameters)
        };
        let near: Vec<_> = (0..4).map(|k| (with(k, 1e-5), with(k, -1e-5))).collect();
        let mut columns: Vec<Option<Shadows<'_, dyn System>>> = near
            .iter()
            .enumerate()
            .map(|(k, (more, less))| {
                Some(Shadows {
                    more: more as &dyn System,
                    less: less as &dyn System,
                    step: 1e-5 * base[k],
                })
            })
            .collect();
        columns.push(None);
        let mut charges = vec![0.0; 10];
        charges[8] = 1.0 + 0.2 * 0.1;
        let (_, found, _) = carry(method, &system, columns, &charges, begin(0.1), (3.2, FINE));
        for k in 0..5 {
            let step = if k < 4 { 2e-4 * base[k] } else { 2e-4 };
            let at = |sign: f64| {
                if k < 4 {
                    end(method, &with(k, sign * 2e-4), begin(0.1), 3.2)
                } else {
                    end(method, &system, begin(0.1 + sign * 2e-4), 3.2)
                }
            };
            let differences = |scale: f64| -> Vec<f64> {
                at(scale)
                    .iter()
                    .zip(&at(-scale))
                    .map(|(a, b)| (a - b) / (2.0 * scale * step))
                    .collect()
            };
            // Extrapolated: the error of the plain difference falls with the square of the step.
            let (wide, narrow) = (differences(2.0), differences(1.0));
            for unknown in 0..2 {
                let known = (4.0 * narrow[unknown] - wide[unknown]) / 3.0;
                close(
                    method,
                    &format!("column {k}, unknown {unknown}"),
                    found[k][unknown],
                    known,
                );
            }
        }
    }
}
