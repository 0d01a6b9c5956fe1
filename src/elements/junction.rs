//! A semiconductor junction: conduction, breakdown and charge, with analytic slopes and energies.
//!
//! i = Is (exp(v/(n k T/q)) - 1) less the breakdown (s/Rb) ln(1 + exp(-(v + Vb)/s)), s = k T/q.
//! Charge: depletion capacitance C0/(1 - v/V)^m up to V/2 and its tangent above, plus the transit time times the
//! forward current. Is(T) = Is (T/T0)^(3/n) exp(-(Eg/(n k/q)) (1/T - 1/T0)).
//! Sources: the Shockley diode law and the abrupt-junction depletion law, as textbooks give them.

use super::element::{Branch, Unsound};
use crate::math::quadrature::Rule;
use crate::netlist::Fields;
use crate::netlist::{Key, Takes, Value, Values};
use crate::units;

/// Boltzmann's constant over the elementary charge [V/K], both exact in the SI.
pub const VOLTS_PER_KELVIN: f64 = 1.380649e-23 / 1.602176634e-19;

/// The exponential is continued by its tangent above this current [A]: none is so large, exp would overflow, and beside
/// so steep a slope all else at the node would vanish in its rounding.
const LARGEST: f64 = 1e9;

/// The least slope [S] that a blocking law shows to Newton's iteration: the true one, e^-1000 of something, is no number.
/// Its current stays as the law says; but a node that nothing else holds needs some slope to be found at all, enough to
/// show beside the conductance of a closed switch there.
pub const LEAST_SLOPE: f64 = 1e-12;

/// The tolerance of a junction's potentials is relative to no more than this [V]: beside a kick of megavolts elsewhere a
/// tolerance of volts would let the junction stand where it conducts anything. At 100 V the circuits of everyday take as
/// many steps as without, at 10 V up to half as many again.
pub const REACH: f64 = 100.0;

/// exp(u) and its slope, continued by the tangent above `steepest`.
#[inline]
fn exponential(u: f64, steepest: f64) -> (f64, f64) {
    if u <= steepest {
        let e = u.exp();
        (e, e)
    } else {
        let e = steepest.exp();
        (e * (1.0 + u - steepest), e)
    }
}

/// ln(1 + exp(u)) and its slope, without overflow.
#[inline]
pub fn soft_ramp(u: f64) -> (f64, f64) {
    if u > 40.0 {
        (u, 1.0)
    } else {
        let e = u.exp();
        (e.ln_1p(), e / (1.0 + e))
    }
}

/// The conduction of a junction in numbers.
#[derive(Clone, Copy, Debug, Default)]
pub struct Conduction {
    /// Saturation current at the temperature [A]; 0 leaves the forward law out.
    pub saturation_current: f64,
    /// n k T/q [V].
    pub slope_voltage: f64,
    /// Breakdown, where there is one.
    pub breakdown: Option<Breakdown>,
    /// Exponent above which the forward law is continued by its tangent.
    steepest: f64,
}

/// A breakdown in numbers.
#[derive(Clone, Copy, Debug, Default)]
pub struct Breakdown {
    /// Vb: the knee [V].
    pub knee: f64,
    /// Rb [Ω].
    pub resistance: f64,
    /// s = k T/q [V].
    pub softness: f64,
}

impl Breakdown {
    /// b(v) = (s/Rb) ln(1 + exp((v - Vb)/s)) [A] and its slope [S].
    #[inline]
    pub fn current(&self, v: f64) -> (f64, f64) {
        let (value, slope) = soft_ramp((v - self.knee) / self.softness);
        (
            value * self.softness / self.resistance,
            slope / self.resistance,
        )
    }
}

impl Breakdown {
    /// Shortens a Newton step that would cross a knee of a breakdown in either direction: it stops at the knee.
    pub fn limit_both_ways(&self, branch: &Branch, x: &[f64], dx: &mut [f64]) -> bool {
        let (old, step) = (branch.voltage(x), branch.voltage(dx));
        let width = 20.0 * self.softness;
        let sign = if old + step < 0.0 { -1.0 } else { 1.0 };
        let limited = sign * climb_linear(sign * old, sign * (old + step), self.knee, width);
        if limited == old + step {
            return false;
        }
        let wanted = limited - old;
        if let Some(value) = dx.get_mut(branch.a.0 as usize) {
            *value += wanted - step;
        } else if let Some(value) = dx.get_mut(branch.b.0 as usize) {
            *value -= wanted - step;
        }
        true
    }
}

