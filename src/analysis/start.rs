//! Where a simulation begins: at rest or uncharged, with the events of time zero taken.

use super::failure::Failure;
use super::task::Start;
use crate::circuit::checks::without_rest;
use crate::circuit::{Actor, Circuit};
use crate::dae::{
    Cause, Evaluation, Point, Shadows, State, System, Tolerances, Trouble, Variations,
    consistent_start, operating_point,
};
use crate::elements::{Happening, Measure};
use crate::math::Singular;
use std::collections::BTreeSet;

/// Rounds at the start in which all switches follow what they watch at once. Two that hold each other down (a latch) change
/// together for ever; thereafter they go one at a time, as one of them would be the quicker.
const TOGETHER: usize = 16;
/// Rounds one at a time, per switch that watches, before that counts as chattering.
const IN_TURN: usize = 4;

/// Where a run begins.
pub struct Begun {
    /// Before the clock's events of time zero.
    pub rested: State,
    /// After them: a consistent state.
    pub state: State,
    /// What happened at that very instant.
    pub happened: Vec<(Actor, Happening)>,
}

/// A consistent state at time zero, and what happened at that very instant.
pub fn start(circuit: &Circuit, from: Start) -> Result<(State, Vec<(Actor, Happening)>), Failure> {
    let begun = begin(circuit, from)?;
    Ok((begun.state, begun.happened))
}

/// Where a run begins, with the way there.
pub fn begin(circuit: &Circuit, from: Start) -> Result<Begun, Failure> {
    let tolerances = fine(circuit);
    let mut state = State {
        time: 0.0,
        x: vec![0.0; circuit.size()],
        mode: circuit.start_mode(),
    };
    if from == Start::OperatingPoint {
        refuse_without_rest(circuit)?;
    }
    settle_watches(circuit, from, &mut state, &tolerances)?;
    let rested = state.clone();
    let happened = first_instant(circuit, &mut state, &tolerances)?;
    Ok(Begun {
        rested,
        state,
        happened,
    })
}

/// A consistent uncharged state at `time` as if the clock had always run.
pub fn running(circuit: &Circuit, time: f64) -> Result<State, Failure> {
    let mut state = State {
        time,
        x: vec![0.0; circuit.size()],
        mode: circuit.mode_forever(time),
    };
    settle_watches(circuit, Start::Zero, &mut state, &fine(circuit))?;
    Ok(state)
}

/// A run that begins in a state a whole number of periods before time zero, with what happens at that very instant.
pub fn begin_at(circuit: &Circuit, mut state: State) -> Result<Begun, Failure> {
    circuit.earlier(state.time, &mut state.mode);
    state.time = 0.0;
    let rested = state.clone();
    let happened = first_instant(circuit, &mut state, &fine(circuit))?;
    Ok(Begun {
        rested,
        state,
        happened,
    })
}

/// Solves until no watch changes its switch any more.
fn settle_watches(
    circuit: &Circuit,
    from: Start,
    state: &mut State,
    tolerances: &Tolerances,
) -> Result<(), Failure> {
    let mut restless = BTreeSet::new();
    for round in 0..TOGETHER + IN_TURN * circuit.guard_size().max(1) {
        solve(circuit, from, state, tolerances)?;
        let at_once = if round < TOGETHER { usize::MAX } else { 1 };
        let changed = watches_change(circuit, state, at_once);
        if changed.is_empty() {
            return Ok(());
        }
        if round >= TOGETHER {
            restless.extend(changed);
        }
    }
    Err(Failure::restless(circuit, &restless))
}

/// Starts variations where a run begins: at rest the equations themselves tell how the state moves with a parameter, from
/// given charges these do; and charges pass the events of time zero.
///
/// # Errors
/// A start that is not determined.
pub fn vary(
    circuit: &Circuit,
    from: Start,
    begun: &Begun,
    columns: &[Shadows<'_, Circuit>],
    variations: &mut Variations<'_, Circuit>,
) -> Result<(), Failure> {
    let slopes = |of: fn(&Circuit) -> Vec<f64>| -> Vec<Vec<f64>> {
        let slope = |shadows: &Shadows<'_, Circuit>| {
            let (more, less) = (of(shadows.more), of(shadows.less));
            let pairs = more.iter().zip(&less);
            pairs
                .map(|(more, less)| (more - less) / (2.0 * shadows.step))
                .collect()
        };
        columns.iter().map(slope).collect()
    };
    for (column, modes) in slopes(Circuit::start_mode).iter().enumerate() {
        variations.mode_mut(column).copy_from_slice(modes);
    }
    let failed = |singular: Singular| {
        let cause = Trouble::Singular;
        Failure::start(
            circuit,
            crate::dae::StartError {
                unknown: Some(singular.column),
                cause,
            },
        )
    };
    let rested = begun.rested.point();
    match from {
        Start::OperatingPoint => variations.start_at_rest(circuit, rested),
        Start::Zero | Start::SteadyState => {
            let charges = slopes(Circuit::initial_charges).concat();
            variations.start_from_charges(circuit, rested, &charges)
        }
    }
    .map_err(failed)?;
    if begun.rested.mode != begun.state.mode {
        let charges = (0..columns.len()).flat_map(|column| variations.q(column).to_vec());
        let charges: Vec<f64> = charges.collect();
        variations
            .start_from_charges(circuit, begun.state.point(), &charges)
            .map_err(failed)?;
    }
    Ok(())
}

