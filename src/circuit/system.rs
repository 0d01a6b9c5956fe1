//! The circuit as the solver sees it.

use super::Circuit;
use crate::dae::{Cause, Evaluation, Pattern, Point, System};
use crate::elements::{Happening, Stamper};

/// Instants closer together than this fraction of the time are one: sources compute them by different roundings.
const SAME_INSTANT: f64 = 1e-13;

fn just_before(time: f64) -> f64 {
    time - SAME_INSTANT * time.abs() - f64::MIN_POSITIVE
}

fn just_after(time: f64) -> f64 {
    time + SAME_INSTANT * time.abs() + f64::MIN_POSITIVE
}

impl System for Circuit {
    fn size(&self) -> usize {
        self.unknowns.len()
    }

    fn pattern(&self) -> &Pattern {
        &self.pattern
    }

    fn evaluate(&self, at: Point<'_>, slopes: bool, out: &mut Evaluation) {
        self.stamp_all(at, 1.0, slopes, out);
    }

    fn evaluate_raised(
        &self,
        at: Point<'_>,
        share: f64,
        slopes: bool,
        out: &mut Evaluation,
    ) -> bool {
        self.stamp_all(at, share, slopes, out);
        true
    }

    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        let mut limited = false;
        for entry in &self.entries {
            limited |= entry.element.limit(x, dx);
        }
        limited
    }

    fn mode_size(&self) -> usize {
        self.mode_size
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let after = just_after(time);
        let next = |entry: &super::Entry| {
            entry
                .element
                .switching()
                .map(|switching| switching.next_event(after, &mode[entry.modes.clone()]))
        };
        self.entries
            .iter()
            .filter_map(next)
            .fold(f64::INFINITY, f64::min)
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        for entry in &self.entries {
            if let Some(switching) = entry.element.switching() {
                switching.earlier(by, &mut mode[entry.modes.clone()]);
            }
        }
    }

    fn guard_size(&self) -> usize {
        self.guard_size
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        for entry in &self.entries {
            if !entry.guards.is_empty()
                && let Some(switching) = entry.element.switching()
            {
                switching.guards(self.own(entry, at), &mut out[entry.guards.clone()]);
            }
        }
    }

    fn transition(&self, cause: Cause, time: f64, x: &mut [f64], mode: &mut [f64]) -> bool {
        let before = mode.to_vec();
        self.take(cause, time, x, mode, &mut |_, _| {});
        before != mode
    }
}

impl Circuit {
    fn stamp_all(&self, at: Point<'_>, share: f64, slopes: bool, out: &mut Evaluation) {
        zeroed(&mut out.f, self.unknowns.len());
        zeroed(&mut out.q, self.unknowns.len());
        if slopes {
            zeroed(&mut out.df, self.pattern.len());
            zeroed(&mut out.dq, self.pattern.len());
        }
        let mut stamper = Stamper::filling(out, &self.slots, slopes).raised(share);
        for entry in &self.entries {
            entry.element.stamp(self.own(entry, at), &mut stamper);
        }
    }

    /// Takes an event and tells what happened at which element; pure, so that an observer may ask again.
    pub fn take(
        &self,
        cause: Cause,
        time: f64,
        x: &mut [f64],
        mode: &mut [f64],
        happened: &mut dyn FnMut(usize, Happening),
    ) {
        for (k, entry) in self.entries.iter().enumerate() {
            let Some(switching) = entry.element.switching() else {
                continue;
            };
            let own = &mut mode[entry.modes.clone()];
            match cause {
                Cause::Time => {
                    // Events of one element may share the instant: an arrival and a command.
                    let mut due = switching.next_event(just_before(time), own);
                    let mut rounds = 0;
                    while due <= just_after(time) && rounds < MOST_AT_ONCE {
                        if let Some(what) = switching.at_instant(due, own) {
                            happened(k, what);
                        }
                        let next = switching.next_event(due, own);
                        if next <= due {
                            break;
                        }
                        due = next;
                        rounds += 1;
                    }
                }
                Cause::Guard(which) if entry.guards.contains(&which) => {
                    if let Some(what) = switching.at_guard(which - entry.guards.start, time, x, own)
                    {
                        happened(k, what);
                    }
                }
                Cause::Guard(_) => {}
            }
        }
    }
}

/// Most events that one element takes within one instant.
const MOST_AT_ONCE: usize = 16;

fn zeroed(values: &mut Vec<f64>, size: usize) {
    values.resize(size, 0.0);
    values.fill(0.0);
}
