//! A magnetization curve through measured points.
//!
//! B(H) is a monotone cubic ([`crate::math::curves`]) in which dB/dH never falls below mu0; beyond the last
//! point the slope is mu0. Odd: the points are those of the first quadrant. The energy is exact for the cubic.

use super::{Magnetization, Magnetized, Material, MaterialKind};
use crate::magnetics::MU0;
use crate::magnetics::geometry::Fault;
use crate::math::curves::{Fault as CurveFault, Monotone};
use crate::math::quadrature::two_points;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::{FIELD_STRENGTH, FLUX_DENSITY};
use std::sync::Arc;

/// A material told by points of its curve.
pub const KIND: MaterialKind = MaterialKind {
    word: "curve",
    about: "a monotone curve through measured points",
    told_by: "curve",
    keys: KEYS,
    read,
};

const KEYS: &[Key] = &[Key::optional(
    "curve",
    Takes::Pairs(FIELD_STRENGTH, FLUX_DENSITY),
    "points [field strength, flux density] of the first quadrant",
)];

/// An odd curve through points [H, B].
#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    curve: Monotone,
    /// ∫ H dB from zero to each point [J/m³].
    energy: Vec<f64>,
}

/// Why points make no magnetization curve; rows count from 0 as given.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TableFault {
    /// There is no point besides the origin.
    Empty,
    /// The first point has B without H, or lies outside the first quadrant.
    NotAtOrigin,
    /// A number is not finite.
    NotFinite(usize),
    /// H does not rise from the row before.
    FieldFalls(usize),
    /// B rises from the row before by less than mu0 times the rise of H.
    BelowVacuum(usize),
}

impl Table {
    /// A curve through (`fields` [A/m], `flux_densities` [T]); the origin is added where it is not given.
    pub fn new(fields: &[f64], flux_densities: &[f64]) -> Result<Self, TableFault> {
        let (Some(&h), Some(&b)) = (fields.first(), flux_densities.first()) else {
            return Err(TableFault::Empty);
        };
        let given = h == 0.0 && b == 0.0;
        if !given && (h <= 0.0 || b <= 0.0) {
            return Err(TableFault::NotAtOrigin);
        }
        let origin: &[f64] = if given { &[] } else { &[0.0] };
        let x = [origin, fields].concat();
        let y = [origin, flux_densities].concat();
        let row = |k: usize| k - origin.len();
        let (Some(&h), Some(&b)) = (x.get(1), y.get(1)) else {
            return Err(TableFault::Empty);
        };
        // Odd, so the parabola through the origin and its two neighbours is the chord itself.
        let curve = Monotone::new(&x, &y, MU0, b / h, MU0).map_err(|fault| match fault {
            CurveFault::TooFew => TableFault::Empty,
            CurveFault::NotFinite(k) => TableFault::NotFinite(row(k)),
            CurveFault::XFalls(k) => TableFault::FieldFalls(row(k)),
            CurveFault::TooFlat(k) => TableFault::BelowVacuum(row(k)),
        })?;
        let mut energy = vec![0.0];
        for pair in curve.x().windows(2) {
            let before = energy[energy.len() - 1];
            energy.push(before + work(&curve, pair[0], pair[1]));
        }
        Ok(Table { curve, energy })
    }
}

/// ∫ H dB = ∫ H (dB/dH) dH between fields of one piece: a cubic in H, for which two Gauss points are exact.
fn work(curve: &Monotone, from: f64, to: f64) -> f64 {
    two_points(from, to, |h| h * curve.at(h).1)
}

#[derive(Debug)]
struct Written {
    points: Vec<(Value, Value)>,
}

fn read(fields: &Fields<'_>) -> Option<Box<dyn Material>> {
    let written = Written {
        points: fields.pairs("curve")?,
    };
    let nominal = fields.reader().parameters.borrow().nominal();
    let Err(fault) = written.table(&nominal) else {
        return Some(Box::new(written));
    };
    let (row, headline) = fault.told();
    let items = fields.node("curve").map_or(&[][..], |node| node.items());
    let place = items
        .get(row)
        .map_or(fields.span("curve"), |item| item.span);
    let diagnostic = crate::diag::Diagnostic::error("bad-curve", headline).at(place, fault.label());
    fields
        .reader()
        .sink
        .report(diagnostic.help("curve: [[0 A/m, 0 T], [100 A/m, 0.2 T], [400 A/m, 0.35 T]]"));
    None
}

impl Written {
    fn table(&self, values: &Values) -> Result<Table, TableFault> {
        let fields: Vec<f64> = self.points.iter().map(|&(h, _)| values[h]).collect();
        let densities: Vec<f64> = self.points.iter().map(|&(_, b)| values[b]).collect();
        Table::new(&fields, &densities)
    }
}

impl Material for Written {
    fn derive(&self, values: &Values, _temperature: f64) -> Result<Magnetized, Fault> {
        match self.table(values) {
            Ok(table) => Ok(Magnetized {
                curve: Arc::new(table),
                remarks: Vec::new(),
            }),
            Err(fault) => Err(Fault {
                word: "bad-curve",
                key: "curve",
                text: fault.told().1,
                help: "check the spread of its points",
            }),
        }
    }
}

