//! Events in the shadows: when they come there, and what they leave in modes and unknowns.

use super::Variations;
use super::events::{Motion, Taken};
use crate::dae::instant::INSTANT;
use crate::dae::system::{Cause, Point, System};

/// Share of a step by which instants may be shifted in finite differences of events.
const OF_STEP: f64 = 0.05;
/// Share of an unknown's scale, or of a mode's value, by which it may be shifted there.
pub(super) const OF_SCALE: f64 = 1e-5;
/// Share of the last step for slopes along the motion.
const ALONG: f64 = 1e-4;
/// Share of the instant itself that such a shift must have, to stand above rounding where the last step was tiny.
const OF_INSTANT: f64 = 1e-10;
/// So many events of one instant are followed in a shadow.
const MOST_AT_ONCE: usize = 64;

impl<S: System + ?Sized> Variations<'_, S> {
    /// A time [s] that is short against the motion and stands above rounding.
    pub(super) fn along(&self, time: f64) -> f64 {
        (ALONG * self.length)
            .max(OF_INSTANT * time.abs())
            .max(INSTANT)
    }

    /// The finite shift of a column's parameter: its shadows', or one that moves nothing far.
    pub(super) fn reach(&self, column: usize, moved: Option<&[f64]>) -> f64 {
        if let Some(shadows) = &self.columns[column] {
            return shadows.step;
        }
        let n = self.scales.len();
        let modes = self.differences.modes();
        let x = moved.unwrap_or(&self.x[column * n..(column + 1) * n]);
        let unknowns = x
            .iter()
            .zip(&self.scales)
            .map(|(x, scale)| x.abs() / (OF_SCALE * scale));
        let row = &self.mode[column * modes..(column + 1) * modes];
        let instants = row
            .iter()
            .zip(&self.differences.instants)
            .filter(|(_, instant)| **instant)
            .map(|(mode, _)| mode.abs())
            .fold(self.shifts[column].abs(), f64::max)
            / (OF_STEP * self.length.max(INSTANT));
        let most = unknowns.fold(instants, f64::max);
        if most > 0.0 { 1.0 / most } else { 1.0 }
    }

    /// A shadow and the modes there; `sign` is 1 or -1.
    pub(super) fn shadow<'s>(
        &'s self,
        system: &'s S,
        column: usize,
        mode: &[f64],
        shift: f64,
    ) -> (&'s S, Vec<f64>) {
        let modes = mode.len();
        let own = match &self.columns[column] {
            Some(shadows) if shift > 0.0 => shadows.more,
            Some(shadows) => shadows.less,
            None => system,
        };
        let row = &self.mode[column * modes..(column + 1) * modes];
        let mode = mode
            .iter()
            .zip(row)
            .map(|(mode, slope)| mode + shift * slope);
        (own, mode.collect())
    }

    /// T of a guard's event.
    pub(super) fn guard_shifts(
        &mut self,
        system: &S,
        guard: usize,
        at: Point<'_>,
        motion: &Motion,
    ) {
        let mut out = vec![0.0; system.guard_size()];
        let mut look = |system: &S, time: f64, x: &[f64], mode: &[f64]| {
            system.guards(Point { time, x, mode }, &mut out);
            out[guard]
        };
        let moved = |x: &[f64], by: &[f64], shift: f64| -> Vec<f64> {
            x.iter().zip(by).map(|(x, by)| x + shift * by).collect()
        };
        let along = self.along(at.time);
        let (late, early) = (at.time + along, at.time - along);
        let rise = look(
            system,
            late,
            &moved(at.x, &motion.x, late - at.time),
            at.mode,
        ) - look(
            system,
            early,
            &moved(at.x, &motion.x, early - at.time),
            at.mode,
        );
        let rise = rise / (late - early);
        for column in 0..self.columns.len() {
            let reach = self.reach(column, None);
            let [more, less] = [reach, -reach].map(|shift| {
                let (shadow, mode) = self.shadow(system, column, at.mode, shift);
                look(shadow, at.time, &moved(at.x, self.x(column), shift), &mode)
            });
            // A guard that does not rise along the motion has no instant that moves smoothly.
            self.shifts[column] = if rise > 0.0 {
                -(more - less) / (2.0 * reach * rise)
            } else {
                0.0
            };
        }
    }

    /// T of a clock's event.
    pub(super) fn clock_shifts(&mut self, system: &S, taken: &Taken<'_>) {
        let limit = self.limit(system, taken);
        for column in 0..self.columns.len() {
            let reach = self.reach(column, None);
            let [more, less] = [reach, -reach].map(|shift| {
                let (shadow, mode) = self.shadow(system, column, taken.before.mode, shift);
                shadow.next_event(self.last_event_of(column, shift), &mode)
            });
            self.shifts[column] = if more <= limit && less <= limit {
                (more - less) / (2.0 * reach)
            } else {
                0.0
            };
        }
    }

    /// Events of a shadow up to here belong to the event at hand: half-way to the next one.
    pub(super) fn limit(&self, system: &S, taken: &Taken<'_>) -> f64 {
        let time = taken.after.time;
        let next = system.next_event(time, taken.after.mode);
        time + 0.5 * (next - time)
    }

    /// Takes the transition in every column's shadows: d(mode)/dp afterwards; for the unknowns the derivatives of
    /// those that jump are returned, one row per column.
    pub(super) fn transitions(
        &mut self,
        system: &S,
        taken: &Taken<'_>,
        motion: Option<&Motion>,
    ) -> Vec<f64> {
        let n = self.scales.len();
        let modes = self.differences.modes();
        let limit = self.limit(system, taken);
        let mut jumped = vec![0.0; self.columns.len() * n];
        let mut rows = vec![0.0; self.mode.len()];
        for column in 0..self.columns.len() {
            let mut slope = self.x(column).to_vec();
            if let Some(motion) = motion {
                for (slope, x) in slope.iter_mut().zip(&motion.x) {
                    *slope += x * self.shifts[column];
                }
            }
            let reach = self.reach(column, Some(&slope));
            let [more, less] = [reach, -reach].map(|shift| {
                let (shadow, mut mode) = self.shadow(system, column, taken.before.mode, shift);
                let mut x: Vec<f64> = taken
                    .before
                    .x
                    .iter()
                    .zip(&slope)
                    .map(|(x, slope)| x + shift * slope)
                    .collect();
                let instant = taken.before.time + shift * self.shifts[column];
                if taken.cause == Cause::Time {
                    let mut next = shadow.next_event(self.last_event_of(column, shift), &mode);
                    for _ in 0..MOST_AT_ONCE {
                        if next > limit || next == f64::INFINITY {
                            break;
                        }
                        shadow.transition(Cause::Time, next, &mut x, &mut mode);
                        next = shadow.next_event(next, &mode);
                    }
                } else {
                    shadow.transition(taken.cause, instant, &mut x, &mut mode);
                }
                (x, mode)
            });
            for row in 0..n {
                jumped[column * n + row] = if taken.jumped[row] == taken.before.x[row] {
                    slope[row]
                } else {
                    (more.0[row] - less.0[row]) / (2.0 * reach)
                };
            }
            for slot in 0..modes {
                let (more, less, held) = (more.1[slot], less.1[slot], taken.after.mode[slot]);
                let lopsided = (more + less - 2.0 * held).abs() > 0.1 * (more - less).abs();
                let rounded = (more + less - 2.0 * held).abs() <= 1e-12 * held.abs();
                rows[column * modes + slot] = if lopsided && !rounded {
                    0.0
                } else {
                    (more - less) / (2.0 * reach)
                };
            }
        }
        self.mode = rows;
        jumped
    }

    /// The instant of a shadow's last event.
    pub(super) fn last_event_of(&self, column: usize, shift: f64) -> f64 {
        self.last_event + shift * self.last_shifts[column]
    }
}
