//! How far each unknown swings: the scale of its tolerance. A pilot run at a loose accuracy finds it.
//!
//! `accuracy` is relative to a waveform's largest swing in the windows of the readings that use it, so an unknown is
//! scaled to its smallest swing in any such window; the others keep up with them, down to a thousandth of their own
//! whole swing.

use crate::circuit::Circuit;
use crate::dae::Step;
use crate::elements::Measure;
use crate::signals::{EventLog, Window};

/// A window in which some unknowns are read.
#[derive(Clone, Debug)]
pub struct Wish {
    /// The window.
    pub window: Window,
    /// The unknowns that the reading is made of.
    pub unknowns: Vec<usize>,
}

/// Smallest share of its whole swing that an unknown of a reading is scaled to: a window in which all is over
/// must not ask for the last digit of nothing.
const LEAST_READ: f64 = 1e-4;
/// The same for an unknown that no reading is made of.
const LEAST_OTHER: f64 = 1e-3;
/// Smallest share of the largest swing of its own measure that any unknown is scaled to.
const LEAST_OF_MEASURE: f64 = 1e-4;

/// Smallest scale of all, in the measure's own unit: below a nanovolt and some thousand electrons a second nothing
/// is to be told from the rounding of a circuit that rests.
fn least_of_all(measure: Measure) -> f64 {
    match measure {
        Measure::Current | Measure::FluxLinkage | Measure::Charge => 1e-15,
        Measure::Flux => 1e-18,
        _ => 1e-9,
    }
}

/// Lowest and highest value of each unknown, over the whole run and within each wish's window.
#[derive(Clone, Debug)]
pub struct Swings {
    wishes: Vec<Wish>,
    /// Beginning and end of each wish's window [s] as soon as they are known.
    bounds: Vec<(Option<f64>, Option<f64>)>,
    whole: Range,
    windows: Vec<Range>,
    middle: Vec<f64>,
}

/// Lowest and highest value of each unknown.
#[derive(Clone, Debug)]
pub(super) struct Range {
    low: Vec<f64>,
    high: Vec<f64>,
}

impl Range {
    pub fn new(size: usize) -> Self {
        Range {
            low: vec![f64::INFINITY; size],
            high: vec![f64::NEG_INFINITY; size],
        }
    }

    pub fn take(&mut self, x: &[f64]) {
        for ((low, high), &value) in self.low.iter_mut().zip(&mut self.high).zip(x) {
            *low = low.min(value);
            *high = high.max(value);
        }
    }

    /// The largest magnitude and the swing, whichever is more; 0 where nothing was seen.
    pub fn largest(&self, unknown: usize) -> f64 {
        let (low, high) = (self.low[unknown], self.high[unknown]);
        if low <= high {
            (high - low).max(high.abs()).max(low.abs())
        } else {
            0.0
        }
    }

    pub fn swing(&self, unknown: usize) -> f64 {
        (self.high[unknown] - self.low[unknown]).max(0.0)
    }
}

impl Swings {
    /// Nothing seen yet.
    pub fn new(size: usize, wishes: Vec<Wish>) -> Self {
        let windows = vec![Range::new(size); wishes.len()];
        Swings {
            bounds: vec![(None, None); wishes.len()],
            wishes,
            whole: Range::new(size),
            windows,
            middle: vec![0.0; size],
        }
    }

    /// Takes a step of the pilot run.
    pub fn step(&mut self, step: &Step<'_>, log: &EventLog) {
        step.at(0.5 * (step.from + step.to), &mut self.middle);
        for x in [step.x0, &self.middle, step.x1] {
            self.whole.take(x);
        }
        let windows = self.wishes.iter().zip(&mut self.bounds);
        for ((wish, (from, to)), range) in windows.zip(&mut self.windows) {
            let Window {
                from: begins,
                to: ends,
            } = &wish.window;
            // A log does not keep every event for ever.
            *from = from.or_else(|| begins.as_ref().map_or(Some(0.0), |begin| begin.time(log)));
            *to = to.or_else(|| ends.as_ref().and_then(|end| end.time(log)));
            let to = to.unwrap_or(f64::INFINITY);
            if from.is_some_and(|from| step.from >= from) && step.to <= to {
                for x in [step.x0, &self.middle, step.x1] {
                    range.take(x);
                }
            }
        }
    }

    /// Scale of each unknown: the swing that its tolerance is relative to.
    pub fn scales(&self, circuit: &Circuit) -> Vec<f64> {
        let size = circuit.unknowns.len();
        let mut scales: Vec<f64> = (0..size).map(|unknown| self.scale(unknown)).collect();
        let mut largest_of = Vec::new();
        for (unknown, claimed) in circuit.unknowns.iter().enumerate() {
            let here = self.whole.largest(unknown);
            match largest_of
                .iter_mut()
                .find(|(measure, _)| *measure == claimed.measure)
            {
                Some((_, largest)) => *largest = f64::max(*largest, here),
                None => largest_of.push((claimed.measure, here)),
            }
        }
        for (unknown, scale) in scales.iter_mut().enumerate() {
            let measure = circuit.unknowns[unknown].measure;
            let found = largest_of.iter().find(|(other, _)| *other == measure);
            let largest = found.map_or(0.0, |(_, largest)| *largest);
            let floor = f64::max(LEAST_OF_MEASURE * largest, least_of_all(measure));
            if self.whole.swing(unknown) < floor {
                *scale = floor;
            }
            *scale = scale.min(circuit.unknowns[unknown].reach);
        }
        scales
    }

    fn scale(&self, unknown: usize) -> f64 {
        let whole = self.whole.swing(unknown);
        let read = self
            .wishes
            .iter()
            .any(|wish| wish.unknowns.contains(&unknown));
        let least = if read { LEAST_READ } else { LEAST_OTHER };
        self.windows
            .iter()
            .map(|range| range.swing(unknown))
            .filter(|&swing| swing > 0.0)
            .fold(whole, f64::min)
            .max(least * whole)
    }
}
