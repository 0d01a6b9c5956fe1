//! Points: `points: [[t, v], ...]`, straight between; the end values hold outside.

use super::{Waveform, WaveformKind};
use crate::elements::element::{Rhythm, Unsound};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{self, Kind};

/// The waveform.
pub const KIND: WaveformKind = WaveformKind {
    word: "points",
    about: "Straight lines between points [time, value]; the end values hold outside.",
    keys: &[Key::required(
        "points",
        Takes::Pairs(units::TIME, units::ANY),
        "points in the order of time; two at one instant are an ideal jump",
    )],
    bare: true,
    read,
};

struct Points {
    keys: Vec<(Value, Value)>,
    at: Vec<(f64, f64)>,
}

fn read(fields: &Fields<'_>, kind: Kind) -> Option<Box<dyn Waveform>> {
    let keys = fields.pairs_as("points", units::TIME, kind)?;
    Some(Box::new(Points {
        keys,
        at: Vec::new(),
    }))
}

impl Waveform for Points {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.at = self
            .keys
            .iter()
            .map(|&(time, value)| (values[time], values[value]))
            .collect();
        match self.at.windows(2).find(|pair| pair[1].0 < pair[0].0) {
            None => Ok(()),
            Some(pair) => Err(Unsound {
                word: "disordered-points",
                key: "points",
                headline: format!(
                    "the point at {} comes after the one at {}",
                    units::engineering(pair[1].0, units::TIME, 6),
                    units::engineering(pair[0].0, units::TIME, 6)
                ),
                help: "write the points in the order of time".into(),
            }),
        }
    }

    fn value(&self, time: f64, segment: f64) -> f64 {
        // Segment 0 lies before the first point, segment k between the points k - 1 and k.
        let next = segment as usize;
        match (
            next.checked_sub(1).and_then(|k| self.at.get(k)),
            self.at.get(next),
        ) {
            (Some(a), Some(b)) if b.0 > a.0 => a.1 + (b.1 - a.1) * (time - a.0) / (b.0 - a.0),
            (Some(a), _) => a.1,
            (None, Some(b)) => b.1,
            (None, None) => self.at.last().map_or(0.0, |last| last.1),
        }
    }

    fn rhythm(&self) -> Rhythm {
        Rhythm::Once
    }

    fn end(&self, segment: f64) -> f64 {
        self.at
            .get(segment as usize)
            .map_or(f64::INFINITY, |point| point.0)
    }
}
