//! Square wave: low until `delay`; from `delay` + k/frequency high, a fraction `duty` of the period later low again,
//! each edge straight over `edge`.

use super::{Waveform, WaveformKind};
use crate::elements::element::{Rhythm, Unsound};
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{self, Kind};

/// The waveform.
pub const KIND: WaveformKind = WaveformKind {
    word: "square",
    about: "A square wave between two levels; an edge starts at its instant and is straight.",
    keys: &[
        Key::required(
            "low",
            Takes::Quantity(units::ANY),
            "level before the first edge and after each falling one",
        ),
        Key::required(
            "high",
            Takes::Quantity(units::ANY),
            "level after each rising edge",
        ),
        Key::required(
            "frequency",
            Takes::Quantity(units::FREQUENCY),
            "periods per second",
        ),
        Key::required(
            "duty",
            Takes::Quantity(units::RATIO),
            "fraction of the period from rising to falling edge",
        ),
        Key::default(
            "edge",
            Takes::Quantity(units::TIME),
            "0 s",
            "duration of each edge; 0 s is an ideal jump",
        ),
        Key::default(
            "delay",
            Takes::Quantity(units::TIME),
            "0 s",
            "instant of the first rising edge",
        ),
    ],
    bare: false,
    read,
};

struct Square {
    keys: [Value; 6],
    low: f64,
    high: f64,
    frequency: f64,
    duty: f64,
    edge: f64,
    delay: f64,
}

fn read(fields: &Fields<'_>, kind: Kind) -> Option<Box<dyn Waveform>> {
    let low = fields.value_as("low", kind);
    let high = fields.value_as("high", kind);
    let frequency = fields.positive("frequency");
    let duty = fields.positive("duty");
    let edge = fields.non_negative("edge");
    let delay = fields.non_negative("delay");
    let keys = [low?, high?, frequency?, duty?, edge?, delay?];
    Some(Box::new(Square {
        keys,
        low: 0.0,
        high: 0.0,
        frequency: 1.0,
        duty: 0.5,
        edge: 0.0,
        delay: 0.0,
    }))
}

impl Square {
    /// Start of the rising (0) or falling (1) edge of a period.
    fn start(&self, period: f64, falling: f64) -> f64 {
        self.delay + (period + falling * self.duty) / self.frequency
    }
}

impl Waveform for Square {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let [low, high, frequency, duty, edge, delay] = self.keys.map(|key| values[key]);
        *self = Square {
            keys: self.keys,
            low,
            high,
            frequency,
            duty,
            edge,
            delay,
        };
        if duty >= 1.0 {
            return Err(Unsound {
                word: "out-of-range",
                key: "duty",
                headline: format!("a duty of {duty} leaves no time at the low level"),
                help: "the duty lies between 0 and 1; for a constant level write the constant"
                    .into(),
            });
        }
        if edge * frequency > duty.min(1.0 - duty) {
            return Err(Unsound {
                word: "out-of-range",
                key: "edge",
                headline: "the edges are longer than the levels between them".into(),
                help: format!(
                    "`edge` may last up to {} here",
                    units::engineering(duty.min(1.0 - duty) / frequency, units::TIME, 6)
                ),
            });
        }
        Ok(())
    }

    fn value(&self, time: f64, segment: f64) -> f64 {
        // Segment 0 is the time before the delay; then rise, high, fall, low of each period in turn.
        if segment == 0.0 {
            return self.low;
        }
        let (period, phase) = (
            ((segment - 1.0) / 4.0).floor(),
            (segment - 1.0).rem_euclid(4.0),
        );
        let swing = self.high - self.low;
        match phase as u8 {
            0 => self.low + swing * (time - self.start(period, 0.0)) / self.edge,
            1 => self.high,
            2 => self.high - swing * (time - self.start(period, 1.0)) / self.edge,
            _ => self.low,
        }
    }

    fn rhythm(&self) -> Rhythm {
        Rhythm::Every(1.0 / self.frequency)
    }

    fn forever(&self, time: f64) -> f64 {
        // An edge that rounding puts a little later has passed.
        let near = time + 1e-9 / self.frequency;
        let mut segment = 4.0 * ((near - self.delay) * self.frequency).floor() + 1.0;
        while self.end(segment) <= near {
            segment += 1.0;
        }
        segment
    }

    fn earlier(&self, segment: f64, by: f64) -> f64 {
        segment - 4.0 * (by * self.frequency).round()
    }

    fn end(&self, segment: f64) -> f64 {
        if segment == 0.0 {
            return self.delay;
        }
        let (period, phase) = (
            ((segment - 1.0) / 4.0).floor(),
            (segment - 1.0).rem_euclid(4.0),
        );
        match phase as u8 {
            0 => self.start(period, 0.0) + self.edge,
            1 => self.start(period, 1.0),
            2 => self.start(period, 1.0) + self.edge,
            _ => self.start(period + 1.0, 0.0),
        }
    }
}
