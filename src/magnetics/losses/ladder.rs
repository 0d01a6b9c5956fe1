//! A ladder of positive resistances and inductances with the impedance of a conductor: skin and proximity effect in
//! time.
//!
//! ```text
//!          +-- R1 --+   +-- R2 --+            Z/R = 1 + sum of c s τ/(a + s τ)
//!  --- R --+        +---+        +-- ...      section: resistance c R, inductance c R τ/a
//!          +-- L1 --+   +-- L2 --+
//! ```
//!
//! The impedance itself is such a sum, without end (its poles are the squares of the zeros of sine and Bessel functions).
//! A few sections whose numbers are free do what many of those do: the logarithms of a and c are fitted by least squares
//! to the logarithms of resistance and inductance from direct current to [`REACH`] times the corner, by the method
//! of Levenberg and Marquardt (Marquardt, J. SIAM 11 (1963) 431). Logarithms keep every R and L positive.

use super::impedance::Impedance;
use nalgebra::{DMatrix, DVector};
use num_complex::Complex64;
use std::f64::consts::{LN_10, PI};

/// How many times the corner's frequency a ladder reaches.
pub const REACH: f64 = 100.0;
/// Largest deviation of resistance and of inductance up to there.
pub const WITHIN: f64 = 0.02;

/// Most sections that are tried; more are not needed for any number of layers.
const MOST_SECTIONS: usize = 12;
/// Frequencies at which the fit looks: closer towards the upper end, so that least squares come near the smallest
/// largest deviation (as Chebyshev's points do).
const LOOKS: usize = 64;
/// Decades below the corner at which everything is as at direct current.
const BELOW: f64 = 1.5;

/// One section: a resistance and an inductance side by side.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Section {
    /// Its resistance over that to direct current.
    pub share: f64,
    /// Inductance over resistance [s].
    pub time: f64,
}

/// The sections in series with the resistance to direct current, from the slowest to the quickest.
#[derive(Clone, Debug, PartialEq)]
pub struct Ladder {
    /// The sections.
    pub sections: Vec<Section>,
    /// What it follows.
    pub of: Impedance,
}

impl Ladder {
    /// The ladder of fewest sections that keeps resistance and inductance [`WITHIN`] up to [`REACH`] times the corner.
    pub fn of(impedance: Impedance) -> Self {
        let fit = Fit::new(impedance);
        let mut count = 1;
        loop {
            let found = fit.solve(count);
            if found.worst() <= WITHIN || count == MOST_SECTIONS {
                return found.ladder(impedance);
            }
            count += 1;
        }
    }

    /// The ladder of an impedance that moved, with as many sections as before, so that a circuit keeps its unknowns.
    #[must_use]
    pub fn moved(&self, impedance: Impedance) -> Self {
        if !impedance.is_like(self.of) {
            return Fit::new(impedance)
                .solve(self.sections.len())
                .ladder(impedance);
        }
        // Only the time of diffusion moved: with the temperature, for one.
        let slower = impedance.time() / self.of.time();
        let sections = self.sections.iter();
        Ladder {
            sections: sections
                .map(|section| Section {
                    time: slower * section.time,
                    ..*section
                })
                .collect(),
            of: impedance,
        }
    }

    /// Highest frequency [Hz] that it follows.
    pub fn up_to(&self) -> f64 {
        REACH * self.of.corner()
    }

    /// Share of the quickest section in the loss of all sections under a sine of a `frequency` [Hz]; it grows with the
    /// frequency, so that a larger share tells of a higher one.
    pub fn quickest_share(&self, frequency: f64) -> f64 {
        let loss = |section: &Section| {
            let square = (2.0 * PI * frequency * section.time).powi(2);
            section.share * square / (1.0 + square)
        };
        let all: f64 = self.sections.iter().map(loss).sum();
        self.sections.last().map_or(0.0, |last| loss(last) / all)
    }

    /// Inductance at direct current over resistance to direct current [s].
    pub fn time(&self) -> f64 {
        let sections = self.sections.iter();
        sections.map(|section| section.share * section.time).sum()
    }

    /// Z/R at a `frequency` [Hz].
    pub fn at(&self, frequency: f64) -> Complex64 {
        let s = Complex64::new(0.0, 2.0 * PI * frequency);
        let sections = self.sections.iter();
        sections
            .map(|section| section.share * s * section.time / (1.0 + s * section.time))
            .sum::<Complex64>()
            + 1.0
    }
}

/// What is fitted: resistance and inductance at frequencies.
struct Fit {
    /// s τ/j.
    angles: Vec<f64>,
    /// Logarithms of resistance and of inductance (over R and R τ).
    goals: Vec<[f64; 2]>,
    corner: f64,
}

