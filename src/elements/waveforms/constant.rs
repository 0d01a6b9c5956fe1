//! A constant: one segment without end.

use super::Waveform;
use crate::elements::element::{Rhythm, Unsound};
use crate::netlist::{Value, Values};

/// A constant value.
pub struct Constant {
    key: Value,
    value: f64,
}

impl Constant {
    /// A constant behind this parameter.
    pub fn new(key: Value) -> Self {
        Constant { key, value: 0.0 }
    }
}

impl Waveform for Constant {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.value = values[self.key];
        Ok(())
    }

    fn value(&self, _time: f64, _segment: f64) -> f64 {
        self.value
    }

    fn rhythm(&self) -> Rhythm {
        Rhythm::None
    }

    fn end(&self, _segment: f64) -> f64 {
        f64::INFINITY
    }
}
