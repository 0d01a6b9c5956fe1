//! Diode: a junction behind its series resistance, with depletion and transit charge and, where rated, breakdown.

use super::claims::{Claims, Measure, Wanted};
use super::element::{Element, Energy, Path, PathKind, Point, Unknown, Unsound};
use super::junction::{
    BreakdownKeys, CHARGE_KEYS, ChargeKeys, Conduction, Depletion, REACH, Slope, VOLTS_PER_KELVIN,
    charging, saturation_at,
};
use super::kind::{ElementKind, Made, Surroundings, named, reference_temperature};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "diode",
    about: "A junction diode with series resistance, charge and, if given, breakdown.",
    keys: &KEYS,
    read: |fields, around| read_diode(fields, around, false),
};

/// The keys of `diode`; a zener takes the same, its breakdown required.
pub const KEYS: [Key; 14] = keys(false);

/// The key table, with breakdown optional or required.
pub const fn keys(zener: bool) -> [Key; 14] {
    let voltage = Takes::Quantity(units::VOLTAGE);
    let resistance = Takes::Quantity(units::RESISTANCE);
    let [capacitance, built_in, exponent, transit] = CHARGE_KEYS;
    [
        Key::required("anode", Takes::Name("node"), "node of the anode"),
        Key::required("cathode", Takes::Name("node"), "node of the cathode"),
        Key::required(
            "saturation_current",
            Takes::Quantity(units::CURRENT),
            "saturation current at the reference temperature",
        ),
        Key::required(
            "ideality_factor",
            Takes::Quantity(units::RATIO),
            "ideality factor, 1 to 2 for a single junction",
        ),
        Key::default(
            "series_resistance",
            resistance,
            "0 Ω",
            "resistance in series with the junction",
        ),
        capacitance,
        built_in,
        exponent,
        transit,
        if zener {
            Key::required(
                "breakdown_voltage",
                voltage,
                "reverse voltage at the breakdown current",
            )
        } else {
            Key::optional(
                "breakdown_voltage",
                voltage,
                "reverse voltage at the breakdown current; none without",
            )
        },
        Key::default(
            "breakdown_current",
            Takes::Quantity(units::CURRENT),
            "0 A",
            "current at which the breakdown voltage holds",
        ),
        if zener {
            Key::required(
                "breakdown_resistance",
                resistance,
                "slope resistance in breakdown",
            )
        } else {
            Key::optional(
                "breakdown_resistance",
                resistance,
                "slope resistance in breakdown",
            )
        },
        Key::default(
            "breakdown_temperature_coefficient",
            Takes::Quantity(units::TEMPERATURE_COEFFICIENT),
            "0 /K",
            "relative change of the breakdown voltage per kelvin",
        ),
        Key::default(
            "band_gap",
            voltage,
            "1.12 V",
            "band gap over the elementary charge, for the temperature law",
        ),
    ]
}

/// Handles of a junction's keys.
pub struct JunctionKeys {
    /// As the key of this name.
    pub saturation_current: Value,
    /// As the key of this name.
    pub ideality_factor: Value,
    /// As the key of this name.
    pub series_resistance: Value,
    /// As the key of this name.
    pub charge: ChargeKeys,
    /// As the key of this name.
    pub breakdown: Option<BreakdownKeys>,
    /// As the key of this name.
    pub band_gap: Value,
    /// As the key of this name.
    pub ambient: Value,
    /// As the key of this name.
    pub reference: Value,
}

/// A diode, a zener or one direction of a suppressor diode.
pub struct Diode {
    keys: JunctionKeys,
    law: Conduction,
    depletion: Depletion,
    transit: f64,
    resistance: f64,
    /// Which terminal is the anode and which the cathode.
    order: (usize, usize),
    anode: Unknown,
    cathode: Unknown,
    /// Potential between series resistance and junction.
    inner: Option<Unknown>,
    /// The anode current where it is an unknown.
    current: Option<Unknown>,
}