/// A fit with its numbers.
struct Found<'a> {
    fit: &'a Fit,
    /// Logarithms of all a, then of all c.
    numbers: DVector<f64>,
    deviations: DVector<f64>,
}

impl Fit {
    fn new(impedance: Impedance) -> Self {
        let corner = impedance.first_pole();
        let decades = BELOW + REACH.log10();
        let place = |k: usize| (0.5 * PI * k as f64 / LOOKS as f64).sin();
        let angles: Vec<f64> = (0..=LOOKS)
            .map(|k| corner * (LN_10 * (decades * place(k) - BELOW)).exp())
            .collect();
        let goals = angles
            .iter()
            .map(|&angle| {
                let z = impedance.normal(angle);
                [z.re.ln(), (z.im / angle).ln()]
            })
            .collect();
        Fit {
            angles,
            goals,
            corner,
        }
    }

    fn solve(&self, count: usize) -> Found<'_> {
        let mut found = Found {
            fit: self,
            numbers: self.guess(count),
            deviations: DVector::zeros(2 * self.angles.len()),
        };
        found.deviations = found.weigh();
        let mut damping = 1e-2;
        for _ in 0..400 {
            let slopes = found.slopes();
            let gradient = slopes.tr_mul(&found.deviations);
            let squares = slopes.tr_mul(&slopes);
            let mut damped = squares.clone();
            for k in 0..2 * count {
                damped[(k, k)] += damping * squares[(k, k)].max(1e-12);
            }
            let Some(factors) = damped.cholesky() else {
                damping *= 10.0;
                continue;
            };
            let step = factors.solve(&gradient);
            let tried = Found {
                fit: self,
                numbers: &found.numbers - &step,
                deviations: DVector::zeros(0),
            };
            let deviations = tried.weigh();
            if deviations.norm_squared() < found.deviations.norm_squared() {
                found.numbers = tried.numbers;
                found.deviations = deviations;
                damping = (0.2 * damping).max(1e-12);
                if step.amax() < 1e-9 {
                    break;
                }
            } else {
                damping *= 5.0;
                if damping > 1e12 {
                    break;
                }
            }
        }
        found
    }

    /// Poles evenly spread in logarithms from the first to beyond the reach; of each as much as the resistance
    /// rises there.
    fn guess(&self, count: usize) -> DVector<f64> {
        let reach = (2.0 * REACH).ln();
        let apart = reach / count as f64;
        let rise = |angle: f64| {
            let k = self.angles.partition_point(|&known| known < angle);
            self.goals[k.min(self.goals.len() - 1)][0].exp()
        };
        DVector::from_fn(2 * count, |row, _| {
            let place = |k: f64| self.corner * (apart * k).exp();
            if row < count {
                place(row as f64).ln()
            } else {
                let k = (row - count) as f64;
                (rise(place(k + 0.5)) - rise(place(k - 0.5))).max(1e-3).ln()
            }
        })
    }
}

