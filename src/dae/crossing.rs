//! Guards: which of them rises through zero in a step, and where.

use super::advance::Step;
use super::system::{Point, System};
use super::tolerances::largest;

/// An event is located well enough when the unknowns move by less than this many tolerances between it and the
/// step's end.
const CLOSE: f64 = 0.05;

/// Share of a step by which an event may come late that the clock makes more than the unknowns do: a guard that rises
/// while they stand still.
const LATE: f64 = 1e-6;

/// Points close to the start of a step at which guards are looked at just after an event.
const EARLY: [f64; 3] = [1e-6, 1e-3, 3e-2];

/// What the guards say of a step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Crossing {
    /// No guard rises.
    None,
    /// This guard rises at the step's end.
    Here(usize),
    /// A guard rises within: the step is to be taken anew up to this instant [s].
    Before(f64),
}

/// The guards' values at both ends of a step.
#[derive(Debug)]
pub(crate) struct Watch {
    start: Vec<f64>,
    end: Vec<f64>,
    now: Vec<f64>,
    x: Vec<f64>,
    moved: Vec<f64>,
    /// Where guards are looked at within a step: the method's own points behind its start, ascending.
    points: Vec<f64>,
    /// No step has been kept since the last event.
    fresh: bool,
}

impl Watch {
    pub fn new<S: System + ?Sized>(system: &S) -> Self {
        let guards = vec![0.0; system.guard_size()];
        let x = vec![0.0; system.size()];
        Watch {
            start: guards.clone(),
            end: guards.clone(),
            now: guards,
            moved: x.clone(),
            x,
            points: Vec::new(),
            fresh: true,
        }
    }

    /// True where there are no guards.
    pub fn is_empty(&self) -> bool {
        self.start.is_empty()
    }

    /// The march begins: a guard that is already above zero falls at once.
    pub fn begin<S: System + ?Sized>(&mut self, system: &S, at: Point<'_>) -> Option<usize> {
        system.guards(at, &mut self.start);
        self.fresh = true;
        self.start.iter().position(|&guard| guard > 0.0)
    }

    /// After an event: the first guard that was below zero before it and is not any more, or none. `fired` is not
    /// looked at: it has just been taken.
    pub fn renew<S: System + ?Sized>(
        &mut self,
        system: &S,
        at: Point<'_>,
        fired: Option<usize>,
    ) -> Option<usize> {
        system.guards(at, &mut self.now);
        let mut jumped = None;
        for (k, (start, &now)) in self.start.iter_mut().zip(&self.now).enumerate() {
            let waits = Some(k) != fired && *start < 0.0 && now >= 0.0;
            // Of several the first is taken; the others wait for their turn.
            if waits && jumped.is_some() {
                continue;
            }
            if waits {
                jumped = Some(k);
            }
            *start = now;
        }
        self.fresh = true;
        jumped
    }

    /// The step looked at last is kept. Guards that have risen in it wait for the event at its end, where they are taken.
    pub fn keep(&mut self) {
        for (start, &end) in self.start.iter_mut().zip(&self.end) {
            if *start >= 0.0 || end < 0.0 {
                *start = end;
            }
        }
        self.fresh = false;
    }