/// Reads a diode or zener with terminals `anode` and `cathode`.
pub fn read_diode(fields: &Fields<'_>, around: &Surroundings<'_>, zener: bool) -> Option<Made> {
    let terminals = named(fields, &["anode", "cathode"]);
    let diode = read_junction(fields, around, zener);
    Some(Made::new(terminals?, diode?))
}

/// Reads the junction's own keys.
fn read_junction(fields: &Fields<'_>, around: &Surroundings<'_>, zener: bool) -> Option<Diode> {
    let saturation_current = fields.positive("saturation_current");
    let ideality_factor = fields.positive("ideality_factor");
    let series_resistance = fields.non_negative("series_resistance");
    let charge = ChargeKeys::read(fields);
    let band_gap = fields.positive("band_gap");
    let reference = reference_temperature(fields, around);
    let breakdown =
        if zener || fields.has("breakdown_voltage") || fields.has("breakdown_resistance") {
            Some(read_breakdown(fields))
        } else {
            None
        };
    let keys = JunctionKeys {
        saturation_current: saturation_current?,
        ideality_factor: ideality_factor?,
        series_resistance: series_resistance?,
        charge: charge?,
        breakdown: match breakdown {
            Some(keys) => Some(keys?),
            None => None,
        },
        band_gap: band_gap?,
        ambient: around.ambient,
        reference: reference?,
    };
    Some(Diode::new(keys, (0, 1)))
}

/// Reads the breakdown keys; voltage and resistance are needed together.
pub fn read_breakdown(fields: &Fields<'_>) -> Option<BreakdownKeys> {
    let voltage = fields.needed_with("breakdown_voltage", "breakdown_resistance");
    let resistance = fields.needed_with("breakdown_resistance", "breakdown_voltage");
    let current = fields.non_negative("breakdown_current");
    let coefficient = fields.value("breakdown_temperature_coefficient");
    let slope = Slope::Resistance(resistance?);
    Some(BreakdownKeys {
        voltage: voltage?,
        current: current?,
        slope,
        coefficient: coefficient?,
    })
}

impl Diode {
    /// A diode whose anode and cathode are these of the element's terminals.
    pub fn new(keys: JunctionKeys, order: (usize, usize)) -> Self {
        Diode {
            keys,
            law: Conduction::default(),
            depletion: Depletion::default(),
            transit: 0.0,
            resistance: 0.0,
            order,
            anode: Unknown::GROUND,
            cathode: Unknown::GROUND,
            inner: None,
            current: None,
        }
    }

    /// The unknown at the junction's anode side.
    fn top(&self) -> Unknown {
        self.inner.unwrap_or(self.anode)
    }

    fn junction_voltage(&self, x: &[f64]) -> f64 {
        self.top().of(x) - self.cathode.of(x)
    }

    /// Current through the junction's conduction alone [A].
    fn conduction(&self, x: &[f64]) -> f64 {
        self.law.current(self.junction_voltage(x)).0
    }

    /// Charge [C] and capacitance [F] of the junction.
    fn charge(&self, v: f64) -> (f64, f64) {
        let (charge, capacitance) = self.depletion.charge(v);
        if self.transit == 0.0 {
            return (charge, capacitance);
        }
        let (forward, slope) = self.law.forward(v);
        (
            charge + self.transit * forward,
            capacitance + self.transit * slope,
        )
    }

    fn stores(&self) -> bool {
        self.depletion.capacitance > 0.0 || self.transit > 0.0
    }
}