impl Found<'_> {
    fn sections(&self) -> impl Iterator<Item = (f64, f64)> {
        let count = self.numbers.len() / 2;
        (0..count).map(move |k| (self.numbers[k].exp(), self.numbers[count + k].exp()))
    }

    /// Deviations of the logarithms of resistance and inductance at every frequency.
    fn weigh(&self) -> DVector<f64> {
        let mut deviations = DVector::zeros(2 * self.fit.angles.len());
        for (k, (&angle, goal)) in self.fit.angles.iter().zip(&self.fit.goals).enumerate() {
            let (mut resistance, mut inductance) = (1.0, 0.0);
            for (a, c) in self.sections() {
                let square = a * a + angle * angle;
                resistance += c * angle * angle / square;
                inductance += c * a / square;
            }
            deviations[2 * k] = resistance.ln() - goal[0];
            deviations[2 * k + 1] = inductance.ln() - goal[1];
        }
        deviations
    }

    fn slopes(&self) -> DMatrix<f64> {
        let count = self.numbers.len() / 2;
        let mut slopes = DMatrix::zeros(self.deviations.len(), 2 * count);
        for (k, (&angle, goal)) in self.fit.angles.iter().zip(&self.fit.goals).enumerate() {
            let resistance = (self.deviations[2 * k] + goal[0]).exp();
            let inductance = (self.deviations[2 * k + 1] + goal[1]).exp();
            for (column, (a, c)) in self.sections().enumerate() {
                let (aa, ww) = (a * a, angle * angle);
                let square = aa + ww;
                slopes[(2 * k, column)] = -2.0 * c * ww * aa / (square * square) / resistance;
                slopes[(2 * k + 1, column)] = c * a * (ww - aa) / (square * square) / inductance;
                slopes[(2 * k, count + column)] = c * ww / square / resistance;
                slopes[(2 * k + 1, count + column)] = c * a / square / inductance;
            }
        }
        slopes
    }

    /// The largest deviation of resistance or inductance.
    fn worst(&self) -> f64 {
        self.deviations.amax().exp_m1()
    }

    fn ladder(&self, impedance: Impedance) -> Ladder {
        let mut sections: Vec<Section> = self
            .sections()
            .map(|(a, c)| Section {
                share: c,
                time: impedance.time() / a,
            })
            .collect();
        sections.sort_by(|one, other| other.time.total_cmp(&one.time));
        Ladder {
            sections,
            of: impedance,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::losses::impedance::Layers;

    const COPPER: f64 = 1e-6 / 58.0;

    fn conductors() -> Vec<Impedance> {
        let mut list = vec![Impedance::isolated(0.5e-3, COPPER)];
        for count in [1.0, 1.5, 2.0, 3.0, 10.0, 40.0, 300.0] {
            for pitch in [0.55e-3, 0.8e-3, 3e-3] {
                let layers = Layers { count, pitch };
                list.push(Impedance::rounds(0.5e-3, layers, COPPER));
                list.push(Impedance::equivalent_foil(0.5e-3, layers, COPPER));
                list.push(Impedance::strands(0.1e-3, 20.0, 0.52e-3, layers, COPPER));
            }
            list.push(Impedance::sheets(0.5e-3, 1.0, count, COPPER));
        }
        list
    }

    #[test]
    fn five_sections_at_most_keep_two_per_cent_of_resistance_and_inductance() {
        for impedance in conductors() {
            let ladder = Ladder::of(impedance);
            assert!(
                (4..=5).contains(&ladder.sections.len()),
                "{impedance:?}: {ladder:?}"
            );
            for step in 0..=700 {
                let frequency = impedance.corner() * 10f64.powf(0.01 * f64::from(step) - 5.0);
                let (reached, exact) = (ladder.at(frequency), impedance.at(frequency));
                for (reached, exact) in [(reached.re, exact.re), (reached.im, exact.im)] {
                    assert!(
                        (reached / exact - 1.0).abs() <= 1.05 * WITHIN,
                        "{impedance:?} at {frequency}: {reached} for {exact}"
                    );
                }
            }
        }
    }

    #[test]
    fn every_section_is_positive_and_fewer_do_not_serve() {
        for impedance in conductors() {
            let ladder = Ladder::of(impedance);
            let sections = &ladder.sections;
            assert!(
                sections
                    .iter()
                    .all(|section| section.share > 0.0 && section.time > 0.0)
            );
            assert!(sections.windows(2).all(|pair| pair[0].time > pair[1].time));
            let fit = Fit::new(impedance);
            assert!(fit.solve(sections.len()).worst() <= WITHIN);
            assert!(fit.solve(sections.len() - 1).worst() > WITHIN);
        }
    }

    #[test]
    fn a_small_change_of_the_conductor_moves_the_ladder_a_little() {
        // Derivatives by the pitch are differences of two ladders.
        let layers = |pitch: f64| Layers { count: 3.0, pitch };
        let start = Ladder::of(Impedance::rounds(0.5e-3, layers(0.6e-3), COPPER));
        let of = |pitch: f64| {
            let layers = layers(pitch);
            start.moved(Impedance::rounds(0.5e-3, layers, COPPER))
        };
        let moved = |by: f64| {
            let (less, more) = (of(0.6e-3 * (1.0 - by)), of(0.6e-3 * (1.0 + by)));
            let pairs = less.sections.iter().zip(&more.sections);
            let slopes = pairs.flat_map(|(a, b)| [b.share / a.share, b.time / a.time].map(f64::ln));
            slopes.map(|change| change / (2.0 * by)).collect::<Vec<_>>()
        };
        for (coarse, fine) in moved(1e-3).iter().zip(moved(1e-5)) {
            assert!((coarse - fine).abs() < 1e-3, "{coarse} {fine}");
        }
    }

    #[test]
    fn a_warmer_conductor_has_the_same_ladder_in_another_time() {
        let layers = Layers {
            count: 3.0,
            pitch: 0.6e-3,
        };
        let of = |resistivity: f64| Impedance::rounds(0.5e-3, layers, resistivity);
        let (moved, fitted) = (
            Ladder::of(of(COPPER)).moved(of(1.3 * COPPER)),
            Ladder::of(of(1.3 * COPPER)),
        );
        for (one, other) in moved.sections.iter().zip(&fitted.sections) {
            assert!((one.share / other.share - 1.0).abs() < 1e-9);
            assert!((one.time / other.time - 1.0).abs() < 1e-9);
        }
    }
}