/// The state with which a march sets out: with the currents that flow from the first instant on (a source that moves
/// from there drives a current through a capacitor across it, which at rest carries none).
pub fn set_out(circuit: &Circuit, from: Start, mut state: State) -> State {
    if from == Start::OperatingPoint {
        let mut out = Evaluation::default();
        circuit.evaluate(state.point(), false, &mut out);
        let mut x = state.x.clone();
        let (time, fine) = (state.time, fine(circuit));
        let found = consistent_start(circuit, time, &state.mode, &out.q, &mut x, &fine);
        // Rest is a sound start as well; the first step finds what is missing.
        if found.is_ok() {
            state.x = x;
        }
    }
    state
}

/// The state at rest with given modes; no event is taken.
pub fn at_rest(circuit: &Circuit, mode: Vec<f64>) -> Result<State, Failure> {
    let mut state = State {
        time: 0.0,
        x: vec![0.0; circuit.size()],
        mode,
    };
    refuse_without_rest(circuit)?;
    solve(circuit, Start::OperatingPoint, &mut state, &fine(circuit))?;
    Ok(state)
}

/// Refuses, by name, a circuit whose structure allows no state at rest.
fn refuse_without_rest(circuit: &Circuit) -> Result<(), Failure> {
    match without_rest(circuit) {
        Some(diagnostic) => Err(Failure::Refused(Box::new(diagnostic))),
        None => Ok(()),
    }
}

fn solve(
    circuit: &Circuit,
    from: Start,
    state: &mut State,
    tolerances: &Tolerances,
) -> Result<(), Failure> {
    match from {
        Start::OperatingPoint => {
            let nodes: Vec<usize> = (0..circuit.node_names.len()).collect();
            operating_point(
                circuit,
                state.time,
                &state.mode,
                &mut state.x,
                tolerances,
                &nodes,
            )
        }
        // A periodic state is looked for from an uncharged one.
        Start::Zero | Start::SteadyState => {
            let charges = circuit.initial_charges();
            consistent_start(
                circuit,
                state.time,
                &state.mode,
                &charges,
                &mut state.x,
                tolerances,
            )
        }
    }
    .map(|_| ())
    .map_err(|error| Failure::start(circuit, error))
}

/// Tolerances of a starting state: far below anything that a run resolves.
fn fine(circuit: &Circuit) -> Tolerances {
    let absolute = circuit
        .unknowns
        .iter()
        .map(|unknown| match unknown.measure {
            Measure::Voltage => 1e-7,
            Measure::Current => 1e-10,
            Measure::FluxLinkage => 1e-11,
            Measure::Flux => 1e-14,
            _ => 1e-9,
        })
        .collect();
    Tolerances {
        absolute,
        relative: 1e-8,
        memory: f64::INFINITY,
    }
}

/// Lets every watch whose threshold is passed already change its switch, the first `most` of them; their guards.
fn watches_change(circuit: &Circuit, state: &mut State, most: usize) -> Vec<usize> {
    let mut guards = vec![-1.0; circuit.guard_size()];
    circuit.guards(state.point(), &mut guards);
    let mut changed = Vec::new();
    for (which, guard) in guards.iter().enumerate() {
        let cause = Cause::Guard(which);
        if *guard >= 0.0
            && changed.len() < most
            && circuit.transition(cause, state.time, &mut state.x, &mut state.mode)
        {
            changed.push(which);
        }
    }
    if !changed.is_empty() {
        // At a start a switch is where it is commanded to be, not on its way.
        for entry in &circuit.entries {
            if let (Some(switching), false) = (entry.element.switching(), entry.guards.is_empty()) {
                let own = &mut state.mode[entry.modes.clone()];
                let due = switching.next_event(state.time, own);
                if due.is_finite() {
                    switching.at_instant(due, own);
                }
            }
        }
    }
    changed
}

/// Takes the clock's events of time zero.
fn first_instant(
    circuit: &Circuit,
    state: &mut State,
    tolerances: &Tolerances,
) -> Result<Vec<(Actor, Happening)>, Failure> {
    let mut happened = Vec::new();
    let before = state.mode.clone();
    circuit.take(
        Cause::Time,
        0.0,
        &mut state.x,
        &mut state.mode,
        &mut |k, what| happened.push((k, what)),
    );
    if before == state.mode {
        return Ok(happened);
    }
    let mut out = Evaluation::default();
    circuit.evaluate(
        Point {
            time: 0.0,
            x: &state.x,
            mode: &before,
        },
        false,
        &mut out,
    );
    consistent_start(circuit, 0.0, &state.mode, &out.q, &mut state.x, tolerances)
        .map_err(|error| Failure::start(circuit, error))?;
    Ok(happened)
}
