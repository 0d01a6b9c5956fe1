//! Waveforms of sources: one file per kind, one line per kind in [`WAVEFORMS`].
//!
//! A waveform is a chain of numbered smooth segments. Which segment holds is a mode of the source, moved on by the
//! clock at each corner, so that a step that ends on a corner sees the values from its own side only.

mod constant;
mod points;
mod sine;
mod square;
mod steps;

use super::claims::Claims;
use super::element::{Happening, Point, Rhythm, Switching, Unsound};
use crate::netlist::{Fields, Key, Values};
use crate::units::Kind;

/// A kind of waveform.
pub struct WaveformKind {
    /// The word: `steps: {...}` in place of a constant.
    pub word: &'static str,
    /// What it is, in a sentence.
    pub about: &'static str,
    /// Its keys.
    pub keys: &'static [Key],
    /// True where the word itself is the only key: `points: [[t, v], ...]` has no mapping of its own.
    pub bare: bool,
    /// Reads the keys; values are of the given kind.
    pub read: fn(&Fields<'_>, Kind) -> Option<Box<dyn Waveform>>,
}

/// Every waveform that a source may take in place of a constant.
pub const WAVEFORMS: &[WaveformKind] = &[points::KIND, sine::KIND, square::KIND, steps::KIND];

/// A chain of smooth segments, numbered from 0.
pub trait Waveform: Send + Sync {
    /// Re-derives the numbers.
    fn derive(&mut self, values: &Values) -> Result<(), Unsound>;
    /// Value at `time` by the law of a segment.
    fn value(&self, time: f64, segment: f64) -> f64;
    /// Instant at which a segment ends; infinity for the last.
    fn end(&self, segment: f64) -> f64;
    /// What the clock makes of it.
    fn rhythm(&self) -> Rhythm;
    /// The segment at `time` as if the clock had always run, or shortly before it; segments below 0 lie before the
    /// first.
    fn forever(&self, _time: f64) -> f64 {
        0.0
    }
    /// The segment that `segment` was `by` seconds before, a whole number of periods.
    fn earlier(&self, segment: f64, _by: f64) -> f64 {
        segment
    }
}

/// The waveform of one source, with its clock.
pub struct Wave {
    /// The key behind which it stands.
    key: &'static str,
    waveform: Box<dyn Waveform>,
}

/// What keeps time for a source.
pub trait Clocked {
    /// The clock.
    fn clock(&self) -> Option<&dyn Switching>;
}

impl Wave {
    /// Reads a constant or a waveform behind `key`.
    pub fn read(fields: &Fields<'_>, key: &'static str, kind: Kind) -> Option<Self> {
        if !fields.is_map(key) {
            let value = fields.value_as(key, kind)?;
            return Some(Wave {
                key,
                waveform: Box::new(constant::Constant::new(value)),
            });
        }
        let mut entries = fields.entries(key);
        let words: Vec<&str> = WAVEFORMS.iter().map(|kind| kind.word).collect();
        if entries.len() != 1 {
            fields.error(
                key,
                "one-waveform",
                format!(
                    "`{key}` takes a constant or one waveform, got {} words",
                    entries.len()
                ),
                "one word here",
                Some(&format!("the waveforms are {}", words.join(", "))),
            );
            return None;
        }
        let entry = entries.remove(0);
        let Some(found) = WAVEFORMS.iter().find(|kind| kind.word == entry.name.text) else {
            fields.unknown_word(&entry.name, "waveform", &words);
            return None;
        };
        let inner = if found.bare {
            fields.map_with(key, found.keys)?
        } else {
            fields.inside(&entry, found.keys)
        };
        let waveform = (found.read)(&inner, kind);
        inner.finish();
        Some(Wave {
            key,
            waveform: waveform?,
        })
    }

    /// Re-derives the numbers.
    pub fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.waveform.derive(values).map_err(|reason| Unsound {
            key: self.key,
            ..reason
        })
    }

    /// Claims the mode that holds the segment's number.
    pub fn claim(&self, claims: &mut Claims<'_>) {
        claims.modes(1);
    }

    /// Value at a point; the element's first mode is the segment.
    #[inline]
    pub fn value(&self, at: Point<'_>) -> f64 {
        self.waveform.value(at.time, at.mode[0])
    }
}

impl Clocked for Wave {
    fn clock(&self) -> Option<&dyn Switching> {
        Some(self)
    }
}

impl Switching for Wave {
    fn start(&self, mode: &mut [f64]) {
        mode[0] = 0.0;
        self.pass(0.0, mode);
    }

    fn rhythm(&self) -> Rhythm {
        self.waveform.rhythm()
    }

    fn forever(&self, time: f64, mode: &mut [f64]) {
        mode[0] = self.waveform.forever(time);
        self.pass(time, mode);
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        match self.waveform.rhythm() {
            // What happens once, happens in time from 0 on.
            Rhythm::Once if by > 0.0 => mode[0] = 0.0,
            _ => mode[0] = self.waveform.earlier(mode[0], by),
        }
    }

    fn next_event(&self, _time: f64, mode: &[f64]) -> f64 {
        self.waveform.end(mode[0])
    }

    fn at_instant(&self, time: f64, mode: &mut [f64]) -> Option<Happening> {
        mode[0] += 1.0;
        self.pass(time, mode);
        None
    }
}

impl Wave {
    /// Moves past every segment that has ended by `time`, those without length included.
    fn pass(&self, time: f64, mode: &mut [f64]) {
        while self.waveform.end(mode[0]) <= time {
            mode[0] += 1.0;
        }
    }
}
