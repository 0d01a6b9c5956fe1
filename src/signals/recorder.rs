//! What a run keeps of its signals: step after step, the values of all of them at four places; of a long run less.
//!
//! The first steps are kept whole, and so are those after a moment worth a close look. The rest is thinned while it
//! comes (`resample`): straight lines through the first, lowest, highest and last value of each of many equal spans of
//! time. So the record of a run of any length takes bounded memory, a kick keeps its height and its instant, and a plot
//! of the whole run shows what it would of all steps.

use super::piece::Piece;
use super::resample::{Sample, Thinner};
use super::trace::Trace;
use crate::units::Kind;

/// Steps kept whole from the record's start on.
const WHOLE: usize = 10_000;
/// Steps kept whole after a moment worth a close look.
const CLOSE: usize = 2_000;
/// Spans of time of what is thinned: twice as many as plots have columns to draw.
const SPANS: usize = 2_500;

/// Several traces over the same steps.
#[derive(Clone, Debug)]
pub struct Recorder {
    traces: Vec<Trace>,
    /// One per trace while steps are thinned; none while they are kept whole.
    thinners: Vec<Thinner>,
    from: f64,
    until: f64,
    /// Steps still to be kept whole.
    whole: usize,
}

impl Recorder {
    /// Records signals of these names and kinds from an instant [s] on (`record_from`; what comes before is
    /// dropped), in a run that ends at `until` [s].
    pub fn new(signals: impl IntoIterator<Item = (String, Kind)>, from: f64, until: f64) -> Self {
        let traces = signals
            .into_iter()
            .map(|(name, kind)| Trace::new(name, kind))
            .collect();
        Recorder {
            traces,
            thinners: Vec::new(),
            from,
            until,
            whole: WHOLE,
        }
    }

    /// The next steps are worth a close look: they are kept whole.
    pub fn look_closely(&mut self) {
        self.whole = self.whole.max(CLOSE);
        self.join();
    }

    /// Takes one step: its ends [s] and, in the order of the signals, each one's values at `from`, at one and two
    /// thirds and at `to`.
    pub fn step(&mut self, from: f64, to: f64, values: &[[f64; 4]]) {
        // The end that a step has in common with the record's start belongs to the step before.
        if to < self.from || (to == self.from && from < to) {
            return;
        }
        if self.whole == 0 && self.thinners.is_empty() {
            let thinner = Thinner::new(self.from, self.until, 4 * SPANS);
            self.thinners = vec![thinner; self.traces.len()];
        }
        for (k, &values) in values.iter().enumerate().take(self.traces.len()) {
            let Some(piece) = (Piece { from, to, values }).within(self.from, to) else {
                continue;
            };
            match self.thinners.get_mut(k) {
                Some(thinner) => thinner.feed(&piece),
                None => self.traces[k].pieces.push(piece),
            }
        }
        self.whole = self.whole.saturating_sub(1);
    }

    /// Joins what was thinned so far to the traces.
    fn join(&mut self) {
        for (trace, thinner) in self.traces.iter_mut().zip(self.thinners.drain(..)) {
            let samples = thinner.finish();
            trace.pieces.extend(samples.windows(2).map(line));
        }
    }

    /// The traces, at the end.
    pub fn into_traces(mut self) -> Vec<Trace> {
        self.join();
        self.traces
    }
}