impl Conduction {
    /// A junction of this saturation current [A] and n k T/q [V].
    pub fn new(saturation_current: f64, slope_voltage: f64, breakdown: Option<Breakdown>) -> Self {
        Conduction {
            saturation_current,
            slope_voltage,
            breakdown,
            steepest: (LARGEST / saturation_current).max(1.0).ln(),
        }
    }

    /// Current [A] and slope [S] at a junction voltage [V].
    #[inline]
    pub fn current(&self, v: f64) -> (f64, f64) {
        let (mut current, mut slope) = (0.0, 0.0);
        if self.saturation_current > 0.0 {
            (current, slope) = self.forward(v);
        }
        if let Some(breakdown) = &self.breakdown {
            let (reverse, steep) = breakdown.current(-v);
            current -= reverse;
            slope += steep;
        }
        (current, slope.max(LEAST_SLOPE))
    }

    /// The forward law alone.
    #[inline]
    pub fn forward(&self, v: f64) -> (f64, f64) {
        let u = v / self.slope_voltage;
        if u.abs() < 1e-3 {
            let e = u.exp_m1();
            return (
                self.saturation_current * e,
                self.saturation_current * (e + 1.0) / self.slope_voltage,
            );
        }
        let (e, slope) = exponential(u, self.steepest);
        (
            self.saturation_current * (e - 1.0),
            self.saturation_current * slope / self.slope_voltage,
        )
    }

    /// A Newton step from `old` to `new` shortened to what the exponentials follow: a rise beyond the point of
    /// strongest curvature is taken on the current's scale instead of the voltage's.
    pub fn limited(&self, old: f64, new: f64) -> f64 {
        let forward = if self.saturation_current > 0.0 {
            climb(old, new, self.slope_voltage, || self.critical())
        } else {
            new
        };
        match &self.breakdown {
            // Below the knee the breakdown rises like the forward law does, over the softness s.
            Some(breakdown) if forward < 0.0 => {
                let critical = breakdown.knee;
                -climb_linear(-old, -forward, critical, 20.0 * breakdown.softness)
            }
            _ => forward,
        }
    }

    /// Voltage at which the law's curvature is strongest: n k T/q ln(n k T/q/(sqrt 2 Is)).
    fn critical(&self) -> f64 {
        let ratio = self.slope_voltage / (std::f64::consts::SQRT_2 * self.saturation_current);
        self.slope_voltage * ratio.max(1.0).ln()
    }
}

/// Limits a climb on an exponential: the current may grow as its tangent says, so the voltage by the logarithm.
fn climb(old: f64, new: f64, scale: f64, critical: impl Fn() -> f64) -> f64 {
    // Nearly all steps end at the first comparison, before the logarithm.
    if new - old <= 2.0 * scale {
        return new;
    }
    let critical = critical();
    if new <= critical {
        return new;
    }
    if old > 0.0 {
        let growth = 1.0 + (new - old) / scale;
        old + scale * growth.max(1.0).ln()
    } else {
        // From the blocked side the first move ends where conduction begins.
        critical.min(new)
    }
}

/// Limits a climb into a law that turns linear within `width` of its knee: stop at the knee first.
fn climb_linear(old: f64, new: f64, knee: f64, width: f64) -> f64 {
    if old < knee - width && new > knee + width {
        knee
    } else {
        new
    }
}

/// The charge of a junction in numbers.
#[derive(Clone, Copy, Debug, Default)]
pub struct Depletion {
    /// C0 [F] at zero voltage.
    pub capacitance: f64,
    /// V [V].
    pub built_in: f64,
    /// m, 0 for a constant capacitance.
    pub exponent: f64,
}

impl Depletion {
    /// Charge [C] and capacitance [F] at a junction voltage [V].
    #[inline]
    pub fn charge(&self, v: f64) -> (f64, f64) {
        let (c, b, m) = (self.capacitance, self.built_in, self.exponent);
        if m == 0.0 {
            return (c * v, c);
        }
        let half = 0.5 * b;
        let below = v.min(half) / b;
        // 1 - (1 - below)^(1 - m), which must not lose its digits near zero: an instant divides the charge by its length.
        let fallen = if m == 0.5 {
            below / (1.0 + (1.0 - below).sqrt())
        } else {
            -((1.0 - m) * (-below).ln_1p()).exp_m1()
        };
        let mut charge = c * b / (1.0 - m) * fallen;
        let mut capacitance = c * (1.0 - fallen) / (1.0 - below);
        if v > half {
            let top = c * 2f64.powf(m);
            charge += top * ((1.0 - m) * (v - half) + m * (v * v - half * half) / b);
            capacitance = top * (1.0 + m * (2.0 * v / b - 1.0));
        }
        (charge, capacitance)
    }

