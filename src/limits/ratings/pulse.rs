//! The energy of the largest pulse.
//!
//! A part is *loud* while it absorbs more than a quiet power that lies between a ten-thousandth and a thousandth of
//! the highest power of the run; what stays below adds at most about a thousandth to a decaying pulse. A pulse goes
//! on through quiet gaps, as when a clamp conducts once in every cycle of a ringing, and ends when the part has been
//! quiet for longer than the pulse lasted. Its energy is all that was absorbed from its first to its last loud
//! instant. A part that is loud all the time has one pulse, the whole run.
//!
//! The highest power is known only at the end; therefore pulses are told apart for every decade of quiet power at
//! once, and the right decade is picked then.

use super::Meter;
use crate::readings::Taken;
use crate::signals::Piece;

/// Powers of ten [W] between which the quiet power lies.
const DECADES: std::ops::RangeInclusive<i32> = -15..=9;

/// Pulses by every decade of quiet power.
pub(super) struct PulseEnergy {
    highest: Option<f64>,
    pulses: Vec<Pulses>,
}

impl Default for PulseEnergy {
    fn default() -> Self {
        let pulses = DECADES
            .map(|decade| Pulses::above(10f64.powi(decade)))
            .collect();
        PulseEnergy {
            highest: None,
            pulses,
        }
    }
}

impl Meter for PulseEnergy {
    fn feed(&mut self, piece: &Piece) {
        let highest = piece
            .extremes()
            .map(|extreme| extreme.1)
            .fold(f64::NEG_INFINITY, f64::max);
        self.highest = Some(self.highest.unwrap_or(0.0).max(highest));
        for pulses in &mut self.pulses {
            pulses.feed(piece, highest);
        }
    }

    fn finish(&self) -> Option<Taken> {
        let quiet = 1e-3 * self.highest?;
        let right = self
            .pulses
            .iter()
            .rev()
            .find(|pulses| pulses.quiet <= quiet);
        Some(
            right
                .or(self.pulses.first())
                .and_then(Pulses::largest)
                .unwrap_or(Taken {
                    value: 0.0,
                    time: None,
                }),
        )
    }
}

/// Pulses above one quiet power.
struct Pulses {
    quiet: f64,
    open: Option<Open>,
    largest: Option<Taken>,
}

/// A pulse that goes on.
#[derive(Clone, Copy)]
struct Open {
    from: f64,
    /// Last loud instant, and the energy up to it.
    loud_until: f64,
    energy: f64,
    /// Energy since then.
    quiet_energy: f64,
}

impl Pulses {
    fn above(quiet: f64) -> Self {
        Pulses {
            quiet,
            open: None,
            largest: None,
        }
    }

    fn feed(&mut self, piece: &Piece, highest: f64) {
        if highest <= self.quiet && self.open.is_none() {
            return;
        }
        let (mut from, mut loud) = (piece.from, piece.first() > self.quiet);
        for crossing in piece.crossings(self.quiet) {
            self.stretch(piece, from, crossing.time, loud);
            (from, loud) = (crossing.time, crossing.rising);
        }
        self.stretch(piece, from, piece.to, loud);
    }

    /// A part of a piece that is loud or quiet throughout.
    fn stretch(&mut self, piece: &Piece, from: f64, to: f64, loud: bool) {
        let energy = piece.within(from, to).map_or(0.0, |part| part.integral());
        match &mut self.open {
            None if loud => {
                self.open = Some(Open {
                    from,
                    loud_until: to,
                    energy,
                    quiet_energy: 0.0,
                })
            }
            None => {}
            Some(open) if loud => {
                open.energy += open.quiet_energy + energy;
                open.quiet_energy = 0.0;
                open.loud_until = to;
            }
            Some(open) => {
                open.quiet_energy += energy;
                if to - open.loud_until > open.loud_until - open.from {
                    self.largest = self.largest();
                    self.open = None;
                }
            }
        }
    }

    /// The largest pulse so far, the open one included.
    fn largest(&self) -> Option<Taken> {
        let open = self.open.map(|open| Taken {
            value: open.energy,
            time: Some(open.from),
        });
        [self.largest, open]
            .into_iter()
            .flatten()
            .reduce(|a, b| if b.value > a.value { b } else { a })
    }
}