/// The straight line from one sample to the next.
fn line(ends: &[Sample]) -> Piece {
    let (a, b) = (ends[0], ends[1]);
    let rise = (b.value - a.value) / 3.0;
    Piece {
        from: a.time,
        to: b.time,
        values: [a.value, a.value + rise, b.value - rise, b.value],
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units;

    #[test]
    fn recording_starts_inside_a_step() {
        let signals = [
            ("a".to_owned(), units::VOLTAGE),
            ("b".to_owned(), units::CURRENT),
        ];
        let mut recorder = Recorder::new(signals, 1.5, 3.0);
        for k in 0..3 {
            let from = f64::from(k);
            let line = [0.0, 1.0, 2.0, 3.0].map(|s| from + s / 3.0);
            recorder.step(from, from + 1.0, &[line, line.map(|v| -v)]);
        }
        let traces = recorder.into_traces();
        assert_eq!(traces[0].span(), Some((1.5, 3.0)));
        assert_eq!(traces[1].pieces.len(), 2);
        assert!((traces[1].pieces[0].first() + 1.5).abs() < 1e-15);
    }

    #[test]
    fn a_step_that_ends_where_the_record_starts_is_left_out() {
        let mut recorder = Recorder::new([("a".to_owned(), units::VOLTAGE)], 1.0, 2.0);
        recorder.step(0.0, 1.0, &[[0.0; 4]]);
        recorder.step(1.0, 1.0, &[[1.0; 4]]);
        recorder.step(1.0, 2.0, &[[2.0; 4]]);
        assert_eq!(recorder.into_traces()[0].pieces.len(), 2);
    }

    /// A needle of one step in a fast ring that is drawn out over many steps, with a jump in the middle.
    fn ring(step: usize) -> f64 {
        let time = step as f64;
        let needle = if step == 70_001 { 5.0 } else { 0.0 };
        let offset = if step >= 50_000 { 0.5 } else { 0.0 };
        (0.3 * time).sin() + offset + needle
    }

    fn long_run(steps: usize, look_at: Option<usize>) -> Vec<Trace> {
        let signal = ("a".to_owned(), units::VOLTAGE);
        let mut recorder = Recorder::new([signal], 0.0, steps as f64);
        for k in 0..steps {
            if look_at == Some(k) {
                recorder.look_closely();
            }
            let (a, b) = (ring(k), ring(k + 1));
            let third = (b - a) / 3.0;
            recorder.step(k as f64, k as f64 + 1.0, &[[a, a + third, b - third, b]]);
        }
        recorder.into_traces()
    }

    #[test]
    fn a_record_does_not_grow_with_the_run() {
        let counts = [200_000, 400_000].map(|steps| long_run(steps, None)[0].pieces.len());
        for count in counts {
            assert!(count <= WHOLE + 4 * SPANS, "{counts:?}");
        }
    }

    #[test]
    fn what_was_thinned_follows_on_and_keeps_its_extremes() {
        let steps = 200_000;
        let trace = &long_run(steps, Some(150_000))[0];
        assert_eq!(trace.span(), Some((0.0, steps as f64)));
        for pair in trace.pieces.windows(2) {
            assert_eq!(pair[0].to, pair[1].from);
            assert_eq!(pair[0].last(), pair[1].first());
        }
        let extremes = trace.pieces.iter().flat_map(|piece| piece.extremes());
        let highest = extremes.max_by(|a, b| a.1.total_cmp(&b.1));
        assert_eq!(highest, Some((70_001.0, ring(70_001))));
        // Whole again where a close look was asked for.
        let close = trace.within(150_000.5, 150_000.0 + CLOSE as f64 - 0.5);
        assert_eq!(close.count(), CLOSE);
    }

    #[test]
    fn a_plot_of_a_thinned_record_is_that_of_all_steps() {
        use crate::signals::resample::thinned;
        let steps = 200_000;
        let whole = Trace {
            pieces: (0..steps)
                .map(|k| {
                    let (a, b) = (ring(k), ring(k + 1));
                    let third = (b - a) / 3.0;
                    Piece {
                        from: k as f64,
                        to: k as f64 + 1.0,
                        values: [a, a + third, b - third, b],
                    }
                })
                .collect(),
            ..Trace::new("a", units::VOLTAGE)
        };
        let columns = |trace: &Trace| thinned(trace, 0.0, steps as f64, 2 * SPANS);
        let (all, few) = (columns(&whole), columns(&long_run(steps, None)[0]));
        let drawn = |samples: &[Sample]| -> Vec<(f64, f64)> {
            samples
                .iter()
                .map(|sample| (sample.time, sample.value))
                .collect()
        };
        assert_eq!(drawn(&all), drawn(&few));
    }
}
