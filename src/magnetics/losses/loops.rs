//! Core loss of any waveform: the improved generalised Steinmetz method, Venkatachalam, Sullivan, Abdallah and Tacca,
//! COMPEL workshop 2002 (from memory).
//!
//! Each closed loop of the flux density, of swing ΔB, loses k_i ΔB^(β - α) ∫ |dB/dt|^α dt per volume; a waveform is split
//! into one major loop and the minor loops that ride on it. Here they are split as they close, by turning points on a
//! stack: where the flux density comes back to the turning point before the last, the branch there and back is a
//! loop of its own, and what was before it goes on. Branches that never close count as half loops of their own swing.
//!
//! ```text
//!      b1            the branch from b2 passes b1's level at c: b1 b2 c is a minor loop,
//!      /\  c /       the branch from b0 goes on from c
//!     /  \/ /
//!    /  b2
//!   b0
//! ```

use crate::magnetics::materials::Steinmetz;
use crate::math::quadrature::Rule;
use std::f64::consts::{FRAC_PI_2, PI};

/// Most turning points that are kept: a ring that decays over more is counted by half loops as it goes.
const MOST: usize = 4096;

/// The law of one material.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Improved {
    /// k_i, in SI units.
    pub factor: f64,
    /// α, the power of dB/dt.
    pub rate: f64,
    /// β, the power of the swing with that of the rate.
    pub flux: f64,
}

impl Improved {
    /// The law that loses what `steinmetz` says under a sine:
    /// k_i = k/((2π)^(α-1) 2^(β-α) ∫ |cos|^α over a turn).
    pub fn of(steinmetz: Steinmetz) -> Self {
        let (rate, flux) = (steinmetz.frequency_exponent, steinmetz.flux_exponent);
        let turn = 4.0 * quarter(rate);
        Improved {
            factor: steinmetz.factor
                / ((2.0 * PI).powf(rate - 1.0) * 2f64.powf(flux - rate) * turn),
            rate,
            flux,
        }
    }

    /// Loss per volume [J/m³] of a swing [T] over which |dB/dt|^α integrates to `rates`.
    fn loss(&self, swing: f64, rates: f64) -> f64 {
        if swing > 0.0 {
            self.factor * swing.powf(self.flux - self.rate) * rates
        } else {
            0.0
        }
    }
}

/// ∫ cos^α from 0 to π/2 for α >= 0: (α + 2)/(α + 1) times that of α + 2 (by parts), until nothing of it is left at π/2.
fn quarter(power: f64) -> f64 {
    let (mut high, mut ratio) = (power, 1.0);
    while high < 24.0 {
        ratio *= (high + 2.0) / (high + 1.0);
        high += 2.0;
    }
    let rule = Rule::legendre(32);
    ratio * rule.integrate(0.0, FRAC_PI_2, |angle| angle.cos().powf(high))
}

/// A turning point and the branch that begins there.
#[derive(Clone, Copy, Debug)]
struct Turn {
    /// Flux density [T].
    density: f64,
    /// ∫ |dB/dt|^α dt along its branch so far.
    rates: f64,
}

/// Splits a waveform into loops while it goes on, and sums their loss.
#[derive(Clone, Debug)]
pub struct Loops {
    law: Improved,
    turns: Vec<Turn>,
    /// Turning points before this one spread ever wider from the start: no loop closes on them.
    base: usize,
    now: f64,
    lost: f64,
}

impl Loops {
    /// Begins at a flux density [T].
    pub fn new(law: Improved, density: f64) -> Self {
        Loops {
            law,
            turns: vec![Turn {
                density,
                rates: 0.0,
            }],
            base: 0,
            now: density,
            lost: 0.0,
        }
    }

    /// The law.
    pub fn law(&self) -> Improved {
        self.law
    }

