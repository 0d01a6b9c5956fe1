//! A smooth saturating curve (Froehlich-Kennelly with the vacuum slope): B = mu0 H + Js H/(|H| + Ha).
//!
//! Ha = Js/(mu0 (mu_i - 1)) makes the slope at zero mu0 mu_i; the slope far out is mu0. The inverse solves
//! mu0 H² - (B - Js - mu0 Ha) H - Ha B = 0. Its knee is soft: half of Js is reached at H = Ha.

use super::saturation::{Saturation, saturation};
use super::{INITIAL_PERMEABILITY, Magnetization, Magnetized, Material, MaterialKind};
use crate::magnetics::MU0;
use crate::magnetics::geometry::Fault;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use std::sync::Arc;

/// A material told by initial permeability and saturation.
pub const KIND: MaterialKind = MaterialKind {
    word: "smooth",
    about: "a smooth curve from initial permeability to saturation",
    told_by: "saturation",
    keys: KEYS,
    read,
};

const KEYS: &[Key] = &[
    INITIAL_PERMEABILITY,
    Key::optional(
        "saturation",
        Takes::Other("a flux density, or pairs [temperature, flux density]"),
        "saturation polarization, also over temperature",
    ),
];

/// The smooth curve of an initial permeability and a saturation polarization.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Smooth {
    saturation: f64,
    half_field: f64,
}

impl Smooth {
    /// A curve of relative `initial_permeability` (above 1) and `saturation` [T] (above 0).
    pub fn new(initial_permeability: f64, saturation: f64) -> Self {
        Smooth {
            saturation,
            half_field: saturation / (MU0 * (initial_permeability - 1.0)),
        }
    }
}

#[derive(Debug)]
struct Written {
    initial_permeability: Value,
    saturation: Saturation,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Material>> {
    if !fields.has("initial_permeability") {
        fields.missing("initial_permeability");
    }
    let saturation = saturation(fields, "saturation");
    let initial_permeability =
        fields.checked("initial_permeability", "above 1", |amount| amount.low > 1.0)?;
    Some(Box::new(Written {
        initial_permeability,
        saturation: saturation?,
    }))
}

impl Material for Written {
    fn derive(&self, values: &Values, temperature: f64) -> Result<Magnetized, Fault> {
        let permeability = values[self.initial_permeability];
        let (saturation, remark) = self.saturation.at(values, temperature);
        if !(permeability > 1.0 && saturation > 0.0) {
            return Err(Fault {
                word: "out-of-range",
                key: "initial_permeability",
                text: "a saturating material has an initial permeability above 1 and a saturation above 0".into(),
                help: "check the values given to both",
            });
        }
        let curve = Smooth::new(permeability, saturation);
        Ok(Magnetized {
            curve: Arc::new(curve),
            remarks: remark.into_iter().collect(),
        })
    }
}

impl Magnetization for Smooth {
    fn flux_density(&self, field: f64) -> (f64, f64) {
        let full = field.abs() + self.half_field;
        let slope = MU0 + self.saturation * self.half_field / (full * full);
        (MU0 * field + self.saturation * field / full, slope)
    }

    #[inline]
    fn field(&self, flux_density: f64) -> (f64, f64) {
        let b = flux_density.abs();
        let half = 0.5 * (b - self.saturation - MU0 * self.half_field);
        let product = MU0 * self.half_field * b;
        let root = (half * half + product).sqrt();
        // The two forms of the positive root; each adds numbers of one sign.
        let field = if half > 0.0 {
            (half + root) / MU0
        } else {
            self.half_field * b / (root - half)
        };
        let full = field + self.half_field;
        let slope = MU0 + self.saturation * self.half_field / (full * full);
        (field.copysign(flux_density), 1.0 / slope)
    }

    fn energy_density(&self, flux_density: f64) -> f64 {
        // ∫ H dB = mu0 H²/2 + Js Ha (ln(1 + x) - x/(1 + x)), x = H/Ha.
        let field = self.field(flux_density).0.abs();
        0.5 * MU0 * field * field
            + self.saturation * self.half_field * log_less_share(field / self.half_field)
    }

    fn bends(&self) -> Vec<f64> {
        vec![self.saturation]
    }
}

/// ln(1 + x) - x/(1 + x) for x >= 0, by its series Σ (-1)ⁿ (1 - 1/n) xⁿ (n from 2) where the difference would cancel.
fn log_less_share(x: f64) -> f64 {
    if x > 0.05 {
        return x.ln_1p() - x / (1.0 + x);
    }
    let mut sum = 0.0;
    for n in (2..=13).rev() {
        let weight = 1.0 - 1.0 / f64::from(n);
        sum = weight - x * sum;
    }
    x * x * sum
}

#[cfg(test)]
mod tests {
    use super::super::laws;
    use super::*;

    #[test]
    fn the_curve_keeps_the_laws_of_magnetization() {
        for (permeability, saturation) in [
            (1.001, 1e-3),
            (2.0, 0.1),
            (60.0, 1.5),
            (3000.0, 0.45),
            (200_000.0, 0.8),
        ] {
            let curve = Smooth::new(permeability, saturation);
            laws::hold(&curve, 4.0 * saturation);
            assert!((curve.flux_density(0.0).1 / (MU0 * permeability) - 1.0).abs() < 1e-12);
            let far = 1e6 * curve.half_field;
            assert!((curve.flux_density(far).0 - MU0 * far - saturation).abs() < 2e-6 * saturation);
        }
    }

    #[test]
    fn half_the_saturation_is_reached_at_the_half_field() {
        let curve = Smooth::new(3000.0, 1.5);
        let (b, _) = curve.flux_density(curve.half_field);
        assert!((b - MU0 * curve.half_field - 0.75).abs() < 1e-15);
    }

    #[test]
    fn the_inverse_keeps_its_digits_near_zero_and_far_out() {
        let curve = Smooth::new(200_000.0, 1.5);
        for exponent in -12..7 {
            let field = 10f64.powi(exponent);
            let back = curve.field(curve.flux_density(field).0).0;
            // dH/H = (dB/B) (B/H)/(dB/dH): what one rounding of B is worth in H.
            let (b, slope) = curve.flux_density(field);
            assert!(
                (back / field - 1.0).abs() < 4e-16 * (2.0 + b / field / slope),
                "H = {field}: {back}"
            );
        }
    }

    #[test]
    fn the_series_meets_the_closed_form() {
        for x in [0.0499f64, 0.03, 0.01] {
            let closed = x.ln_1p() - x / (1.0 + x);
            assert!((log_less_share(x) / closed - 1.0).abs() < 1e-16 / x + 1e-13);
        }
    }
}
