//! Powder: a permeability that rolls off over the field, dB/dH = mu0 (1 + (mu_i - 1)/(1 + (H/Hh)^n)).
//!
//! At the `half_field` Hh half of the incremental permeability (above that of vacuum) is left: the form in which the
//! permeability under a direct field is commonly fitted (common practice). B and ∫ H dB are integrals of it without a
//! closed form for every exponent: they are tabulated once, each interval by Gauss-Legendre, and what lies between knots
//! is integrated from the nearest. Accuracy: 12 digits and more.

use super::{INITIAL_PERMEABILITY, Magnetization, Magnetized, Material, MaterialKind};
use crate::magnetics::MU0;
use crate::magnetics::geometry::Fault;
use crate::math::quadrature::Rule;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{FIELD_STRENGTH, RATIO};
use std::sync::Arc;

/// A material told by the roll-off of its permeability.
pub const KIND: MaterialKind = MaterialKind {
    word: "roll_off",
    about: "a powder whose permeability rolls off over the field",
    told_by: "roll_off",
    keys: KEYS,
    read,
};

const KEYS: &[Key] = &[
    INITIAL_PERMEABILITY,
    Key::optional(
        "roll_off",
        Takes::Map(ROLL_OFF),
        "how the permeability falls over the field",
    ),
];

/// Keys of `roll_off`.
pub const ROLL_OFF: &[Key] = &[
    Key::required(
        "half_field",
        Takes::Quantity(FIELD_STRENGTH),
        "field strength at which half of the incremental permeability is left",
    ),
    Key::required(
        "exponent",
        Takes::Quantity(RATIO),
        "power of the field in the fit, from 1 to 8",
    ),
];

#[derive(Debug)]
struct Written {
    initial_permeability: Value,
    half_field: Value,
    exponent: Value,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Material>> {
    if !fields.has("initial_permeability") {
        fields.missing("initial_permeability");
    }
    let permeability = fields.checked("initial_permeability", "above 1", |amount| amount.low > 1.0);
    let is_map = fields.is_map("roll_off");
    let map = fields.map("roll_off")?;
    if !is_map {
        return None;
    }
    map.finish();
    let half_field = map.positive("half_field");
    let exponent = map.within("exponent", 1.0, 8.0);
    Some(Box::new(Written {
        initial_permeability: permeability?,
        half_field: half_field?,
        exponent: exponent?,
    }))
}

impl Material for Written {
    fn derive(&self, values: &Values, _temperature: f64) -> Result<Magnetized, Fault> {
        let permeability = values[self.initial_permeability];
        let (half_field, exponent) = (values[self.half_field], values[self.exponent]);
        let sound = permeability > 1.0 && permeability < 1e9;
        if !(sound && (1e-6..1e12).contains(&half_field) && (1.0..=8.0).contains(&exponent)) {
            return Err(Fault {
                word: "out-of-range",
                key: "roll_off",
                text: "a powder has an initial permeability above 1, a half_field above 0 and an exponent from 1 to 8".into(),
                help: "check the values given to them",
            });
        }
        Ok(Magnetized {
            curve: Arc::new(Powder::new(permeability, half_field, exponent)),
            remarks: Vec::new(),
        })
    }
}

/// The curve of a powder.
#[derive(Clone, Debug)]
pub struct Powder {
    /// Initial permeability less that of vacuum [H/m].
    excess: f64,
    half_field: f64,
    exponent: f64,
    knots: Vec<Knot>,
    rule: Rule,
}

/// A tabulated point.
#[derive(Clone, Copy, Debug)]
struct Knot {
    field: f64,
    flux_density: f64,
    /// ∫ H dB up to here.
    energy: f64,
}

/// Knots over the half field, each √2 of the one before: from where the roll-off is below 1e-2 to where it is complete.
const FIRST: f64 = 1.0 / 64.0;
const KNOTS: usize = 60;

impl Powder {
    /// A powder of relative `initial_permeability` (above 1), `half_field` [A/m] (above 0) and `exponent` (from 1).
    pub fn new(initial_permeability: f64, half_field: f64, exponent: f64) -> Self {
        let mut powder = Powder {
            excess: MU0 * (initial_permeability - 1.0),
            half_field,
            exponent,
            knots: vec![Knot {
                field: 0.0,
                flux_density: 0.0,
                energy: 0.0,
            }],
            rule: Rule::legendre(10),
        };
        for k in 0..KNOTS {
            let field = half_field * FIRST * 2f64.powf(0.5 * k as f64);
            let last = powder.knots[powder.knots.len() - 1];
            powder.knots.push(Knot {
                field,
                flux_density: last.flux_density + powder.gained(last.field, field, |_| 1.0),
                energy: last.energy + powder.gained(last.field, field, |h| h),
            });
        }
        powder
    }

    /// dB/dH at a field of zero or more.
    #[inline]
    fn slope(&self, field: f64) -> f64 {
        MU0 + self.excess / (1.0 + (field / self.half_field).powf(self.exponent))
    }