impl TableFault {
    /// The row at fault, from 0, and a sentence with rows counted from 1.
    fn told(self) -> (usize, String) {
        match self {
            TableFault::Empty => (
                0,
                "curve needs at least one point besides the origin".into(),
            ),
            TableFault::NotAtOrigin => (
                0,
                "curve starts at [0 A/m, 0 T] or in the first quadrant".into(),
            ),
            TableFault::NotFinite(k) => (k, format!("row {} of curve is not finite", k + 1)),
            TableFault::FieldFalls(k) => (
                k,
                format!(
                    "row {} of curve must have more field strength than the row before",
                    k + 1
                ),
            ),
            TableFault::BelowVacuum(k) => (
                k,
                format!(
                    "row {} of curve rises by less than mu0 from the row before",
                    k + 1
                ),
            ),
        }
    }

    fn label(self) -> &'static str {
        match self {
            TableFault::Empty => "too few points",
            TableFault::NotAtOrigin => "the curve is odd: write the half with H and B above zero",
            TableFault::NotFinite(_) => "not finite",
            TableFault::FieldFalls(_) => "rows go from weak to strong fields",
            TableFault::BelowVacuum(_) => "even saturated iron gains mu0 (1.2566 µT per A/m)",
        }
    }
}

impl Magnetization for Table {
    fn flux_density(&self, field: f64) -> (f64, f64) {
        let (b, slope) = self.curve.at(field.abs());
        (b.copysign(field), slope)
    }

    #[inline]
    fn field(&self, flux_density: f64) -> (f64, f64) {
        let (h, slope) = self.curve.inverse(flux_density.abs());
        (h.copysign(flux_density), 1.0 / slope)
    }

    fn energy_density(&self, flux_density: f64) -> f64 {
        let b = flux_density.abs();
        let h = self.curve.inverse(b).0;
        let known = self
            .curve
            .y()
            .partition_point(|&y| y <= b)
            .saturating_sub(1);
        self.energy[known] + work(&self.curve, self.curve.x()[known], h)
    }

    fn bends(&self) -> Vec<f64> {
        let mut fields: Vec<f64> = self.curve.x()[1..].to_vec();
        fields.extend(self.curve.turning_slopes());
        fields.sort_by(f64::total_cmp);
        fields.into_iter().map(|h| self.curve.at(h).0).collect()
    }

    fn known_to(&self) -> Option<f64> {
        self.curve.y().last().copied()
    }
}

#[cfg(test)]
mod tests {
    use super::super::laws;
    use super::*;
    use crate::math::quadrature::Rule;

    fn knee() -> Table {
        Table::new(
            &[0.0, 20.0, 60.0, 200.0, 1000.0, 5000.0, 40_000.0],
            &[0.0, 0.05, 0.9, 1.3, 1.5, 1.7, 2.0],
        )
        .unwrap()
    }

    #[test]
    fn the_curve_keeps_the_laws_of_magnetization() {
        laws::hold(&knee(), 3.0);
        // A square loop's knee: from a steep rise to nearly the vacuum's slope within one row.
        let square = Table::new(&[10.0, 1e5], &[1.0, 1.0 + 1.01 * MU0 * (1e5 - 10.0)]).unwrap();
        laws::hold(&square, 2.0);
    }

    #[test]
    fn points_are_met_and_the_origin_may_be_left_out() {
        let table = knee();
        for (h, b) in [(20.0, 0.05), (60.0, 0.9), (40_000.0, 2.0)] {
            assert!((table.flux_density(h).0 - b).abs() < 1e-15);
            assert!((table.flux_density(-h).0 + b).abs() < 1e-15);
        }
        assert_eq!(table.known_to(), Some(2.0));
        assert_eq!(
            Table::new(&[20.0, 60.0], &[0.05, 0.9]),
            Table::new(&[0.0, 20.0, 60.0], &[0.0, 0.05, 0.9])
        );
    }

    #[test]
    fn the_energy_is_that_of_the_cubic() {
        let table = knee();
        let fine = Rule::legendre(20);
        for b in [0.03, 0.5, 1.0, 1.4, 1.9, 2.5] {
            let mut knots: Vec<f64> = table.curve.y().iter().copied().filter(|&y| y < b).collect();
            knots.push(b);
            let sum: f64 = knots
                .windows(2)
                .map(|pair| fine.integrate(pair[0], pair[1], |b| table.field(b).0))
                .sum();
            assert!(
                (table.energy_density(b) / sum - 1.0).abs() < 2e-6,
                "{b}: {sum}"
            );
        }
    }

    #[test]
    fn faults_name_their_row() {
        let fault = |h: &[f64], b: &[f64]| Table::new(h, b).unwrap_err();
        assert_eq!(fault(&[], &[]), TableFault::Empty);
        assert_eq!(fault(&[0.0], &[0.0]), TableFault::Empty);
        assert_eq!(fault(&[0.0, 10.0], &[0.1, 0.2]), TableFault::NotAtOrigin);
        assert_eq!(fault(&[-10.0, 10.0], &[-0.1, 0.2]), TableFault::NotAtOrigin);
        assert_eq!(fault(&[10.0, 9.0], &[0.1, 0.2]), TableFault::FieldFalls(1));
        assert_eq!(
            fault(&[0.0, 10.0, 10.0], &[0.0, 0.1, 0.2]),
            TableFault::FieldFalls(2)
        );
        assert_eq!(
            fault(&[0.0, 10.0, 20.0], &[0.0, 0.1, 0.1]),
            TableFault::BelowVacuum(2)
        );
        assert_eq!(
            fault(&[10.0, f64::INFINITY], &[0.1, 0.2]),
            TableFault::NotFinite(1)
        );
    }
}
