//! How much of each rating a run uses.
//!
//! A meter is fed the waveform that its rating watches, from the start of the run to its end, and told what its
//! element does; it keeps only what it needs.

mod at_rest;
mod pulse;
mod pulse_power;
mod reverse;
mod switched;

use crate::readings::{Accumulator, Ask, FASTEST_CHANGE, MEAN, PEAK, RMS, Taken};
use crate::signals::{Happening, Piece, RatingKind, Stress};
use serde::Serialize;

/// Measures the stress on one rating.
pub trait Meter: Send {
    /// The next piece of the watched waveform, in order of time.
    fn feed(&mut self, piece: &Piece);
    /// The element opens or closes at `time` [s]; told after the pieces that end there, before those that start.
    fn happened(&mut self, _happening: Happening, _time: f64) {}
    /// The stress so far and its instant; None where it has no bounded value (or nothing was recorded).
    fn finish(&self) -> Option<Taken>;
}

/// One rating during one run.
pub struct RatingMeter {
    rating: &'static RatingKind,
    meter: Option<Box<dyn Meter>>,
}

/// What a run made of a rating. Values are in SI units.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct RatingUse {
    /// The stress; None where it is not evaluated yet or not bounded.
    pub peak: Option<f64>,
    /// What is allowed.
    pub rated: f64,
    /// Stress over allowed; None without a stress.
    pub used: Option<f64>,
    /// Instant [s] of the largest stress, where there is one (a pulse: its start).
    pub time: Option<f64>,
    /// True where the rating is only read and listed.
    #[serde(skip)]
    pub not_evaluated_yet: bool,
}

impl RatingMeter {
    /// Starts to measure a rating.
    pub fn new(rating: &'static RatingKind) -> Self {
        RatingMeter {
            rating,
            meter: meter(rating.stress),
        }
    }

    /// The rating.
    pub fn rating(&self) -> &'static RatingKind {
        self.rating
    }

    /// The next piece of the watched waveform (`RatingKind::watches`), in order of time.
    pub fn feed(&mut self, piece: &Piece) {
        if let Some(meter) = &mut self.meter {
            meter.feed(piece);
        }
    }

    /// The element opens or closes at `time` [s]; told after the pieces that end there, before those that start.
    pub fn happened(&mut self, happening: Happening, time: f64) {
        if let Some(meter) = &mut self.meter {
            meter.happened(happening, time);
        }
    }

    /// What was used of `rated` [SI]; of a pulse with its `width` [s] too.
    pub fn finish(&self, rated: f64, width: Option<f64>) -> RatingUse {
        let taken = self.meter.as_ref().and_then(|meter| meter.finish());
        let taken = taken.map(|taken| Taken {
            value: taken.value * width.map_or(1.0, pulse_power::per_rise),
            ..taken
        });
        let taken = taken.filter(|taken| taken.value.is_finite());
        let used = taken
            .map(|taken| taken.value / rated)
            .filter(|used| used.is_finite());
        RatingUse {
            peak: taken.map(|taken| taken.value),
            rated,
            used,
            time: taken.and_then(|taken| taken.time),
            not_evaluated_yet: self.meter.is_none(),
        }
    }
}

impl RatingUse {
    /// False where the stress is above the rating or has no bound. What is not evaluated yet says nothing.
    pub fn holds(&self) -> bool {
        self.not_evaluated_yet || self.peak.is_some_and(|peak| peak <= self.rated)
    }
}

fn meter(stress: Stress) -> Option<Box<dyn Meter>> {
    let ask = Ask::default();
    Some(match stress {
        Stress::Magnitude => Box::new(Read((PEAK.make)(&ask), |value| value)),
        Stress::Rate => Box::new(Read((FASTEST_CHANGE.make)(&ask), |value| value)),
        Stress::Rms => Box::new(Read((RMS.make)(&ask), |value| value)),
        Stress::Mean => Box::new(Read((MEAN.make)(&ask), f64::abs)),
        Stress::MeanAbsorbed => Box::new(Read((MEAN.make)(&ask), |value| value.max(0.0))),
        Stress::Reverse => Box::new(reverse::Reverse::default()),
        Stress::AtRest => Box::new(at_rest::AtRest::default()),
        Stress::Making => Box::new(switched::Making::default()),
        Stress::Breaking => Box::new(switched::Breaking::default()),
        Stress::PulsePower => Box::new(pulse_power::PulsePower::default()),
        Stress::PulseEnergy => Box::new(pulse::PulseEnergy::default()),
        Stress::NotEvaluatedYet => return None,
    })
}

/// A reading over the whole run, and what is made of its value.
struct Read(Box<dyn Accumulator>, fn(f64) -> f64);

impl Meter for Read {
    fn feed(&mut self, piece: &Piece) {
        self.0.feed(piece);
    }

    fn finish(&self) -> Option<Taken> {
        let taken = self.0.finish()?;
        Some(Taken {
            value: (self.1)(taken.value),
            ..taken
        })
    }
}

#[cfg(test)]
mod tests;