    /// Energy, the integral of v dq from 0 [J].
    pub fn energy(&self, v: f64) -> f64 {
        let (c, b, m) = (self.capacitance, self.built_in, self.exponent);
        if m == 0.0 {
            return 0.5 * c * v * v;
        }
        let half = 0.5 * b;
        let rest = 1.0 - v.min(half) / b;
        let mut energy = c
            * b
            * b
            * ((1.0 - rest.powf(1.0 - m)) / (1.0 - m) - (1.0 - rest.powf(2.0 - m)) / (2.0 - m));
        if v > half {
            let top = c * 2f64.powf(m);
            energy += top
                * ((1.0 - m) * (v * v - half * half) / 2.0
                    + 2.0 * m * (v.powi(3) - half.powi(3)) / (3.0 * b));
        }
        energy
    }
}

/// Energy [J] that moves a charge law `q` [C] at once from one voltage [V] to another: the integral of v dq, taken in
/// parts as v q less the integral of q dv over stretches that double in width from zero on, the first `width` [V] wide.
pub fn charging(from: f64, to: f64, width: f64, q: impl Fn(f64) -> f64) -> f64 {
    let rule = Rule::legendre(8);
    let up_to = |end: f64| {
        let (mut sum, mut near, mut step) = (0.0, 0.0, width);
        while near < end.abs() {
            let far = end.abs().min(near + step);
            sum += rule.integrate(near.copysign(end), far.copysign(end), &q);
            (near, step) = (far, 2.0 * step);
        }
        sum
    };
    to * q(to) - from * q(from) - (up_to(to) - up_to(from))
}

/// Keys of a forward junction.
pub const SATURATION_CURRENT: &str = "saturation_current";

/// The keys that say how a junction stores charge.
pub const CHARGE_KEYS: [Key; 4] = [
    Key::default(
        "junction_capacitance",
        Takes::Quantity(units::CAPACITANCE),
        "0 F",
        "depletion capacitance at zero voltage",
    ),
    Key::default(
        "built_in_potential",
        Takes::Quantity(units::VOLTAGE),
        "0.7 V",
        "potential of the depletion law",
    ),
    Key::default(
        "depletion_exponent",
        Takes::Quantity(units::RATIO),
        "0.5",
        "exponent of the depletion law; 0 is a constant capacitance",
    ),
    Key::default(
        "transit_time",
        Takes::Quantity(units::TIME),
        "0 s",
        "stored charge over forward current",
    ),
];

/// Handles of the charge keys.
#[derive(Clone, Copy)]
pub struct ChargeKeys([Value; 4]);

impl ChargeKeys {
    /// Reads the charge keys.
    pub fn read(fields: &Fields<'_>) -> Option<Self> {
        let capacitance = fields.non_negative("junction_capacitance");
        let built_in = fields.positive("built_in_potential");
        let exponent = fields.within("depletion_exponent", 0.0, 0.95);
        let transit = fields.non_negative("transit_time");
        Some(ChargeKeys([capacitance?, built_in?, exponent?, transit?]))
    }

    /// Depletion and transit time [s].
    pub fn derive(&self, values: &Values) -> (Depletion, f64) {
        let [capacitance, built_in, exponent, transit] = self.0.map(|key| values[key]);
        (
            Depletion {
                capacitance,
                built_in,
                exponent,
            },
            transit,
        )
    }
}

/// Saturation current at temperature `t` [K] from that at `t0`.
pub fn saturation_at(current: f64, n: f64, band_gap: f64, t: f64, t0: f64) -> f64 {
    let scale = n * VOLTS_PER_KELVIN;
    current * (t / t0).powf(3.0 / n) * (-(band_gap / scale) * (1.0 / t - 1.0 / t0)).exp()
}

/// What sets the slope resistance of a breakdown.
#[derive(Clone, Copy)]
pub enum Slope {
    /// The resistance itself.
    Resistance(Value),
    /// A second point of the curve: clamping voltage and its current.
    Clamping(Value, Value),
}

/// Handles of a breakdown's keys.
#[derive(Clone, Copy)]
pub struct BreakdownKeys {
    /// Voltage at `current`.
    pub voltage: Value,
    /// Current at which the voltage holds.
    pub current: Value,
    /// What sets the slope.
    pub slope: Slope,
    /// Relative change of the voltage per kelvin.
    pub coefficient: Value,
}

