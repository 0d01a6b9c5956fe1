//! What a material loses: figures that the winding laws and the core loss after a run ask for.
//!
//! `steinmetz`: loss per volume under a sinusoidal flux of frequency f and peak B,
//! p = factor (f/1 Hz)^frequency_exponent (B/1 T)^flux_exponent (C. P. Steinmetz 1892 with the frequency's exponent of
//! later use; `factor` in W/m³). `resistivity`: for eddy currents in the material itself.

use crate::magnetics::geometry::Fault;
use crate::netlist::{Data, Fields, Key, Takes, Value, Values};
use crate::units::{LOSS_DENSITY, RATIO, RESISTIVITY};

/// Keys of losses, beside those of the magnetization.
pub const KEYS: &[Key] = &[
    Key::optional(
        "resistivity",
        Takes::Quantity(RESISTIVITY),
        "resistivity of the material, for eddy currents in it",
    ),
    Key::optional(
        "steinmetz",
        Takes::Map(STEINMETZ),
        "loss per volume over frequency and flux density",
    ),
];

/// Keys of `steinmetz`.
pub const STEINMETZ: &[Key] = &[
    Key::required(
        "factor",
        Takes::Quantity(LOSS_DENSITY),
        "loss per volume at 1 Hz and a peak of 1 T",
    ),
    Key::required(
        "frequency_exponent",
        Takes::Quantity(RATIO),
        "power of the frequency, from 1 to 3",
    ),
    Key::required(
        "flux_exponent",
        Takes::Quantity(RATIO),
        "power of the peak flux density, from 1 to 4",
    ),
];

/// Losses of a material with numbers. SI units.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Losses {
    /// Resistivity [Ω m], above 0; None where it is not given.
    pub resistivity: Option<f64>,
    /// Loss per volume; None where it is not given.
    pub steinmetz: Option<Steinmetz>,
}

/// p = `factor` (f/1 Hz)^`frequency_exponent` (B/1 T)^`flux_exponent`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Steinmetz {
    /// Loss per volume at 1 Hz and a peak of 1 T [W/m³], above 0.
    pub factor: f64,
    /// From 1 to 3.
    pub frequency_exponent: f64,
    /// From 1 to 4.
    pub flux_exponent: f64,
}

impl Steinmetz {
    /// Loss per volume [W/m³] under a sine of a `frequency` [Hz] and a `peak` [T], both zero or more.
    pub fn sine(&self, frequency: f64, peak: f64) -> f64 {
        self.factor * frequency.powf(self.frequency_exponent) * peak.powf(self.flux_exponent)
    }
}

/// Losses as written.
#[derive(Clone, Copy, Debug, Default)]
pub struct Written {
    resistivity: Option<Value>,
    /// Factor, exponent of the frequency, exponent of the flux density.
    steinmetz: Option<[Value; 3]>,
}

impl Written {
    /// Reads [`KEYS`]; what is wrong is reported.
    pub fn read(fields: &Fields<'_>) -> Option<Written> {
        let resistivity = fields.positive("resistivity");
        let steinmetz = fields.map("steinmetz").map(|map| steinmetz(&map));
        if fields.has("resistivity") && resistivity.is_none() {
            return None;
        }
        Some(Written {
            resistivity,
            steinmetz: match steinmetz {
                None => None,
                Some(read) => Some(read?),
            },
        })
    }

    /// True where the material tells its resistivity.
    pub fn conducts(&self) -> bool {
        self.resistivity.is_some()
    }

    /// The figures with the values in force.
    ///
    /// # Errors
    /// A value that a study set out of its range.
    pub fn derive(&self, values: &Values) -> Result<Losses, Fault> {
        let losses = Losses {
            resistivity: self.resistivity.map(|value| values[value]),
            steinmetz: self.steinmetz.map(|[factor, frequency, flux]| Steinmetz {
                factor: values[factor],
                frequency_exponent: values[frequency],
                flux_exponent: values[flux],
            }),
        };
        let sound = |s: Steinmetz| {
            s.factor > 0.0
                && (1.0..=3.0).contains(&s.frequency_exponent)
                && (1.0..=4.0).contains(&s.flux_exponent)
        };
        if losses.resistivity.is_none_or(|value| value > 0.0) && losses.steinmetz.is_none_or(sound)
        {
            return Ok(losses);
        }
        Err(Fault {
            word: "out-of-range",
            key: "material",
            text: "the material's losses are out of range".into(),
            help: "resistivity and factor are above zero, frequency_exponent is from 1 to 3, flux_exponent from 1 to 4",
        })
    }
}

fn steinmetz(fields: &Fields<'_>) -> Option<[Value; 3]> {
    // What is no mapping has its message; its keys are not missing besides.
    if !matches!(fields.mapping().data, Data::Map(_)) {
        return None;
    }
    fields.finish();
    let factor = fields.positive("factor");
    let frequency = fields.within("frequency_exponent", 1.0, 3.0);
    let flux = fields.within("flux_exponent", 1.0, 4.0);
    Some([factor?, frequency?, flux?])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_sine_of_one_hertz_and_one_tesla_loses_the_factor() {
        let ferrite = Steinmetz {
            factor: 1.2,
            frequency_exponent: 1.45,
            flux_exponent: 2.6,
        };
        assert_eq!(ferrite.sine(1.0, 1.0), 1.2);
        assert!((ferrite.sine(2.0, 0.5) / (1.2 * 2f64.powf(1.45 - 2.6)) - 1.0).abs() < 1e-15);
        assert_eq!(ferrite.sine(50.0, 0.0), 0.0);
    }
}
