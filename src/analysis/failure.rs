//! Why a simulation could not be completed, in words that name the element and what to try.

use crate::circuit::Circuit;
use crate::dae::{MarchError, StartError, Trouble};
use crate::diag::Diagnostic;
use crate::units::{TIME, engineering};
use std::collections::BTreeSet;

/// Why a simulation could not be completed.
#[derive(Clone, Debug)]
pub enum Failure {
    /// The circuit has no such solution; the netlist is to be changed.
    Refused(Box<Diagnostic>),
    /// The solver gave up.
    Stopped {
        /// The sentence that says what, where and when.
        headline: String,
        /// What to try.
        help: String,
        /// Where the element's name stands, if one is to blame.
        span: Option<crate::diag::Span>,
        /// Simulated time reached [s].
        time: f64,
    },
    /// Somebody stopped it before there was a result.
    Interrupted,
}

impl Failure {
    /// No start was found.
    pub fn start(circuit: &Circuit, error: StartError) -> Self {
        let (whose, span) = blame(circuit, error.unknown, error.cause, "for");
        let cause = match error.cause {
            Trouble::Unsettled => "the equations have no solution near any that was tried".into(),
            cause => cause.to_string(),
        };
        Failure::Stopped {
            headline: format!("no starting state was found{whose}: {cause}"),
            help: remedy(error.cause, &without_start(circuit, error.unknown)),
            span,
            time: 0.0,
        }
    }

    /// No start was found: these guards' switches change one another for ever.
    pub fn restless(circuit: &Circuit, guards: &BTreeSet<usize>) -> Self {
        let entries = circuit.entries.iter();
        let restless: Vec<_> = entries
            .filter(|entry| guards.range(entry.guards.clone()).next().is_some())
            .collect();
        let names: Vec<String> = restless
            .iter()
            .map(|entry| format!("`{}`", entry.name))
            .collect();
        let (headline, help) = if names.len() == 1 {
            (
                format!(
                    "no starting state was found: what {} watches goes back as soon as it switches",
                    names[0]
                ),
                "widen its thresholds, or begin with `start: zero` and let a capacitance slow the signal",
            )
        } else {
            (
                format!(
                    "no starting state was found: {} switch one another for ever",
                    names.join(", ")
                ),
                "an odd number of inversions in a ring has no rest: let capacitances slow the signals and begin with `start: zero`",
            )
        };
        Failure::Stopped {
            headline,
            help: help.into(),
            span: restless.first().map(|entry| entry.span),
            time: 0.0,
        }
    }

    /// The march ended early.
    pub fn march(circuit: &Circuit, error: MarchError) -> Self {
        let (whose, span) = blame(circuit, error.unknown, error.cause, "in");
        let time = engineering(error.time, TIME, 7);
        Failure::Stopped {
            headline: format!("the simulation stopped at {time}{whose}: {}", error.cause),
            help: remedy(error.cause, on_the_way(error.cause)),
            span,
            time: error.time,
        }
    }
}

/// What to look at where no start was found: the elements that meet at the node, or the one whose unknown it is.
fn without_start(circuit: &Circuit, unknown: Option<usize>) -> String {
    let meeting = unknown.map_or(Vec::new(), |unknown| circuit.meeting_at(unknown));
    if meeting.is_empty() {
        return "try `start: zero` in the transient, or look at the element named".into();
    }
    format!(
        "here meet {}: a current may have no way (a diode that blocks it), or gains may contradict each other; \
         a large resistor beside what blocks, or `start: zero` in the transient, may help",
        meeting.join(", ")
    )
}

/// What is to blame, in words behind a preposition, and where it stands.
fn blame(
    circuit: &Circuit,
    unknown: Option<usize>,
    cause: Trouble,
    preposition: &str,
) -> (String, Option<crate::diag::Span>) {
    let explained = match cause {
        Trouble::Chattering { guard } => guard.and_then(|guard| circuit.explain_guard(guard)),
        _ => unknown.map(|unknown| circuit.explain(unknown)),
    };
    let words = explained.as_ref().map_or(String::new(), |explained| {
        format!(" {preposition} {}", explained.words)
    });
    (words, explained.and_then(|explained| explained.span))
}

/// What to try where a march stopped.
fn on_the_way(cause: Trouble) -> &'static str {
    match cause {
        Trouble::NotFinite => {
            "it grows without bound: look for a source that feeds on what it drives (a `gain` round a loop above one), or for a value with a wrong prefix"
        }
        Trouble::Singular => {
            "nothing holds it: ideal sources and gains that cancel each other, or values too many decades apart; a resistance in the loop or from the node to ground holds it"
        }
        _ => {
            "a small capacitance across the element, a longer transition or a looser accuracy may help"
        }
    }
}

/// What to try; a switch that chatters has a remedy of its own.
fn remedy(cause: Trouble, otherwise: &str) -> String {
    match cause {
        Trouble::Chattering { .. } => {
            "the signal that it watches jumps when it switches: widen the thresholds, or let a capacitance slow the signal"
        }
        Trouble::Endless => {
            "something rings or switches very often for this duration: shorten `duration`, damp what rings, or raise `most_steps`"
        }
        _ => otherwise,
    }
    .into()
}