    /// Looks for the first guard that rises within the step.
    pub fn look<S: System + ?Sized>(
        &mut self,
        system: &S,
        step: &Step<'_>,
        weights: &[f64],
        located: usize,
    ) -> Crossing {
        let at_end = Point {
            time: step.to,
            x: step.x1,
            mode: step.mode,
        };
        system.guards(at_end, &mut self.end);
        let mut first: Option<(f64, usize)> = None;
        self.points.clear();
        self.points
            .extend(step.dense.points.iter().filter(|&&point| point > 0.0));
        self.points.sort_by(f64::total_cmp);
        for guard in 0..self.start.len() {
            let within = first.map_or(1.0, |found| found.0);
            if let Some(root) = self.root(system, step, guard, within) {
                first = Some((root, guard));
            }
        }
        let Some((root, guard)) = first else {
            return Crossing::None;
        };
        step.dense.at(root, &mut self.x);
        for ((moved, &value), &end) in self.moved.iter_mut().zip(&self.x).zip(step.x1) {
            *moved = value - end;
        }
        let (far, _) = largest(&self.moved, weights);
        let length = step.to - step.from;
        let late = 1.0 - root > LATE && self.clocked(system, step, guard, root);
        if root == 1.0
            || (far <= CLOSE && !late)
            || (1.0 - root) * length <= 4.0 * f64::EPSILON * step.to.abs()
            || located > 10
        {
            return Crossing::Here(guard);
        }
        // Aim a little behind the root, so that the guard has risen at the end of the step taken anew.
        let slope = far / (1.0 - root);
        let share = if late { LATE } else { 0.3 };
        let behind = (0.3 * CLOSE / slope).min(share * (1.0 - root));
        let instant = step.from + (root + behind) * length;
        Crossing::Before(
            instant
                .max(step.from + 4.0 * f64::EPSILON * step.from.abs())
                .min(step.to),
        )
    }

    /// True where most of what the guard has risen by since the root is the clock's doing.
    fn clocked<S: System + ?Sized>(
        &mut self,
        system: &S,
        step: &Step<'_>,
        guard: usize,
        root: f64,
    ) -> bool {
        let at = Point {
            time: step.from + root * (step.to - step.from),
            x: step.x1,
            mode: step.mode,
        };
        system.guards(at, &mut self.now);
        let (risen, end) = (self.end[guard] - self.now[guard], self.end[guard]);
        risen.abs() > 0.5 * end.abs()
    }

    /// Where in the step, up to `within`, this guard first rises: looked for between the polynomial's own points and,
    /// just after an event, close to the start (a guard that has just been taken stands at zero there).
    fn root<S: System + ?Sized>(
        &mut self,
        system: &S,
        step: &Step<'_>,
        guard: usize,
        within: f64,
    ) -> Option<f64> {
        let (mut low, mut below) = (0.0, self.start[guard]);
        let early: &[f64] = if self.fresh && below >= 0.0 {
            &EARLY
        } else {
            &[]
        };
        for k in 0..early.len() + self.points.len() {
            let point = early
                .get(k)
                .copied()
                .unwrap_or_else(|| self.points[k - early.len()]);
            if low >= within {
                return None;
            }
            let above = if point == 1.0 {
                self.end[guard]
            } else {
                self.guard_at(system, step, guard, point)
            };
            if below < 0.0 && above >= 0.0 {
                let root = self.narrow(system, step, guard, (low, below), (point, above));
                return Some(root).filter(|&root| root < within || within == 1.0);
            }
            (low, below) = (point, above);
        }
        None
    }

    fn guard_at<S: System + ?Sized>(
        &mut self,
        system: &S,
        step: &Step<'_>,
        guard: usize,
        s: f64,
    ) -> f64 {
        step.dense.at(s, &mut self.x);
        let time = step.from + s * (step.to - step.from);
        system.guards(
            Point {
                time,
                x: &self.x,
                mode: step.mode,
            },
            &mut self.now,
        );
        self.now[guard]
    }

    /// The zero between a point below and one not below: regula falsi with halving (the Illinois rule).
    fn narrow<S: System + ?Sized>(
        &mut self,
        system: &S,
        step: &Step<'_>,
        guard: usize,
        (mut low, mut below): (f64, f64),
        (mut high, mut above): (f64, f64),
    ) -> f64 {
        let mut side = 0;
        for _ in 0..80 {
            if high - low <= 4.0 * f64::EPSILON || above == 0.0 {
                break;
            }
            let guess = high - above * (high - low) / (above - below);
            let middle = if guess > low && guess < high {
                guess
            } else {
                0.5 * (low + high)
            };
            let value = self.guard_at(system, step, guard, middle);
            if value >= 0.0 {
                (high, above) = (middle, value);
                if side == 1 {
                    below *= 0.5;
                }
                side = 1;
            } else {
                (low, below) = (middle, value);
                if side == -1 {
                    above *= 0.5;
                }
                side = -1;
            }
        }
        high
    }
}