impl Element for Diode {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        let (t, t0) = (values[self.keys.ambient], values[self.keys.reference]);
        let n = values[self.keys.ideality_factor];
        let is = values[self.keys.saturation_current];
        let breakdown = match &self.keys.breakdown {
            Some(keys) => Some(keys.derive(values, t, t0)?),
            None => None,
        };
        self.law = Conduction::new(
            saturation_at(is, n, values[self.keys.band_gap], t, t0),
            n * VOLTS_PER_KELVIN * t,
            breakdown,
        );
        (self.depletion, self.transit) = self.keys.charge.derive(values);
        self.resistance = values[self.keys.series_resistance];
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let (anode, cathode) = self.order;
        (self.anode, self.cathode) = (claims.terminal(anode), claims.terminal(cathode));
        self.inner =
            (self.resistance > 0.0).then(|| claims.unknown("junction potential", Measure::Voltage));
        claims.reach([self.top(), self.cathode], REACH);
        let followed = claims.wants(Wanted::Current(0)) || claims.wants(Wanted::Current(1));
        let hidden = claims.probed && self.inner.is_none() && self.stores();
        self.current = (followed || hidden).then(|| claims.unknown("current", Measure::Current));
        if let Some(current) = self.current {
            claims.offer(Wanted::Current(anode), current, 1.0);
            claims.offer(Wanted::Current(cathode), current, -1.0);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let top = self.top();
        let v = self.junction_voltage(at.x);
        let (conduction, slope) = self.law.current(v);
        let (charge, capacitance) = self.charge(v);
        if let Some(j) = self.inner {
            let g = 1.0 / self.resistance;
            let through = g * (self.anode.of(at.x) - j.of(at.x));
            match self.current {
                None => into.branch(self.anode, j, through, g),
                Some(i) => {
                    into.carry(self.anode, j, i, i.of(at.x));
                    into.f(
                        i,
                        self.resistance * i.of(at.x) - (self.anode.of(at.x) - j.of(at.x)),
                    );
                    into.df(i, i, self.resistance);
                    into.df(i, self.anode, -1.0);
                    into.df(i, j, 1.0);
                }
            }
            into.branch(j, self.cathode, conduction, slope);
            into.store(j, self.cathode, charge, capacitance);
            return;
        }
        match self.current {
            None => {
                into.branch(top, self.cathode, conduction, slope);
                into.store(top, self.cathode, charge, capacitance);
            }
            Some(i) => {
                into.carry(top, self.cathode, i, i.of(at.x));
                into.f(i, conduction - i.of(at.x));
                into.df(i, i, -1.0);
                into.df(i, top, slope);
                into.df(i, self.cathode, -slope);
                into.q(i, charge);
                into.dq(i, top, capacitance);
                into.dq(i, self.cathode, -capacitance);
            }
        }
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        let old = self.junction_voltage(x);
        let step = self.junction_voltage(dx);
        let limited = self.law.limited(old, old + step);
        if limited == old + step {
            return false;
        }
        let wanted = limited - old;
        // The junction's own unknown gives way; a grounded anode leaves the cathode to do so.
        let top = self.top();
        if let Some(value) = dx.get_mut(top.0 as usize) {
            *value += wanted - step;
        } else if let Some(value) = dx.get_mut(self.cathode.0 as usize) {
            *value -= wanted - step;
        }
        true
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::Conductive,
        }]
    }
}

impl Energy for Diode {
    fn impulse(&self, before: &[f64], after: &[f64]) -> Option<f64> {
        if self.inner.is_some() || !self.stores() {
            return None;
        }
        let [from, to] = [before, after].map(|x| self.junction_voltage(x));
        let width = self.law.slope_voltage;
        Some(charging(from, to, width, |v| self.charge(v).0))
    }

    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = match (self.current, self.inner) {
            (Some(i), _) => i.of(at.x),
            (None, Some(j)) => (self.anode.of(at.x) - j.of(at.x)) / self.resistance,
            (None, None) => self.conduction(at.x),
        };
        out[self.order.0] = current;
        out[self.order.1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let v = self.junction_voltage(at.x);
        let drop = self.anode.of(at.x) - self.top().of(at.x);
        let series = if self.resistance > 0.0 {
            drop * drop / self.resistance
        } else {
            0.0
        };
        v * self.law.current(v).0 + series
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let v = self.junction_voltage(at.x);
        let mut energy = self.depletion.energy(v);
        if self.transit > 0.0 {
            // Integral of v dq with q = transit time times the forward current.
            let (forward, _) = self.law.forward(v);
            let below = self.law.slope_voltage * forward - self.law.saturation_current * v;
            energy += self.transit * (v * forward - below);
        }
        energy
    }
}
