//! Leakage of windings as written, and the matrix that it comes out as.

use crate::elements::Unsound;
use crate::elements::pairs::Pair;
use crate::magnetics::leakage::{self, Layer};
use crate::netlist::{Value, Values};
use nalgebra::DMatrix;

/// Leakage as read.
pub enum Leakage {
    /// An inductance of each winding's own, in series with it; None for none.
    Own(Vec<Option<Value>>),
    /// Coefficients of coupling.
    Coefficients(Vec<Pair>),
    /// Inductance of the first of a pair with the second one shorted.
    Shorted(Vec<Pair>),
    /// Geometry of concentric windings.
    Concentric(Concentric),
}

/// Geometry of concentric windings as read.
pub struct Concentric {
    /// Axial length.
    pub breadth: Value,
    /// Mean turn of all; that of the core where None.
    pub mean_turn: Option<Value>,
    /// Insulation between neighbours.
    pub spacing: Value,
    /// Radial build of each, from the inside out.
    pub builds: Vec<Value>,
}

/// What leakage hangs on besides its own keys.
pub(super) struct Beside<'a> {
    /// Turns of each winding.
    pub turns: &'a [f64],
    /// Inductance of the field inside each winding's copper that its ladder of skin and proximity effect holds, per turn
    /// squared [H]. A leakage that is measured with a winding shorted, or reckoned from the windings' build, has that
    /// field in it.
    pub inside: &'a [f64],
    /// Permeance of the core at rest [H].
    pub shared: f64,
    /// Mean turn of the core [m], where it is known.
    pub mean_turn: Option<f64>,
}

impl Beside<'_> {
    /// What is left of a pair's permeance [H] outside the copper.
    fn outside(&self, permeance: f64, j: usize, k: usize) -> f64 {
        (permeance - self.inside[j] - self.inside[k]).max(0.0)
    }
}

impl Leakage {
    /// True where leakage inductances are there at all.
    pub(super) fn is_there(&self) -> bool {
        match self {
            Leakage::Own(own) => own.iter().any(Option::is_some),
            _ => true,
        }
    }

    /// Leakage inductances [H].
    ///
    /// # Errors
    /// What no windings on such a core can have.
    pub(super) fn matrix(
        &self,
        values: &Values,
        beside: &Beside<'_>,
    ) -> Result<DMatrix<f64>, Unsound> {
        let turns = beside.turns;
        let mut matrix = self.per_turn(values, beside)?;
        for j in 0..turns.len() {
            for k in 0..turns.len() {
                matrix[(j, k)] *= turns[j] * turns[k];
            }
        }
        Ok(matrix)
    }

    /// The same per turn squared.
    fn per_turn(&self, values: &Values, beside: &Beside<'_>) -> Result<DMatrix<f64>, Unsound> {
        let (turns, count) = (beside.turns, beside.turns.len());
        let (found, key) = match self {
            Leakage::Own(own) => {
                let mut matrix = DMatrix::zeros(count, count);
                for (k, value) in own.iter().enumerate() {
                    let inductance = value.map_or(0.0, |value| values[value]);
                    matrix[(k, k)] = inductance / turns[k].powi(2);
                }
                return Ok(matrix);
            }
            Leakage::Coefficients(pairs) => {
                let mut coefficients = DMatrix::identity(count, count);
                for &(j, k, value) in pairs {
                    coefficients[(j, k)] = values[value];
                    coefficients[(k, j)] = values[value];
                }
                let found = leakage::from_coefficients(beside.shared, &coefficients);
                (found, "coefficient")
            }
            Leakage::Shorted(pairs) => {
                let wanted: Vec<(usize, usize, f64)> = pairs
                    .iter()
                    .map(|&(j, k, value)| {
                        let told = values[value] / turns[j].powi(2);
                        (j, k, beside.outside(told, j, k))
                    })
                    .collect();
                let found = leakage::from_short_circuits(beside.shared, &wanted, count);
                (found, "leakage")
            }
            Leakage::Concentric(concentric) => {
                (concentric.permeances(values, beside)?, "concentric")
            }
        };
        found.map_err(|leakage::Impossible| Unsound {
            word: "impossible-coupling",
            key,
            headline: format!("no windings on this core can have such a `{key}`"),
            help: "a coefficient lies between 0 and 1, and two windings that are both close to a third are close to each \
                   other"
                .into(),
        })
    }
}

impl Concentric {
    fn permeances(
        &self,
        values: &Values,
        beside: &Beside<'_>,
    ) -> Result<Result<DMatrix<f64>, leakage::Impossible>, Unsound> {
        let told = self.mean_turn.map(|value| values[value]);
        let mean_turn = told.or(beside.mean_turn).ok_or_else(|| Unsound {
            word: "no-mean-turn",
            key: "concentric",
            headline:
                "the mean turn of this core is not known, so neither is the leakage of its windings"
                    .into(),
            help: "write `mean_turn: 45 mm` in `concentric` or in the core".into(),
        })?;
        let spacing = values[self.spacing];
        let layers: Vec<Layer> = self
            .builds
            .iter()
            .map(|&build| Layer {
                build: values[build],
                spacing,
            })
            .collect();
        let mut pairs = leakage::concentric(&layers, values[self.breadth], mean_turn);
        for j in 0..layers.len() {
            for k in (0..layers.len()).filter(|&k| k != j) {
                pairs[(j, k)] = beside.outside(pairs[(j, k)], j, k);
            }
        }
        Ok(leakage::from_pairs(&pairs))
    }
}