impl BreakdownKeys {
    /// The breakdown at temperature `t` [K].
    pub fn derive(&self, values: &Values, t: f64, t0: f64) -> Result<Breakdown, Unsound> {
        let start = values[self.current];
        let resistance = match self.slope {
            Slope::Resistance(value) => values[value],
            Slope::Clamping(voltage, current) => {
                (values[voltage] - values[self.voltage]) / (values[current] - start)
            }
        };
        if resistance.is_nan() || resistance <= 0.0 || resistance.is_infinite() {
            return Err(Unsound {
                word: "out-of-range",
                key: "clamping",
                headline: "the clamping point does not lie above the breakdown point".into(),
                help: "clamping voltage and current both exceed breakdown voltage and current"
                    .into(),
            });
        }
        let voltage = values[self.voltage] * (1.0 + values[self.coefficient] * (t - t0));
        let knee = voltage - resistance * start;
        if knee.is_nan() || knee <= 0.0 {
            return Err(Unsound {
                word: "out-of-range",
                key: "breakdown_resistance",
                headline: format!("the breakdown would begin at {knee:.3} V"),
                help: "`breakdown_voltage` must exceed `breakdown_resistance` times `breakdown_current`".into(),
            });
        }
        Ok(Breakdown {
            knee,
            resistance,
            softness: VOLTS_PER_KELVIN * t,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    const SHAPE: Depletion = Depletion {
        capacitance: 20e-12,
        built_in: 0.7,
        exponent: 0.5,
    };

    #[test]
    fn a_charge_near_zero_keeps_its_digits() {
        // C v (1 + m v/(2 V)), the law's own series.
        for exponent in [0.3, 0.5, 0.7] {
            let shape = Depletion { exponent, ..SHAPE };
            for v in [-1e-9, -1e-13, 1e-16, 1e-12] {
                let series = 20e-12 * v * (1.0 + 0.5 * exponent * v / 0.7);
                assert_relative_eq!(shape.charge(v).0, series, max_relative = 1e-15);
            }
        }
    }

    #[test]
    fn charging_at_once_takes_the_energy_of_the_state_function() {
        for (from, to) in [(-300.0, 0.3), (0.5, -40.0), (0.0, 200.0), (-2.0, -1.0)] {
            let charged = charging(from, to, 0.03, |v| SHAPE.charge(v).0);
            let stored = SHAPE.energy(to) - SHAPE.energy(from);
            assert_relative_eq!(charged, stored, max_relative = 1e-9);
        }
        // Transit charge: the integral of v dq of Is (exp(v/s) - 1) is Is (exp(v/s) (v - s) + s).
        let s = 0.0466;
        let charged = charging(0.0, 0.8, s, |v| 1e-9 * (v / s).exp_m1());
        let stored = 1e-9 * ((0.8 / s).exp() * (0.8 - s) + s);
        assert_relative_eq!(charged, stored, max_relative = 1e-9);
    }

    #[test]
    fn charge_and_energy_are_integrals_of_the_capacitance() {
        for v in [-30.0, -1.0, 0.0, 0.2, 0.35, 0.5, 1.0] {
            let h = 1e-5;
            let (up, down) = (SHAPE.charge(v + h).0, SHAPE.charge(v - h).0);
            assert_relative_eq!(
                (up - down) / (2.0 * h),
                SHAPE.charge(v).1,
                max_relative = 1e-5
            );
            let slope = (SHAPE.energy(v + h) - SHAPE.energy(v - h)) / (2.0 * h);
            assert_relative_eq!(
                slope,
                v * SHAPE.charge(v).1,
                max_relative = 1e-5,
                epsilon = 1e-17
            );
        }
    }

    #[test]
    fn slopes_are_derivatives_over_the_whole_range() {
        let s = VOLTS_PER_KELVIN * 300.0;
        let knee = Breakdown {
            knee: 24.0,
            resistance: 2.0,
            softness: s,
        };
        let law = Conduction::new(1e-9, 1.8 * s, Some(knee));
        for v in [
            -1000.0_f64,
            -25.0,
            -24.0,
            -23.9,
            -1.0,
            0.0,
            1e-5,
            0.4,
            0.8,
            3.0,
            1000.0,
        ] {
            let h = 1e-6 * (1.0 + v.abs());
            let slope = (law.current(v + h).0 - law.current(v - h).0) / (2.0 * h);
            assert_relative_eq!(
                slope.max(LEAST_SLOPE),
                law.current(v).1,
                max_relative = 2e-3,
                epsilon = 1e-14
            );
            assert!(law.current(v).0.is_finite());
        }
    }
}
