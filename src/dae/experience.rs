//! What the first steps after earlier events have taught, so that the same kind of event costs no search again.
//!
//! A switching circuit passes the same edges thousands of times. The length of the first step that was kept after an
//! edge is remembered by the kind of event: its causes and which modes grew or fell. This is a first guess alone; the
//! error estimate decides as ever.

use super::advance::Advance;
use super::system::Cause;

/// Kinds of events remembered at most; the oldest is forgotten first.
const MOST: usize = 64;

/// One kind of event and its lesson.
#[derive(Clone, Copy, Debug)]
struct Lesson {
    kind: u64,
    length: f64,
    hard: bool,
}

/// Memory of lessons, and the kind of the event whose first step is still to come.
#[derive(Debug, Default)]
pub(crate) struct Experience {
    lessons: Vec<Lesson>,
    oldest: usize,
    waiting: Option<u64>,
}

impl Experience {
    /// An event has been taken: the length of the first step after it and whether it was hard, where one is known.
    pub fn recall(&mut self, event: &Advance<'_>) -> Option<(f64, bool)> {
        let Advance::Event {
            causes,
            mode_before,
            mode_after,
            ..
        } = event
        else {
            return None;
        };
        let kind = kind(causes, mode_before, mode_after);
        self.waiting = Some(kind);
        let lesson = self.lessons.iter().find(|lesson| lesson.kind == kind)?;
        Some((lesson.length, lesson.hard))
    }

    /// A step was kept; `next` is the length that would have been right for it by its error.
    pub fn learn(&mut self, next: f64, hard: bool) {
        let Some(kind) = self.waiting.take() else {
            return;
        };
        let lesson = Lesson {
            kind,
            length: next,
            hard,
        };
        if let Some(known) = self.lessons.iter_mut().find(|lesson| lesson.kind == kind) {
            *known = lesson;
        } else if self.lessons.len() < MOST {
            self.lessons.push(lesson);
        } else {
            self.lessons[self.oldest] = lesson;
            self.oldest = (self.oldest + 1) % MOST;
        }
    }
}

/// A number for the kind of an event (the FNV hash of what it is made of).
fn kind(causes: &[Cause], before: &[f64], after: &[f64]) -> u64 {
    let mut hash = 0xcbf2_9ce4_8422_2325_u64;
    let mut take = |part: u64| hash = (hash ^ part).wrapping_mul(0x0100_0000_01b3);
    for cause in causes {
        take(match cause {
            Cause::Time => 1,
            Cause::Guard(guard) => 2 + *guard as u64,
        });
    }
    for (slot, (before, after)) in before.iter().zip(after).enumerate() {
        if before != after {
            take(2 * slot as u64 + u64::from(after > before));
        }
    }
    hash
}
