//! Core loss after the run, by the improved generalised Steinmetz method over the flux density of every kept step.
//!
//! It stands beside the ledger, outside the balance: nothing in the equations feels it.

use super::watched::Signals;
use crate::circuit::{Circuit, Tap};
use crate::elements::Quantity;
use crate::magnetics::losses::{Improved, Loops};
use crate::math::quadrature::Rule;
use crate::signals::Piece;
use crate::units;

/// Points of the rule for ∫ |dB/dt|^α dt over a stretch without a turning point.
const POINTS: usize = 6;

/// What one core loses.
#[derive(Clone, Debug, PartialEq)]
pub struct CoreLoss {
    /// The element, with its leg where it has several.
    pub name: String,
    /// Over the run [J].
    pub energy: f64,
    /// Over its duration [W].
    pub mean_power: f64,
}

/// The cores of a circuit whose material tells its loss.
pub struct CoreLosses {
    cores: Vec<Core>,
    rule: Rule,
}

struct Core {
    name: String,
    volume: f64,
    law: Improved,
    signal: usize,
    loops: Option<Loops>,
}

impl CoreLosses {
    /// Nothing seen yet; what the cores need of their flux densities joins the signals.
    pub fn new(circuit: &Circuit, signals: &mut Signals) -> Self {
        let mut cores = Vec::new();
        for (k, entry) in circuit.entries.iter().enumerate() {
            for figures in entry.element.cores() {
                let Some(steinmetz) = figures.losses.steinmetz else {
                    continue;
                };
                let name = match figures.name {
                    "" => entry.name.clone(),
                    leg => format!("{}.{leg}", entry.name),
                };
                let tap = Tap::Of(k, Quantity::FluxDensity, figures.place);
                // Of a coil's core it is the waveform that is recorded anyway.
                let phrase = match figures.place {
                    0 => format!("flux density in {name}"),
                    _ => format!("flux density in the leg {name}"),
                };
                cores.push(Core {
                    name,
                    volume: figures.volume,
                    law: Improved::of(steinmetz),
                    signal: signals.number(phrase, units::FLUX_DENSITY, tap),
                    loops: None,
                });
            }
        }
        CoreLosses {
            cores,
            rule: Rule::legendre(POINTS),
        }
    }

    /// Takes what the signals read last.
    pub fn feed(&mut self, signals: &Signals) {
        for core in &mut self.cores {
            let piece = signals.piece(core.signal);
            let loops = core
                .loops
                .get_or_insert_with(|| Loops::new(core.law, piece.first()));
            feed(loops, &piece, &self.rule);
        }
    }

    /// What each core lost over a duration [s], which is one period of a periodic state where `periodic`.
    pub fn finish(&self, duration: f64, periodic: bool) -> Vec<CoreLoss> {
        let cores = self.cores.iter();
        cores
            .map(|core| {
                let density = core.loops.as_ref().map_or(0.0, |loops| match periodic {
                    true => loops.lost_per_period(),
                    false => loops.lost(),
                });
                let energy = core.volume * density;
                CoreLoss {
                    name: core.name.clone(),
                    energy,
                    mean_power: if duration > 0.0 {
                        energy / duration
                    } else {
                        0.0
                    },
                }
            })
            .collect()
    }
}

/// Goes along a piece from turning point to turning point.
fn feed(loops: &mut Loops, piece: &Piece, rule: &Rule) {
    let mut from = piece.from;
    for (to, density) in piece.extremes().skip(1) {
        let power = loops.law().rate;
        let mut since = from;
        loops.go(density, |_, until| {
            // The stretch rises or falls throughout, so it passes each level once.
            let end = if until == density {
                to
            } else {
                passing(piece, since, to, until)
            };
            // At a turning point the integrand is a power that is not whole: the time is bent, t = s² (3 - 2 s), so that it
            // vanishes with a higher one.
            let (start, span) = (since, end - since);
            since = end;
            rule.integrate(0.0, span, |place| {
                let s = place / span;
                let time = start + span * s * s * (3.0 - 2.0 * s);
                6.0 * s * (1.0 - s) * piece.slope_at(time).abs().powf(power)
            })
        });
        from = to;
    }
}

/// The instant [s] between two at which the piece passes a level.
fn passing(piece: &Piece, from: f64, to: f64, level: f64) -> f64 {
    let crossings = piece.crossings(level).map(|crossing| crossing.time);
    let mut within = crossings.filter(|time| (from..=to).contains(time));
    within.next().unwrap_or(from)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::magnetics::Steinmetz;
    use std::f64::consts::TAU;

    const MATERIAL: Steinmetz = Steinmetz {
        factor: 1.2,
        frequency_exponent: 1.45,
        flux_exponent: 2.6,
    };

    #[test]
    fn a_sine_in_cubic_pieces_loses_what_steinmetz_says() {
        let (frequency, peak) = (1e5, 0.1);
        let wave = |time: f64| 0.2 + peak * (TAU * frequency * time + 0.4).sin();
        let rule = Rule::legendre(POINTS);
        let mut loops = Loops::new(Improved::of(MATERIAL), wave(0.0));
        for k in 0..24 {
            let span = 1.0 / (24.0 * frequency);
            let from = span * f64::from(k);
            feed(&mut loops, &Piece::sampled(from, from + span, wave), &rule);
        }
        let power = frequency * loops.lost_per_period();
        let expected = MATERIAL.sine(frequency, peak);
        assert!((power / expected - 1.0).abs() < 1e-5, "{power} {expected}");
    }

    #[test]
    fn a_piece_that_passes_the_level_of_a_loop_is_divided_there() {
        // Up to 1, down to 0.5, then one straight piece from 0.5 to 1.5 at a slope of 2.
        let rule = Rule::legendre(POINTS);
        let law = Improved::of(MATERIAL);
        let mut loops = Loops::new(law, 0.0);
        let straight = |from: f64, to: f64, a: f64, b: f64| {
            Piece::sampled(from, to, |time| a + (b - a) * (time - from) / (to - from))
        };
        for piece in [
            straight(0.0, 1.0, 0.0, 1.0),
            straight(1.0, 1.5, 1.0, 0.5),
            straight(1.5, 2.0, 0.5, 1.5),
        ] {
            feed(&mut loops, &piece, &rule);
        }
        let (alpha, beta) = (law.rate, law.flux);
        let fast = 2f64.powf(alpha) * 0.25;
        let minor = 0.5f64.powf(beta - alpha) * (0.5 + fast);
        let major = 1.5f64.powf(beta - alpha) * (1.0 + fast);
        let expected = law.factor * (minor + major);
        assert!((loops.lost() / expected - 1.0).abs() < 1e-9);
    }
}
