//! What a run keeps of its signals: step after step, the values of all of them at four places.

use super::piece::Piece;
use super::trace::Trace;
use crate::units::Kind;

/// Several traces over the same steps.
#[derive(Clone, Debug)]
pub struct Recorder {
    traces: Vec<Trace>,
    from: f64,
}

impl Recorder {
    /// Records signals of these names and kinds from an instant [s] on (`record_from`; what comes before is
    /// dropped).
    pub fn new(signals: impl IntoIterator<Item = (String, Kind)>, from: f64) -> Self {
        let traces = signals
            .into_iter()
            .map(|(name, kind)| Trace::new(name, kind))
            .collect();
        Recorder { traces, from }
    }

    /// Takes one step: its ends [s] and, in the order of the signals, each one's values at `from`, at one and two
    /// thirds and at `to`.
    pub fn step(&mut self, from: f64, to: f64, values: &[[f64; 4]]) {
        // The end that a step has in common with the record's start belongs to the step before.
        if to < self.from || (to == self.from && from < to) {
            return;
        }
        for (trace, &values) in self.traces.iter_mut().zip(values) {
            trace
                .pieces
                .extend(Piece { from, to, values }.within(self.from, to));
        }
    }

    /// The traces so far.
    pub fn traces(&self) -> &[Trace] {
        &self.traces
    }

    /// The traces, at the end.
    pub fn into_traces(self) -> Vec<Trace> {
        self.traces
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
        let mut recorder = Recorder::new(signals, 1.5);
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
        let mut recorder = Recorder::new([("a".to_owned(), units::VOLTAGE)], 1.0);
        recorder.step(0.0, 1.0, &[[0.0; 4]]);
        recorder.step(1.0, 1.0, &[[1.0; 4]]);
        recorder.step(1.0, 2.0, &[[2.0; 4]]);
        assert_eq!(recorder.traces()[0].pieces.len(), 2);
    }
}
