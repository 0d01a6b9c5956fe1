//! Suppressor diode: made for breakdown. With `directions: one` a diode whose first node is the cathode; with `both`
//! i = b(v) - b(-v), b(v) = (s/Rb) ln(1 + exp((v - Vb)/s)), no forward junction.

use super::claims::Claims;
use super::diode::{Diode, JunctionKeys};
use super::element::{Branch, Element, Energy, Path, PathKind, Point, Unsound};
use super::junction::{
    Breakdown, BreakdownKeys, CHARGE_KEYS, ChargeKeys, LEAST_SLOPE, REACH, Slope,
};
use super::kind::{ElementKind, Made, NODES, Surroundings, pair, reference_temperature};
use super::stamper::Stamper;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units;

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "suppressor_diode",
    about: "A diode made to absorb pulses in breakdown, in one direction or both.",
    keys: &KEYS,
    read,
};

const KEYS: [Key; 16] = {
    let voltage = Takes::Quantity(units::VOLTAGE);
    let [capacitance, built_in, exponent, transit] = CHARGE_KEYS;
    [
        NODES,
        Key::required(
            "directions",
            Takes::Word(&["one", "both"]),
            "one: the first node is the cathode; both: symmetrical",
        ),
        Key::required(
            "breakdown_voltage",
            voltage,
            "voltage at the breakdown current",
        ),
        Key::default(
            "breakdown_current",
            Takes::Quantity(units::CURRENT),
            "0 A",
            "current at which the breakdown voltage holds",
        ),
        Key::optional(
            "breakdown_resistance",
            Takes::Quantity(units::RESISTANCE),
            "slope resistance in breakdown",
        ),
        Key::optional(
            "clamping",
            Takes::Map(CLAMPING_KEYS),
            "a point of the clamping curve, instead of the slope resistance",
        ),
        Key::default(
            "breakdown_temperature_coefficient",
            Takes::Quantity(units::TEMPERATURE_COEFFICIENT),
            "0 /K",
            "relative change of the breakdown voltage per kelvin",
        ),
        capacitance,
        built_in,
        exponent,
        transit,
        Key::default(
            "saturation_current",
            Takes::Quantity(units::CURRENT),
            "1 nA",
            "saturation current of the forward junction (directions: one)",
        ),
        Key::default(
            "ideality_factor",
            Takes::Quantity(units::RATIO),
            "1.5",
            "ideality factor of the forward junction (directions: one)",
        ),
        Key::default(
            "series_resistance",
            Takes::Quantity(units::RESISTANCE),
            "0 Ω",
            "resistance in series (directions: one)",
        ),
        Key::default(
            "band_gap",
            voltage,
            "1.12 V",
            "band gap of the forward junction (directions: one)",
        ),
        Key::default(
            "capacitance",
            Takes::Quantity(units::CAPACITANCE),
            "0 F",
            "constant capacitance (directions: both)",
        ),
    ]
};

/// The keys of `clamping`.
const CLAMPING_KEYS: &[Key] = &[
    Key::required(
        "voltage",
        Takes::Quantity(units::VOLTAGE),
        "clamping voltage",
    ),
    Key::required(
        "current",
        Takes::Quantity(units::CURRENT),
        "current at that voltage",
    ),
];

struct BothWays {
    breakdown_keys: BreakdownKeys,
    capacitance_keys: [Value; 2],
    ambient: Value,
    reference: Value,
    breakdown: Breakdown,
    capacitance: f64,
    branch: Branch,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let terminals = pair(fields);
    let directions = fields.word("directions");
    let breakdown = read_breakdown(fields);
    let reference = reference_temperature(fields, around);
    if directions? == "one" {
        let charge = ChargeKeys::read(fields);
        let saturation_current = fields.positive("saturation_current");
        let ideality_factor = fields.positive("ideality_factor");
        let series_resistance = fields.non_negative("series_resistance");
        let band_gap = fields.positive("band_gap");
        let keys = JunctionKeys {
            saturation_current: saturation_current?,
            ideality_factor: ideality_factor?,
            series_resistance: series_resistance?,
            charge: charge?,
            breakdown: Some(breakdown?),
            band_gap: band_gap?,
            ambient: around.ambient,
            reference: reference?,
        };
        return Some(Made::new(terminals?, Diode::new(keys, (1, 0))));
    }
    // A depletion law has no sense for two junctions back to back: both keys are constant capacitances here.
    let capacitance = fields.non_negative("capacitance");
    let junction = fields.non_negative("junction_capacitance");
    let element = BothWays {
        breakdown_keys: breakdown?,
        capacitance_keys: [capacitance?, junction?],
        ambient: around.ambient,
        reference: reference?,
        breakdown: Breakdown::default(),
        capacitance: 0.0,
        branch: Branch::default(),
    };
    Some(Made::new(terminals?, element))
}

/// Reads the breakdown with its slope from a resistance or from a clamping point.
fn read_breakdown(fields: &Fields<'_>) -> Option<BreakdownKeys> {
    let voltage = fields.positive("breakdown_voltage");
    let current = fields.non_negative("breakdown_current");
    let coefficient = fields.value("breakdown_temperature_coefficient");
    let slope = match (fields.has("breakdown_resistance"), fields.has("clamping")) {
        (true, false) => fields
            .positive("breakdown_resistance")
            .map(Slope::Resistance),
        (false, true) => fields.map("clamping").and_then(|clamping| {
            let voltage = clamping.positive("voltage");
            let current = clamping.positive("current");
            clamping.finish();
            Some(Slope::Clamping(voltage?, current?))
        }),
        _ => {
            fields.error_here(
                "one-of",
                "a suppressor diode takes either `breakdown_resistance` or `clamping`".into(),
                "write one of the two",
                "`clamping: {voltage: 40 V, current: 10 A}` is the point that data sheets give",
            );
            None
        }
    };
    Some(BreakdownKeys {
        voltage: voltage?,
        current: current?,
        slope: slope?,
        coefficient: coefficient?,
    })
}

impl BothWays {
    /// Current [A] and slope [S].
    fn current(&self, v: f64) -> (f64, f64) {
        let (up, up_slope) = self.breakdown.current(v);
        let (down, down_slope) = self.breakdown.current(-v);
        (up - down, (up_slope + down_slope).max(LEAST_SLOPE))
    }
}

impl Element for BothWays {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.breakdown =
            self.breakdown_keys
                .derive(values, values[self.ambient], values[self.reference])?;
        self.capacitance = self.capacitance_keys.iter().map(|&key| values[key]).sum();
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        let hidden = claims.probed && self.capacitance > 0.0;
        self.branch = Branch::claim(claims, hidden);
        claims.reach([self.branch.a, self.branch.b], REACH);
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        let voltage = self.branch.voltage(at.x);
        let (current, slope) = self.current(voltage);
        self.branch.conduct(at.x, current, slope, into);
        self.branch
            .store(self.capacitance * voltage, self.capacitance, into);
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn limit(&self, x: &[f64], dx: &mut [f64]) -> bool {
        self.breakdown.limit_both_ways(&self.branch, x, dx)
    }

    fn paths(&self) -> Vec<Path> {
        vec![Path {
            from: 0,
            to: 1,
            kind: PathKind::Conductive,
        }]
    }
}

impl Energy for BothWays {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let current = self
            .branch
            .current
            .map_or_else(|| self.current(self.branch.voltage(at.x)).0, |i| i.of(at.x));
        out[0] = current;
        out[1] = -current;
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let voltage = self.branch.voltage(at.x);
        voltage * self.current(voltage).0
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        0.5 * self.capacitance * self.branch.voltage(at.x).powi(2)
    }
}
