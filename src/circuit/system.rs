//! The circuit as the solver sees it.

use super::{Actor, Circuit, Entry};
use crate::dae::{Cause, Evaluation, Pattern, Point, System};
use crate::elements::{Happening, Stamper, Switching};

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
        for &k in &self.stamped {
            limited |= self.entries[k].element.limit(x, dx);
        }
        limited
    }

    fn mode_size(&self) -> usize {
        self.mode_size
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        let after = just_after(time);
        self.switching()
            .map(|(_, entry, switching)| switching.next_event(after, &mode[entry.modes.clone()]))
            .fold(f64::INFINITY, f64::min)
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        for (_, entry, switching) in self.switching() {
            switching.earlier(by, &mut mode[entry.modes.clone()]);
        }
    }

    fn guard_size(&self) -> usize {
        self.guard_size
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        for (_, entry, switching) in self.switching() {
            if !entry.guards.is_empty() {
                switching.guards(self.own(entry, at), &mut out[entry.guards.clone()]);
            }
        }
    }

    fn transition(&self, cause: Cause, time: f64, x: &mut [f64], mode: &mut [f64]) -> bool {
        let (before, x_before) = (mode.to_vec(), x.to_vec());
        self.take(cause, time, x, mode, &mut |_, _| {});
        before != mode || x_before != x
    }
}

impl Circuit {
    /// Elements with clockwork or guards, with their indices.
    fn switching(&self) -> impl Iterator<Item = (usize, &Entry, &dyn Switching)> {
        self.switching.iter().filter_map(|&k| {
            let entry = &self.entries[k];
            Some((k, entry, entry.element.switching()?))
        })
    }

    fn stamp_all(&self, at: Point<'_>, share: f64, slopes: bool, out: &mut Evaluation) {
        self.evaluate_linear(at.x, slopes, out);
        let mut stamper = Stamper::filling(out, &self.slots, slopes).raised(share);
        for &k in &self.stamped {
            let entry = &self.entries[k];
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
        happened: &mut dyn FnMut(Actor, Happening),
    ) {
        for (k, entry, switching) in self.switching() {
            let own = &mut mode[entry.modes.clone()];
            match cause {
                Cause::Time => {
                    // Events of one element may share the instant: an arrival and a command.
                    let mut due = switching.next_event(just_before(time), own);
                    let mut rounds = 0;
                    while due <= just_after(time) && rounds < MOST_AT_ONCE {
                        if let Some(what) = switching.at_instant(due, own) {
                            happened(Actor::whole(k), what);
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
                    let which = which - entry.guards.start;
                    if let Some(what) = switching.at_guard(which, time, x, own) {
                        let winding = switching.winding_of_guard(which);
                        happened(Actor { entry: k, winding }, what);
                    }
                }
                Cause::Guard(_) => {}
            }
        }
    }
}

/// Most events that one element takes within one instant.
const MOST_AT_ONCE: usize = 16;
