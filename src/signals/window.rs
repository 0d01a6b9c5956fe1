//! Windows: the part of a run that a reading looks at, known piece by piece while the run goes on.
//!
//! At an instant where the signal jumps, a window that begins there takes in the value before the jump, and one
//! that ends there stops at it. So an ideal edge reads as the limit of a steep one, which also starts from the
//! old value at its instant.

use super::event::{EventLog, EventPhrase};
use super::piece::Piece;

/// A point of time in a run.
#[derive(Clone, Debug, PartialEq)]
pub enum Instant {
    /// Simulated time [s].
    Time(f64),
    /// When this happens.
    Event(EventPhrase),
}

impl Instant {
    /// The time [s]; None as long as the event has not happened.
    pub fn time(&self, log: &EventLog) -> Option<f64> {
        match self {
            Instant::Time(time) => Some(*time),
            Instant::Event(event) => log.when(event),
        }
    }
}

/// From one instant to another. Without `from` it is open from the start; without `to`, or as long as `to` has not
/// happened, it lasts to the end of the run.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Window {
    /// Where it begins.
    pub from: Option<Instant>,
    /// Where it ends.
    pub to: Option<Instant>,
}

impl Window {
    /// The window of a single instant.
    pub fn at(instant: Instant) -> Self {
        Window {
            from: Some(instant.clone()),
            to: Some(instant),
        }
    }
}

/// Passes on what lies in a window.
#[derive(Clone, Debug)]
pub struct Gate {
    window: Window,
    from: Option<f64>,
    to: Option<f64>,
    /// End of the last piece before the opening.
    last: Option<(f64, f64)>,
    state: GateState,
}

/// How far a gate has come.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GateState {
    /// Nothing has passed yet.
    Waiting,
    /// Something has passed.
    Open,
    /// The window is over.
    Over,
}

/// What passed a gate of one piece.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Passed {
    /// Start of the window [s], at the first time that something passes.
    pub opened: Option<f64>,
    /// At most two pieces: the value before a jump at the opening, and the cut piece.
    pub pieces: [Option<Piece>; 2],
}

impl Gate {
    /// Nothing has come yet.
    pub fn new(window: Window) -> Self {
        Gate {
            window,
            from: None,
            to: None,
            last: None,
            state: GateState::Waiting,
        }
    }

    /// How far it has come.
    pub fn state(&self) -> GateState {
        self.state
    }

    /// Start and end of the window [s] as far as they are known.
    pub fn bounds(&self) -> (Option<f64>, Option<f64>) {
        (self.from, self.to)
    }

    /// Takes the next piece in order of time. The log holds every event up to and at the piece's start.
    pub fn pass(&mut self, piece: &Piece, log: &EventLog) -> Passed {
        let mut passed = Passed::default();
        if self.state == GateState::Over {
            return passed;
        }
        self.look_up(piece, log);
        let to = self.to.unwrap_or(f64::INFINITY);
        let waiting = self.state == GateState::Waiting;
        if let Some(from) = self.from {
            if waiting {
                let before = self.last.filter(|&(time, _)| time == from && from <= to);
                passed.pieces[0] = before.map(|(time, value)| Piece::instant(time, value));
            }
            let begun = !waiting || passed.pieces[0].is_some();
            // At its end the window stops with the value reached, not with the one after a jump.
            if !(begun && piece.from >= to) {
                passed.pieces[1] = piece.within(from, to);
            }
            let some = passed.pieces.iter().any(Option::is_some);
            if waiting && some {
                passed.opened = Some(from);
                self.state = GateState::Open;
            }
            if piece.to > to || from > to {
                self.state = GateState::Over;
            }
        }
        self.last = Some((piece.to, piece.last()));
        passed
    }

