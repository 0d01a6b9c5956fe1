//! Steps: `at: [[t, v], ...]`, each reached by a straight edge that starts at its instant and lasts `edge`.

use super::{Waveform, WaveformKind};
use crate::elements::element::{Rhythm, Unsound};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{self, Kind};

/// The waveform.
pub const KIND: WaveformKind = WaveformKind {
    word: "steps",
    about: "Levels from given instants on; each edge starts at its instant and is straight.",
    keys: &[
        Key::required(
            "at",
            Takes::Pairs(units::TIME, units::ANY),
            "instants and levels; before the first instant the first level holds",
        ),
        Key::default(
            "edge",
            Takes::Quantity(units::TIME),
            "0 s",
            "duration of each edge; 0 s is an ideal jump",
        ),
    ],
    bare: false,
    read,
};

struct Steps {
    keys: Vec<(Value, Value)>,
    edge_key: Value,
    at: Vec<(f64, f64)>,
    edge: f64,
}

fn read(fields: &Fields<'_>, kind: Kind) -> Option<Box<dyn Waveform>> {
    let keys = fields.pairs_as("at", units::TIME, kind);
    let edge = fields.non_negative("edge");
    Some(Box::new(Steps {
        keys: keys?,
        edge_key: edge?,
        at: Vec::new(),
        edge: 0.0,
    }))
}

impl Waveform for Steps {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.at = self
            .keys
            .iter()
            .map(|&(time, level)| (values[time], values[level]))
            .collect();
        self.edge = values[self.edge_key];
        // The first level holds before its instant too, so only the later ones begin with an edge.
        for pair in self.at.windows(2) {
            let gap = pair[1].0 - pair[0].0;
            let first = pair[0].0 == self.at[0].0;
            let needed = if first { 0.0 } else { self.edge };
            if gap <= 0.0 || gap < needed {
                return Err(Unsound {
                    word: "disordered-steps",
                    key: "at",
                    headline: format!(
                        "the step at {} begins before the one at {} has ended",
                        units::engineering(pair[1].0, units::TIME, 6),
                        units::engineering(pair[0].0, units::TIME, 6)
                    ),
                    help: "instants rise, with at least the duration of `edge` between them".into(),
                });
            }
        }
        Ok(())
    }

    fn value(&self, time: f64, segment: f64) -> f64 {
        // Segments: level 0, edge to level 1, level 1, edge to level 2, ...
        let level = (segment / 2.0).floor() as usize;
        let now = self.at[level.min(self.at.len() - 1)];
        match self.at.get(level + 1) {
            Some(next) if segment % 2.0 != 0.0 => {
                now.1 + (next.1 - now.1) * (time - next.0) / self.edge
            }
            _ => now.1,
        }
    }

    fn rhythm(&self) -> Rhythm {
        Rhythm::Once
    }

    fn end(&self, segment: f64) -> f64 {
        let level = (segment / 2.0).floor() as usize;
        match self.at.get(level + 1) {
            Some(next) if segment % 2.0 == 0.0 => next.0,
            Some(next) => next.0 + self.edge,
            None => f64::INFINITY,
        }
    }
}