    /// ∫ weight(H) dB between two fields, the first not above the second.
    fn gained(&self, from: f64, to: f64, weight: impl Fn(f64) -> f64) -> f64 {
        let part =
            |from: f64, to: f64| self.rule.integrate(from, to, |h| weight(h) * self.slope(h));
        if from == 0.0 {
            // H^n is not smooth at zero; with H = t³ it is smooth enough.
            let root = to.cbrt();
            return self.rule.integrate(0.0, root, |t| {
                let h = t * t * t;
                3.0 * t * t * weight(h) * self.slope(h)
            });
        }
        let (mut sum, mut low) = (0.0, from);
        while 2.0 * low < to {
            sum += part(low, 2.0 * low);
            low *= 2.0;
        }
        sum + part(low, to)
    }

    /// The last knot not above, by a rising key.
    fn before(&self, key: impl Fn(&Knot) -> f64, value: f64) -> Knot {
        let after = self.knots.partition_point(|knot| key(knot) <= value);
        self.knots[after.max(1) - 1]
    }

    /// The field of a flux density of zero or more.
    fn field_of(&self, flux_density: f64) -> f64 {
        let knot = self.before(|knot| knot.flux_density, flux_density);
        // B is concave: Newton's tangents from the left never overshoot but by rounding.
        let (mut field, mut reached) = (knot.field, knot.flux_density);
        for _ in 0..60 {
            let step = (flux_density - reached) / self.slope(field);
            field += step;
            if step.abs() <= 2e-16 * field {
                break;
            }
            reached = knot.flux_density + self.gained(knot.field, field, |_| 1.0);
        }
        field
    }
}

impl Magnetization for Powder {
    fn flux_density(&self, field: f64) -> (f64, f64) {
        let h = field.abs();
        let knot = self.before(|knot| knot.field, h);
        let b = knot.flux_density + self.gained(knot.field, h, |_| 1.0);
        (b.copysign(field), self.slope(h))
    }

    #[inline]
    fn field(&self, flux_density: f64) -> (f64, f64) {
        let field = self.field_of(flux_density.abs());
        (field.copysign(flux_density), 1.0 / self.slope(field))
    }

    fn energy_density(&self, flux_density: f64) -> f64 {
        let h = self.field_of(flux_density.abs());
        let knot = self.before(|knot| knot.field, h);
        knot.energy + self.gained(knot.field, h, |h| h)
    }

    fn bends(&self) -> Vec<f64> {
        // dH/dB only ever rises; one place near the knee starts the search for any share of the inductance.
        vec![self.flux_density(self.half_field).0]
    }
}

#[cfg(test)]
mod tests {
    use super::super::laws;
    use super::*;
    use std::f64::consts::PI;

    #[test]
    fn the_curve_keeps_the_laws_of_magnetization() {
        for (permeability, half_field, exponent) in [
            (60.0, 8e3, 1.6),
            (125.0, 4e3, 1.0),
            (26.0, 2e4, 2.0),
            (14.0, 3e4, 8.0),
        ] {
            let powder = Powder::new(permeability, half_field, exponent);
            laws::hold(&powder, 4.0 * MU0 * permeability * half_field);
        }
    }

    #[test]
    fn whole_exponents_meet_their_closed_forms() {
        let (mu, half) = (60.0, 8e3);
        let excess = MU0 * (mu - 1.0) * half;
        let (one, two) = (Powder::new(mu, half, 1.0), Powder::new(mu, half, 2.0));
        for k in -40..60 {
            let h = half * 1.3f64.powi(k);
            let x = h / half;
            // ∫ dx/(1 + x) = ln(1 + x), ∫ dx/(1 + x²) = atan x; ∫ x dx/(1 + x) = x - ln(1 + x), ∫ x dx/(1 + x²) = ln(1 + x²)/2.
            let b1 = MU0 * h + excess * x.ln_1p();
            let b2 = MU0 * h + excess * x.atan();
            assert!((one.flux_density(h).0 / b1 - 1.0).abs() < 1e-13, "{x}");
            assert!((two.flux_density(h).0 / b2 - 1.0).abs() < 1e-13, "{x}");
            assert!((one.field(b1).0 / h - 1.0).abs() < 1e-11, "{x}");
            assert!((two.field(b2).0 / h - 1.0).abs() < 1e-11, "{x}");
            let energy = 0.5 * MU0 * h * h + 0.5 * excess * half * (x * x).ln_1p();
            assert!((two.energy_density(b2) / energy - 1.0).abs() < 1e-11, "{x}");
        }
    }

    #[test]
    fn far_out_the_polarization_is_the_whole_integral() {
        // ∫₀^∞ dx/(1 + xⁿ) = (π/n)/sin(π/n).
        for exponent in [2.0, 3.0, 5.5] {
            let powder = Powder::new(60.0, 8e3, exponent);
            let h = 8e3 * 1e6;
            let tail = 1e6f64.powf(1.0 - exponent) / (exponent - 1.0);
            let whole = PI / exponent / (PI / exponent).sin() - tail;
            let polarization = powder.flux_density(h).0 - MU0 * h;
            assert!((polarization / (MU0 * 59.0 * 8e3 * whole) - 1.0).abs() < 1e-8);
        }
    }
}
