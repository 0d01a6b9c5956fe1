//! Sine: offset + amplitude sin(2 pi f (t - delay) + phase); before `delay` it rests at its starting value.

use super::{Waveform, WaveformKind};
use crate::elements::element::{Rhythm, Unsound};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{self, Kind};
use std::f64::consts::{SQRT_2, TAU};

/// The waveform.
pub const KIND: WaveformKind = WaveformKind {
    word: "sine",
    about: "A sine with an offset; `rms` may stand instead of `amplitude`.",
    keys: &[
        Key::optional(
            "offset",
            Takes::Quantity(units::ANY),
            "mean value; none is 0",
        ),
        Key::optional(
            "amplitude",
            Takes::Quantity(units::ANY),
            "peak value above the offset",
        ),
        Key::optional(
            "rms",
            Takes::Quantity(units::ANY),
            "effective value of the sine alone: amplitude/sqrt 2",
        ),
        Key::required(
            "frequency",
            Takes::Quantity(units::FREQUENCY),
            "periods per second",
        ),
        Key::default(
            "phase",
            Takes::Quantity(units::ANGLE),
            "0 deg",
            "phase at the delay",
        ),
        Key::default(
            "delay",
            Takes::Quantity(units::TIME),
            "0 s",
            "start of the sine",
        ),
    ],
    bare: false,
    read,
};

struct Sine {
    offset_key: Option<Value>,
    /// The amplitude's key and what it is multiplied by.
    amplitude_key: (Value, f64),
    keys: [Value; 3],
    offset: f64,
    amplitude: f64,
    frequency: f64,
    phase: f64,
    delay: f64,
}

fn read(fields: &Fields<'_>, kind: Kind) -> Option<Box<dyn Waveform>> {
    let offset = if fields.has("offset") {
        Some(fields.value_as("offset", kind))
    } else {
        None
    };
    let amplitude = match (fields.has("amplitude"), fields.has("rms")) {
        (true, false) => fields.value_as("amplitude", kind).map(|value| (value, 1.0)),
        (false, true) => fields.value_as("rms", kind).map(|value| (value, SQRT_2)),
        _ => {
            fields.error_here(
                "one-of",
                "a sine takes either `amplitude` or `rms`".into(),
                "write one of the two",
                "write `amplitude: 1 V` or `rms: 1 V`",
            );
            None
        }
    };
    let frequency = fields.positive("frequency");
    let phase = fields.value("phase");
    let delay = fields.non_negative("delay");
    let offset_key = match offset {
        Some(value) => Some(value?),
        None => None,
    };
    Some(Box::new(Sine {
        offset_key,
        amplitude_key: amplitude?,
        keys: [frequency?, phase?, delay?],
        offset: 0.0,
        amplitude: 0.0,
        frequency: 0.0,
        phase: 0.0,
        delay: 0.0,
    }))
}

impl Waveform for Sine {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let [frequency, phase, delay] = self.keys.map(|key| values[key]);
        self.offset = self.offset_key.map_or(0.0, |key| values[key]);
        self.amplitude = values[self.amplitude_key.0] * self.amplitude_key.1;
        (self.frequency, self.phase, self.delay) = (frequency, phase, delay);
        Ok(())
    }

    fn value(&self, time: f64, segment: f64) -> f64 {
        let running = if segment == 0.0 {
            0.0
        } else {
            time - self.delay
        };
        self.offset + self.amplitude * (TAU * self.frequency * running + self.phase).sin()
    }

    fn rhythm(&self) -> Rhythm {
        Rhythm::Every(1.0 / self.frequency)
    }

    fn forever(&self, _time: f64) -> f64 {
        1.0
    }

    fn end(&self, segment: f64) -> f64 {
        if segment == 0.0 {
            self.delay
        } else {
            f64::INFINITY
        }
    }
}