    /// Goes on to `density` [T] without turning on the way; `rates` gives ∫ |dB/dt|^α dt between two flux densities on
    /// the way.
    pub fn go(&mut self, density: f64, mut rates: impl FnMut(f64, f64) -> f64) {
        if density == self.now {
            return;
        }
        let rising = density > self.now;
        let last = self.turns.last().expect("the start is never taken away");
        if self.now != last.density && (self.now > last.density) != rising {
            self.turns.push(Turn {
                density: self.now,
                rates: 0.0,
            });
            self.bound();
        }
        while let Some(level) = self.level(density, rising) {
            let rates = rates(self.now, level);
            self.add(rates);
            self.now = level;
            self.close();
        }
        let rates = rates(self.now, density);
        self.add(rates);
        self.now = density;
    }

    /// The level that the branch at hand passes before it reaches `density`.
    fn level(&self, density: f64, rising: bool) -> Option<f64> {
        let before = self.turns.len().checked_sub(2)?;
        if before < self.base {
            return None;
        }
        let level = self.turns[before].density;
        let passed = if rising {
            density >= level && self.now <= level
        } else {
            density <= level && self.now >= level
        };
        passed.then_some(level)
    }

    fn add(&mut self, rates: f64) {
        let last = self
            .turns
            .last_mut()
            .expect("the start is never taken away");
        last.rates += rates;
    }

    /// Takes the last two branches away as a loop; one that hangs on the start stays open.
    fn close(&mut self) {
        let count = self.turns.len();
        if count - 2 == self.base {
            self.base += 1;
            return;
        }
        let (there, back) = (self.turns[count - 2], self.turns[count - 1]);
        let swing = (there.density - back.density).abs();
        self.lost += self.law.loss(swing, there.rates + back.rates);
        self.turns.truncate(count - 2);
    }

    /// Counts the oldest half by half loops where there are too many.
    fn bound(&mut self) {
        if self.turns.len() <= MOST {
            return;
        }
        let oldest = MOST / 2;
        self.lost += self.halves(0..oldest);
        self.turns.drain(..oldest);
        self.base = self.base.saturating_sub(oldest);
    }

    fn halves(&self, which: std::ops::Range<usize>) -> f64 {
        which
            .map(|k| {
                let end = self.turns.get(k + 1).map_or(self.now, |turn| turn.density);
                let swing = (end - self.turns[k].density).abs();
                self.law.loss(swing, self.turns[k].rates)
            })
            .sum()
    }

    /// Loss per volume so far [J/m³]; branches that have not closed count as half loops of their own swing.
    pub fn lost(&self) -> f64 {
        self.lost + self.halves(0..self.turns.len())
    }

