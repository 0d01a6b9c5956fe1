//! The four cases: marched, read, and held against the reference quantities.

use super::buck::{self, Buck};
use super::kinks::Located;
use super::measure::{extremes, integrate, passes};
use super::relay::{self, Relay, Suppressor};
use coilbreak::dae::{
    Advance, Evaluation, March, MarchError, Method, Point, Span, State, Statistics, Step, System,
    Tolerances, consistent_start,
};
use std::ops::ControlFlow;

pub struct Quantity {
    pub name: &'static str,
    pub value: f64,
    pub reference: f64,
    /// What the error is counted against.
    pub scale: f64,
}

impl Quantity {
    pub fn error(&self) -> f64 {
        (self.value - self.reference).abs() / self.scale.abs()
    }
}

pub struct Outcome {
    pub quantities: Vec<Quantity>,
    pub counted: Statistics,
}

pub struct Case {
    pub name: &'static str,
    /// Marches at an accuracy of the whole run and reads.
    pub run: fn(&'static Method, f64) -> Result<Outcome, MarchError>,
    /// Marches alone.
    pub bare: fn(&'static Method, f64),
}

pub const CASES: &[Case] = &[
    Case {
        name: "R1",
        run: |m, l| relay_case(Suppressor::Diode, m, l),
        bare: |m, l| {
            bare(
                &Relay::new(Suppressor::Diode),
                relay_state(Suppressor::Diode),
                60e-3,
                m,
                l,
            )
        },
    },
    Case {
        name: "R2",
        run: |m, l| relay_case(Suppressor::None, m, l),
        bare: |m, l| {
            bare(
                &Relay::new(Suppressor::None),
                relay_state(Suppressor::None),
                60e-3,
                m,
                l,
            )
        },
    },
    Case {
        name: "R2 with the zeros of its flux located",
        run: located_case,
        bare: |m, l| drop(located_case(m, l)),
    },
    Case {
        name: "R3",
        run: |m, l| relay_case(Suppressor::Snubber, m, l),
        bare: |m, l| {
            bare(
                &Relay::new(Suppressor::Snubber),
                relay_state(Suppressor::Snubber),
                60e-3,
                m,
                l,
            )
        },
    },
    Case {
        name: "B",
        run: buck_case,
        bare: |m, l| {
            let buck = Buck::new();
            let state = begin(&buck, buck.start(), buck.off());
            bare(&buck, state, 5e-3, m, l)
        },
    },
];

/// A span whose tolerances serve an accuracy of the whole run.
pub fn whole(until: f64, tolerances: &Tolerances, accuracy: f64) -> Span<'_> {
    Span {
        pile: Method::pile(accuracy),
        ..Span::new(until, tolerances)
    }
}

pub trait Swings {
    fn swings(&self) -> Vec<f64>;
}
impl Swings for Relay {
    fn swings(&self) -> Vec<f64> {
        Relay::swings(self)
    }
}
impl Swings for Buck {
    fn swings(&self) -> Vec<f64> {
        Buck::swings(self)
    }
}

fn tolerances(system: &impl Swings, local: f64) -> Tolerances {
    Tolerances::absolute(
        system
            .swings()
            .into_iter()
            .map(|swing| local * swing)
            .collect(),
    )
}

/// The consistent state with the charges of `x`.
fn begin(system: &(impl System + Swings), mut x: Vec<f64>, mode: Vec<f64>) -> State {
    let (n, slots) = (system.size(), system.pattern().len());
    let mut out = Evaluation {
        f: vec![0.0; n],
        q: vec![0.0; n],
        df: vec![0.0; slots],
        dq: vec![0.0; slots],
    };
    system.evaluate(
        Point {
            time: 0.0,
            x: &x,
            mode: &mode,
        },
        false,
        &mut out,
    );
    consistent_start(
        system,
        0.0,
        &mode,
        &out.q,
        &mut x,
        &tolerances(system, 1e-9),
    )
    .unwrap();
    State { time: 0.0, x, mode }
}

fn relay_state(suppressor: Suppressor) -> State {
    let relay = Relay::new(suppressor);
    begin(&relay, relay.start(), relay.closed())
}

fn bare<S: System + Swings>(
    system: &S,
    state: State,
    until: f64,
    method: &'static Method,
    accuracy: f64,
) {
    let tolerances = tolerances(system, method.local_tolerance(accuracy));
    let _ = March::new(method, state).run(system, whole(until, &tolerances, accuracy), &mut |_| {
        ControlFlow::Continue(())
    });
}

/// Readings of the relay after its switch begins to open.
#[derive(Default)]
struct RelayReadings {
    peak: (f64, f64),
    at_opening: f64,
    at_25ms: f64,
    falls: Option<f64>,
    energies: [f64; 3],
    x: Vec<f64>,
}

impl RelayReadings {
    fn step(&mut self, relay: &Relay, step: &Step<'_>) {
        if step.from < relay::OPENS {
            self.at_opening = step.x1[relay::WINDING];
            return;
        }
        let length = step.to - step.from;
        let high = extremes(step, relay::S)[1];
        if high.0 > self.peak.0 {
            self.peak = (high.0, step.from - relay::OPENS + high.1 * length);
        }
        if step.from <= 25e-3 && step.to > 25e-3 {
            self.at_25ms = step.one_at(25e-3, relay::WINDING).0;
        }
        let level = 0.1 * self.at_opening;
        if self.falls.is_none() && step.x1[relay::WINDING] <= level {
            self.falls =
                Some(step.from - relay::OPENS + length * passes(step, relay::WINDING, level));
        }
        self.x.resize(step.x0.len(), 0.0);
        integrate(step, &mut self.x, &mut self.energies, |time, x| {
            relay.losses(time, x, step.mode)
        });
    }
}

/// The bare relay with the zeros of the flux, where the core's law has a kink, as located events.
fn located_case(method: &'static Method, accuracy: f64) -> Result<Outcome, MarchError> {
    let located = Located {
        system: Relay::new(Suppressor::None),
        unknown: relay::LINKAGE,
    };
    let mut state = relay_state(Suppressor::None);
    state.mode.push(1.0);
    read_relay(&located.system, &located, state, method, accuracy)
}

fn relay_case(
    suppressor: Suppressor,
    method: &'static Method,
    accuracy: f64,
) -> Result<Outcome, MarchError> {
    let relay = Relay::new(suppressor);
    read_relay(&relay, &relay, relay_state(suppressor), method, accuracy)
}

/// Marches `system`, which is `relay` as it is or in a wrapping, and reads.
fn read_relay(
    relay: &Relay,
    system: &impl System,
    state: State,
    method: &'static Method,
    accuracy: f64,
) -> Result<Outcome, MarchError> {
    let mut march = March::new(method, state);
    let mut read = RelayReadings::default();
    let tolerances = tolerances(relay, method.local_tolerance(accuracy));
    march.run(
        system,
        whole(60e-3, &tolerances, accuracy),
        &mut |advance| {
            if let Advance::Step(step) = advance {
                read.step(relay, step);
            }
            ControlFlow::Continue(())
        },
    )?;
    let case = match relay.suppressor {
        Suppressor::Diode => "R1",
        Suppressor::None => "R2",
        Suppressor::Snubber => "R3",
    };
    // The bare kick's current at 25 ms is a phase sample after some 25 rings: against the current at the opening.
    let mut quantities = against(
        case,
        &[
            ("v_peak", read.peak.0),
            ("t_peak", read.peak.1),
            ("i_25ms", read.at_25ms),
            ("t_10pct", read.falls.unwrap_or(f64::NAN)),
            ("E_winding", read.energies[0]),
            ("E_switch", read.energies[1]),
            ("E_suppressor", read.energies[2]),
        ],
    );
    quantities.retain(|quantity| (case, quantity.name) != ("R1", "t_peak"));
    for quantity in &mut quantities {
        if (case, quantity.name) == ("R2", "i_25ms") {
            quantity.scale = read.at_opening;
        }
    }
    Ok(Outcome {
        quantities,
        counted: march.counted,
    })
}

/// Holds readings against the stored references; what has none is left out.
fn against(case: &str, readings: &[(&'static str, f64)]) -> Vec<Quantity> {
    let stored = |name: &str| {
        let mut lines = include_str!("../data/four_circuits.csv").lines();
        let line = lines.find(|line| line.starts_with(&format!("{case},{name},")))?;
        line.split(',').nth(2)?.parse::<f64>().ok()
    };
    let quantity = |&(name, value): &(&'static str, f64)| {
        let reference = stored(name)?;
        Some(Quantity {
            name,
            value,
            reference,
            scale: reference,
        })
    };
    readings.iter().filter_map(quantity).collect()
}

#[derive(Default)]
struct BuckReadings {
    output: [f64; 1],
    high: f64,
    low: f64,
    current: f64,
    diode: [f64; 1],
    diode_late: [f64; 1],
    x: Vec<f64>,
}

fn buck_case(method: &'static Method, accuracy: f64) -> Result<Outcome, MarchError> {
    let buck = Buck::new();
    let state = begin(&buck, buck.start(), buck.off());
    let mut march = March::new(method, state);
    let mut read = BuckReadings {
        low: f64::INFINITY,
        ..BuckReadings::default()
    };
    let tolerances = tolerances(&buck, method.local_tolerance(accuracy));
    march.run(&buck, whole(5e-3, &tolerances, accuracy), &mut |advance| {
        if let Advance::Step(step) = advance {
            read.x.resize(step.x0.len(), 0.0);
            read.current = read.current.max(extremes(step, buck::WINDING)[1].0);
            integrate(step, &mut read.x, &mut read.diode, |_, x| {
                [buck.diode_loss(x)]
            });
            if step.from >= 4.9e-3 - 1e-12 {
                let [low, high] = extremes(step, buck::OUT);
                read.low = read.low.min(low.0);
                read.high = read.high.max(high.0);
                integrate(step, &mut read.x, &mut read.diode_late, |_, x| {
                    [buck.diode_loss(x)]
                });
                integrate(step, &mut read.x, &mut read.output, |_, x| [x[buck::OUT]]);
            }
        }
        ControlFlow::Continue(())
    })?;
    let quantities = against(
        "B",
        &[
            ("vo_mean", read.output[0] / 1e-4),
            ("vo_ripple_pp", read.high - read.low),
            ("i_L_peak", read.current),
            ("P_diode", read.diode_late[0] / 1e-4),
            ("E_diode", read.diode[0]),
        ],
    );
    Ok(Outcome {
        quantities,
        counted: march.counted,
    })
}