    fn look_up(&mut self, piece: &Piece, log: &EventLog) {
        if self.from.is_none() {
            self.from = match &self.window.from {
                Some(instant) => instant.time(log),
                None => Some(piece.from),
            };
        }
        if self.to.is_none() {
            self.to = self
                .window
                .to
                .as_ref()
                .and_then(|instant| instant.time(log));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::signals::{Happening, Owner};

    /// 0 to 5 s in pieces of one second, each constant at its number.
    fn through(
        window: Window,
        events: &[(&str, Happening, f64)],
    ) -> (Option<f64>, Vec<(f64, f64, f64)>, GateState) {
        let (mut gate, mut log, mut opened, mut out) =
            (Gate::new(window), EventLog::default(), None, Vec::new());
        for k in 0..5 {
            let from = f64::from(k);
            for (element, happening, time) in events.iter().filter(|event| event.2 == from) {
                log.note(&Owner::parse(element), *happening, *time);
            }
            let passed = gate.pass(&Piece::constant(from, from + 1.0, from), &log);
            opened = opened.or(passed.opened);
            out.extend(
                passed
                    .pieces
                    .into_iter()
                    .flatten()
                    .map(|p| (p.from, p.to, p.first())),
            );
        }
        (opened, out, gate.state())
    }

    fn time(from: f64, to: f64) -> Window {
        Window {
            from: Some(Instant::Time(from)),
            to: Some(Instant::Time(to)),
        }
    }

    fn event(text: &str) -> Option<Instant> {
        Some(Instant::Event(EventPhrase::parse(text).expect("an event")))
    }

    #[test]
    fn times_cut_pieces() {
        let (opened, out, state) = through(time(0.5, 2.5), &[]);
        assert_eq!(out, [(0.5, 1.0, 0.0), (1.0, 2.0, 1.0), (2.0, 2.5, 2.0)]);
        assert_eq!((opened, state), (Some(0.5), GateState::Over));
        assert_eq!(through(Window::default(), &[]).1.len(), 5);
        assert_eq!(
            through(time(7.0, 9.0), &[]),
            (None, vec![], GateState::Waiting)
        );
        assert_eq!(through(time(3.0, 2.0), &[]).1, []);
    }

    #[test]
    fn the_value_before_a_jump_counts_at_both_ends() {
        let by_time = through(time(1.0, 2.0), &[]);
        assert_eq!(by_time.1, [(1.0, 1.0, 0.0), (1.0, 2.0, 1.0)]);
        let window = Window {
            from: event("s opens"),
            to: event("s closes"),
        };
        let by_event = through(
            window,
            &[("s", Happening::Opens, 1.0), ("s", Happening::Closes, 2.0)],
        );
        assert_eq!(by_event.1, by_time.1);
        assert_eq!(by_event.0, Some(1.0));
    }

    #[test]
    fn a_single_instant_passes_once() {
        let at = |t| through(Window::at(Instant::Time(t)), &[]).1;
        assert_eq!(at(0.0), [(0.0, 0.0, 0.0)]);
        assert_eq!(at(2.0), [(2.0, 2.0, 1.0)]);
        assert_eq!(at(2.25), [(2.25, 2.25, 2.0)]);
        assert_eq!(at(5.0), [(5.0, 5.0, 4.0)]);
        let by_event = through(
            Window {
                from: event("s opens"),
                to: event("s opens"),
            },
            &[("s", Happening::Opens, 3.0)],
        );
        assert_eq!(by_event.1, [(3.0, 3.0, 2.0)]);
        let start = through(
            Window {
                from: event("s opens"),
                to: event("s opens"),
            },
            &[("s", Happening::Opens, 0.0)],
        );
        assert_eq!(start.1, [(0.0, 0.0, 0.0)]);
    }

    #[test]
    fn an_end_that_never_comes_leaves_the_window_open() {
        let window = Window {
            from: event("s opens 2"),
            to: event("s closes"),
        };
        let events = [("s", Happening::Opens, 1.0), ("s", Happening::Opens, 4.0)];
        let (opened, out, state) = through(window.clone(), &events);
        assert_eq!((opened, state), (Some(4.0), GateState::Open));
        assert_eq!(out, [(4.0, 4.0, 3.0), (4.0, 5.0, 4.0)]);
        assert_eq!(
            through(window, &events[..1]),
            (None, vec![], GateState::Waiting)
        );
    }

    #[test]
    fn an_end_before_the_beginning_leaves_nothing() {
        let window = Window {
            from: event("s opens"),
            to: event("s closes"),
        };
        let events = [("s", Happening::Closes, 1.0), ("s", Happening::Opens, 3.0)];
        assert_eq!(through(window, &events).1, []);
    }
}
