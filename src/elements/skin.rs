//! Skin and proximity effect of a winding in time: the sections of its ladder in series with its resistance.
//!
//! ```text
//!         +-- R1 --+   +-- R2 --+        v of section k = R_k (i - j_k)
//!  -- R --+        +---+        +--      L_k d(j_k)/dt  = R_k (i - j_k)
//!         +-- L1 --+   +-- L2 --+
//! ```
//! i is the winding's current and j_k that of each section's inductance, an unknown. A steady current has j_k = i
//! everywhere and meets the winding's resistance alone.

use super::claims::{Claims, Measure};
use super::element::Unknown;
use super::stamper::Stamper;
use crate::magnetics::losses::{Impedance, Ladder};

/// The sections of one winding; none where the effects are not counted.
#[derive(Default)]
pub struct Skin {
    ladder: Option<Ladder>,
    /// Resistance [Ω] and inductance [H] of each section.
    sections: Vec<(f64, f64)>,
    currents: Vec<Unknown>,
}

impl Skin {
    /// Takes a winding's impedance over its `resistance` [Ω]. The number of sections is chosen at the first time.
    pub fn derive(&mut self, impedance: Option<Impedance>, resistance: f64) {
        self.ladder = impedance.map(|impedance| match &self.ladder {
            Some(ladder) => ladder.moved(impedance),
            None => Ladder::of(impedance),
        });
        let sections = self.ladder.iter().flat_map(|ladder| &ladder.sections);
        self.sections = sections
            .map(|section| {
                let share = section.share * resistance;
                (share, share * section.time)
            })
            .collect();
    }

    /// The ladder; None where the effects are not counted.
    pub fn ladder(&self) -> Option<&Ladder> {
        self.ladder.as_ref()
    }

    /// Claims the sections' currents.
    pub fn claim(&mut self, claims: &mut Claims<'_>) {
        self.currents.clear();
        for _ in &self.sections {
            self.currents
                .push(claims.unknown("current of a skin section", Measure::Current));
        }
    }

    /// Adds the sections' voltage to the winding's `row` and stamps their own rows; `current` [A] is the winding's,
    /// with its slopes.
    pub fn stamp(
        &self,
        x: &[f64],
        current: f64,
        slopes: impl Iterator<Item = (Unknown, f64)> + Clone,
        row: Unknown,
        into: &mut Stamper<'_>,
    ) {
        for (&(resistance, inductance), &own) in self.sections.iter().zip(&self.currents) {
            let voltage = resistance * (current - own.of(x));
            into.f(row, voltage);
            into.df(row, own, -resistance);
            into.q(own, inductance * own.of(x));
            into.dq(own, own, inductance);
            into.f(own, -voltage);
            into.df(own, own, resistance);
            for (unknown, slope) in slopes.clone() {
                into.df(row, unknown, resistance * slope);
                into.df(own, unknown, -resistance * slope);
            }
        }
    }

    /// Power that the sections turn to heat [W].
    pub fn loss(&self, x: &[f64], current: f64) -> f64 {
        let own = self.sections.iter().zip(&self.currents);
        own.map(|((resistance, _), own)| resistance * (current - own.of(x)).powi(2))
            .sum()
    }

    /// Power in the quickest section and in all [W].
    pub fn quickest(&self, x: &[f64], current: f64) -> [f64; 2] {
        let last = self.sections.last().zip(self.currents.last());
        let quickest = last.map_or(0.0, |((resistance, _), own)| {
            resistance * (current - own.of(x)).powi(2)
        });
        [quickest, self.loss(x, current)]
    }

    /// Energy of the field inside the conductors [J].
    pub fn stored(&self, x: &[f64]) -> f64 {
        let own = self.sections.iter().zip(&self.currents);
        own.map(|((_, inductance), own)| 0.5 * inductance * own.of(x).powi(2))
            .sum()
    }

    /// What a zero start at a `current` [A] that has long been flowing adds to q.
    pub fn initial_charge(&self, current: f64, q: &mut dyn FnMut(Unknown, f64)) {
        for ((_, inductance), &own) in self.sections.iter().zip(&self.currents) {
            q(own, inductance * current);
        }
    }
}
