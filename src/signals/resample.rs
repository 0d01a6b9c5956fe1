//! Thinning for plots and tables: fewer points, with every highest and lowest value kept.
//!
//! Time is cut into equal buckets. Of each bucket the first, lowest, highest and last value stay, with their
//! instants, so that a kick of a microsecond in a run of a second is still as high as it was.

use super::piece::Piece;
use super::trace::{Side, Trace};

/// A point of a waveform.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sample {
    /// Instant [s].
    pub time: f64,
    /// Value [SI].
    pub value: f64,
    /// Which of two values at a jump it is.
    pub side: Side,
}

/// Thins a waveform while it comes, in memory that does not grow with the number of pieces.
#[derive(Clone, Debug)]
pub struct Thinner {
    from: f64,
    to: f64,
    width: f64,
    count: usize,
    bucket: Option<Bucket>,
    samples: Vec<Sample>,
}

/// First, lowest, highest and last sample, each with its place in the sequence of those seen.
#[derive(Clone, Copy, Debug)]
struct Bucket {
    index: usize,
    seen: usize,
    kept: [(usize, Sample); 4],
}

impl Thinner {
    /// Keeps at most `points` samples (but at least four) of the time from `from` to `to` [s].
    pub fn new(from: f64, to: f64, points: usize) -> Self {
        let count = (points / 4).max(1);
        Thinner {
            from,
            to,
            width: (to - from) / count as f64,
            count,
            bucket: None,
            samples: Vec::new(),
        }
    }

    /// Takes the next piece in order of time; what lies outside is left out.
    pub fn feed(&mut self, piece: &Piece) {
        let Some(piece) = piece.within(self.from, self.edge(self.count)) else {
            return;
        };
        let (first, last) = (self.index(piece.from), self.index(piece.to));
        for index in first..=last {
            let from = if index == first {
                piece.from
            } else {
                self.edge(index)
            };
            let to = if index == last {
                piece.to
            } else {
                self.edge(index + 1)
            };
            if let Some(part) = piece.within(from, to) {
                self.take(index, &part);
            }
        }
    }

    /// The samples in order of time.
    pub fn finish(mut self) -> Vec<Sample> {
        self.flush();
        self.samples
    }

    fn take(&mut self, index: usize, part: &Piece) {
        if self.bucket.is_none_or(|bucket| bucket.index != index) {
            self.flush();
        }
        for (k, (time, value)) in part.extremes().enumerate() {
            let side = if k == 0 { Side::After } else { Side::Before };
            let sample = Sample { time, value, side };
            match &mut self.bucket {
                Some(bucket) => bucket.take(sample),
                None => {
                    self.bucket = Some(Bucket {
                        index,
                        seen: 0,
                        kept: [(0, sample); 4],
                    })
                }
            }
        }
    }

    fn flush(&mut self) {
        let Some(mut bucket) = self.bucket.take() else {
            return;
        };
        bucket.kept.sort_by_key(|(place, _)| *place);
        for (_, sample) in bucket.kept {
            let same = |last: &Sample| last.time == sample.time && last.value == sample.value;
            if !self.samples.last().is_some_and(same) {
                self.samples.push(sample);
            }
        }
    }

    /// Start of a bucket; of the one after the last, the end.
    fn edge(&self, index: usize) -> f64 {
        if index < self.count {
            self.from + self.width * index as f64
        } else {
            self.to
        }
    }

    /// Bucket of an instant; the end belongs to the last one.
    fn index(&self, time: f64) -> usize {
        // Negative, not a number (no width) and too large are all held to the range by the cast and `min`.
        (((time - self.from) / self.width) as usize).min(self.count - 1)
    }
}

impl Bucket {
    fn take(&mut self, sample: Sample) {
        self.seen += 1;
        let [_, lowest, highest, last] = &mut self.kept;
        *last = (self.seen, sample);
        if sample.value < lowest.1.value {
            *lowest = *last;
        }
        if sample.value > highest.1.value {
            *highest = *last;
        }
    }
}

/// Thins a trace to at most `points` samples within `[from, to]` [s]. For a plot, four times the number of its
/// columns leaves nothing to be seen.
pub fn thinned(trace: &Trace, from: f64, to: f64, points: usize) -> Vec<Sample> {
    let mut thinner = Thinner::new(from, to, points);
    trace
        .within(from, to)
        .for_each(|piece| thinner.feed(&piece));
    thinner.finish()
}

/// A line of a table of waveforms: an instant [s] and the value of each trace there.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Instant [s].
    pub time: f64,
    /// One value per trace [SI]; not a number where a trace is empty.
    pub values: Vec<f64>,
}

/// Several traces over their common times, at most `rows` lines (but at least four per trace): every instant that
/// one of them needs, so that each keeps its highest and lowest values. A jump takes two lines of one instant.
pub fn rows(traces: &[Trace], from: f64, to: f64, rows: usize) -> Vec<Row> {
    let share = rows / traces.len().max(1);
    let mut places: Vec<(f64, Side)> = traces
        .iter()
        .flat_map(|trace| thinned(trace, from, to, share))
        .flat_map(|sample| [(sample.time, Side::Before), (sample.time, Side::After)])
        .collect();
    places.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    places.dedup();
    let mut lines: Vec<Row> = Vec::with_capacity(places.len() / 2 + 1);
    for (time, side) in places {
        // The record's own ends have one side only.
        let outside = (time <= from && side == Side::Before) || (time >= to && side == Side::After);
        let values: Vec<f64> = traces
            .iter()
            .map(|trace| trace.value_at(time, side).unwrap_or(f64::NAN))
            .collect();
        let row = Row { time, values };
        if !outside && lines.last() != Some(&row) {
            lines.push(row);
        }
    }
    lines
}

#[cfg(test)]
mod tests;