    /// Loss per volume of one period [J/m³] whose end is its start: open branches close over the period's end. One that
    /// has to be divided there is divided as if the flux density moved evenly along it.
    pub fn lost_per_period(&self) -> f64 {
        // The branches in a ring; the last and the first are one where they have one direction.
        let mut ring: Vec<(f64, f64, f64)> = self
            .turns
            .iter()
            .enumerate()
            .map(|(k, turn)| {
                let end = self.turns.get(k + 1).map_or(self.now, |turn| turn.density);
                (turn.density, end, turn.rates)
            })
            .filter(|(from, to, _)| from != to)
            .collect();
        let Some(highest) = (0..ring.len()).max_by(|&j, &k| ring[j].0.total_cmp(&ring[k].0)) else {
            return self.lost;
        };
        ring.rotate_left(highest);
        let mut around = Loops::new(self.law, ring[0].0);
        for (from, to, rates) in ring {
            let per_tesla = rates / (to - from).abs();
            around.go(to, |a, b| per_tesla * (b - a).abs());
        }
        self.lost + around.lost()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const LAW: Improved = Improved {
        factor: 2.0,
        rate: 1.5,
        flux: 2.5,
    };

    /// Straight pieces of a duration and a change.
    fn straight(loops: &mut Loops, pieces: &[(f64, f64)]) {
        for &(duration, change) in pieces {
            let rate = change.abs() / duration;
            let to = loops.now + change;
            loops.go(to, |a, b| (b - a).abs() / rate * rate.powf(LAW.rate));
        }
    }

    fn per_period(pieces: &[(f64, f64)]) -> f64 {
        let mut loops = Loops::new(LAW, 0.1);
        straight(&mut loops, pieces);
        loops.lost_per_period()
    }

    /// k_i ΔB^(β-α) Σ |ΔB_m/Δt_m|^α Δt_m.
    fn loop_of(swing: f64, pieces: &[(f64, f64)]) -> f64 {
        let rates = pieces
            .iter()
            .map(|(duration, change)| (change.abs() / duration).powf(1.5) * duration);
        2.0 * swing * rates.sum::<f64>()
    }

    fn close(reached: f64, expected: f64) -> bool {
        (reached / expected - 1.0).abs() < 1e-12
    }

    #[test]
    fn a_period_loses_the_same_wherever_it_is_cut() {
        let pieces = [(2.0, 0.05), (3.0, 0.15), (5.0, -0.2)];
        let expected = loop_of(0.2, &pieces);
        assert!(close(per_period(&pieces), expected));
        assert!(close(
            per_period(&[pieces[1], pieces[2], pieces[0]]),
            expected
        ));
        assert!(close(
            per_period(&[pieces[2], pieces[0], pieces[1]]),
            expected
        ));
    }

    #[test]
    fn a_minor_loop_counts_with_its_own_swing() {
        // Up 0.3, down 0.1, up 0.2, down 0.4: the minor loop lies between 0.2 and 0.3 above the start.
        let pieces = [(3.0, 0.3), (1.0, -0.1), (2.0, 0.2), (4.0, -0.4)];
        let minor = loop_of(0.1, &[(1.0, 0.1), (1.0, 0.1)]);
        let major = loop_of(0.4, &[(3.0, 0.3), (1.0, 0.1), (4.0, 0.4)]);
        for cut in 0..4 {
            let mut turned = pieces;
            turned.rotate_left(cut);
            assert!(close(per_period(&turned), minor + major), "cut {cut}");
        }
    }

    #[test]
    fn a_ripple_on_a_bias_is_all_minor_loops() {
        let ripple = [(1.0, -0.02), (3.0, 0.02)];
        let mut loops = Loops::new(LAW, 0.0);
        straight(&mut loops, &[(10.0, 0.3)]);
        for _ in 0..100_000 {
            straight(&mut loops, &ripple);
        }
        let rise = 0.5 * loop_of(0.3, &[(10.0, 0.3), (10.0, 0.3)]);
        let all = rise + 1e5 * loop_of(0.02, &ripple);
        assert!((loops.lost() / all - 1.0).abs() < 1e-9);
        assert!(loops.turns.len() < 100);
    }

    #[test]
    fn a_ring_of_any_length_keeps_the_memory_bounded() {
        let mut loops = Loops::new(LAW, 1.0);
        let (mut amplitude, mut sum) = (1.0, 0.0);
        for k in 0..50_000 {
            let smaller = amplitude * 0.9995;
            let change = (amplitude + smaller) * if k % 2 == 0 { -1.0 } else { 1.0 };
            straight(&mut loops, &[(1.0, change)]);
            sum += loop_of(change.abs(), &[(1.0, change)]);
            amplitude = smaller;
        }
        assert!(loops.turns.len() <= MOST);
        assert!((loops.lost() / sum - 1.0).abs() < 1e-6);
    }

    #[test]
    fn nothing_is_lost_where_nothing_moves() {
        let mut loops = Loops::new(LAW, 0.2);
        loops.go(0.2, |_, _| f64::NAN);
        assert_eq!(loops.lost(), 0.0);
        assert_eq!(loops.lost_per_period(), 0.0);
    }

    #[test]
    fn the_integral_of_powers_of_the_cosine_is_wallis_at_whole_powers() {
        for (power, exact) in [
            (0.0, FRAC_PI_2),
            (1.0, 1.0),
            (2.0, PI / 4.0),
            (3.0, 2.0 / 3.0),
        ] {
            assert!((quarter(power) / exact - 1.0).abs() < 1e-14, "{power}");
        }
    }
}
