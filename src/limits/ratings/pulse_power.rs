//! The power of the largest pulse, whatever its shape, as that of a pulse of the rated shape.
//!
//! A short pulse heats a junction as it heats a thick plate from its face: with the square root of time. The rise is
//! theta(t) = K times the integral of p(u)/(2 sqrt(t - u)) du over u < t, and its highest value is compared with that of the
//! rated pulse, an exponential of power P that falls to half in the rated width w: K P sqrt(w/ln 2) D with D the highest value
//! of Dawson's integral, 0.541044. So K drops out. One-dimensional heat flow: Wunsch and Bell, IEEE Trans. Nucl. Sci.
//! NS-15 (1968) 244 (from memory); good from about 100 ns to 10 ms, on the safe side of a real part outside of that.
//!
//! The waveform is kept as cells of constant power with its true energy. Beyond [`MOST`] cells, neighbours that hold little
//! are joined.

use super::Meter;
use crate::readings::Taken;
use crate::signals::Piece;

/// Highest value of Dawson's integral F(x) = exp(-x²) times the integral of exp(u²), at x = 0.924139 (NIST Digital
/// Library of Mathematical Functions, 7.2(ii) and 7.8; value recomputed).
const DAWSON: f64 = 0.541_044_224_635_181_7;
/// Cells that are kept at most.
const MOST: usize = 600;
/// Two neighbours are joined where together they hold less than this share of all energy so far.
const LITTLE: f64 = 2e-3;

/// Power [W] absorbed between two instants [s].
#[derive(Clone, Copy)]
struct Cell {
    from: f64,
    to: f64,
    power: f64,
}

/// Keeps the power over time.
#[derive(Default)]
pub(super) struct PulsePower {
    cells: Vec<Cell>,
    fed: bool,
}

/// The factor by which a highest rise [W sqrt(s)] becomes the power of the rated pulse of this width [s].
pub(super) fn per_rise(width: f64) -> f64 {
    1.0 / (DAWSON * (width / std::f64::consts::LN_2).sqrt())
}

impl Meter for PulsePower {
    fn feed(&mut self, piece: &Piece) {
        self.fed = true;
        let length = piece.duration() / 3.0;
        if length <= 0.0 {
            return;
        }
        for k in 0..3 {
            let from = piece.from + f64::from(k) * length;
            let Some(part) = piece.within(from, (from + length).min(piece.to)) else {
                continue;
            };
            let duration = part.duration();
            if duration > 0.0 {
                // What an element gives back cools nothing.
                let power = (part.integral() / duration).max(0.0);
                self.cells.push(Cell {
                    from: part.from,
                    to: part.to,
                    power,
                });
            }
        }
        if self.cells.len() > 2 * MOST {
            self.join();
        }
    }

    fn finish(&self) -> Option<Taken> {
        if !self.fed {
            return None;
        }
        let mut best = Taken {
            value: 0.0,
            time: None,
        };
        for (k, cell) in self.cells.iter().enumerate() {
            for at in [0.5 * (cell.from + cell.to), cell.to] {
                let rise = self.rise(k, at);
                if rise > best.value {
                    best = Taken {
                        value: rise,
                        time: Some(at),
                    };
                }
            }
        }
        Some(best)
    }
}

impl PulsePower {
    /// theta/K at an instant within cell `last` [W sqrt(s)].
    fn rise(&self, last: usize, at: f64) -> f64 {
        let contribution = |cell: &Cell| {
            let (begun, ended) = (at - cell.from, (at - cell.to).max(0.0));
            cell.power * (begun.sqrt() - ended.sqrt())
        };
        let cells = self.cells[..=last].iter();
        cells
            .filter(|cell| cell.power > 0.0)
            .map(contribution)
            .sum()
    }

    /// Joins neighbours that hold little; where that is not enough, every pair.
    fn join(&mut self) {
        let total: f64 = self.cells.iter().map(energy).sum();
        let mut bound = LITTLE * total;
        while self.cells.len() > MOST {
            let mut joined: Vec<Cell> = Vec::with_capacity(self.cells.len());
            for cell in &self.cells {
                match joined.last_mut() {
                    Some(last) if energy(last) + energy(cell) <= bound => {
                        let held = energy(last) + energy(cell);
                        last.to = cell.to;
                        last.power = held / (last.to - last.from);
                    }
                    _ => joined.push(*cell),
                }
            }
            self.cells = joined;
            bound *= 2.0;
            if bound > total {
                break;
            }
        }
    }
}

fn energy(cell: &Cell) -> f64 {
    cell.power * (cell.to - cell.from)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn fed(power: impl Fn(f64) -> f64, to: f64, count: u32) -> Taken {
        let mut meter = PulsePower::default();
        for k in 0..count {
            let edge = |k: u32| to * f64::from(k) / f64::from(count);
            meter.feed(&Piece::sampled(edge(k), edge(k + 1), &power));
        }
        meter.finish().expect("it was fed")
    }

    /// The rated pulse itself has its own power, at 1.2321 times its width to half (tests/data: exponential pulses).
    #[test]
    fn the_rated_pulse_uses_all_of_its_rating() {
        let width = 1e-3;
        let pulse = |t: f64| 600.0 * (-t * std::f64::consts::LN_2 / width).exp();
        let taken = fed(pulse, 12.0 * width, 400);
        let power = taken.value * per_rise(width);
        assert!((power / 600.0 - 1.0).abs() < 1e-3, "{power}");
        let time = taken.time.expect("a highest rise has an instant");
        assert!((time / width - 1.2321).abs() < 0.02, "{time}");
    }

    /// A square pulse of 0.42232 times the width to half heats like the exponential one of the same power.
    #[test]
    fn a_square_pulse_is_worth_its_equivalent_width() {
        let square = |t: f64| if t <= 0.422_318e-3 { 600.0 } else { 0.0 };
        let mut meter = PulsePower::default();
        meter.feed(&Piece::constant(0.0, 0.422_318e-3, square(0.0)));
        meter.feed(&Piece::constant(0.422_318e-3, 5e-3, 0.0));
        let power = meter.finish().expect("it was fed").value * per_rise(1e-3);
        assert!((power / 600.0 - 1.0).abs() < 1e-5, "{power}");
    }

    /// 200 pulses of 100 W and 0.1 ms, one every 10 ms, more cells than are kept. The last one adds its own 1 W sqrt(s)
    /// to the rise of the mean of 1 W over 2 s, 1.41 W sqrt(s) less what its own share of the mean would have been.
    #[test]
    fn cells_are_joined_without_losing_pulses() {
        let mut meter = PulsePower::default();
        for k in 0..200 {
            let from = 1e-2 * f64::from(k);
            for j in 0..10 {
                let from = from + 1e-5 * f64::from(j);
                meter.feed(&Piece::constant(from, from + 1e-5, 100.0));
            }
            meter.feed(&Piece::constant(from + 1e-4, from + 1e-2, 0.0));
        }
        assert!(meter.cells.len() <= 2 * MOST);
        let rise = meter.finish().expect("it was fed").value;
        assert!((2.2..2.45).contains(&rise), "{rise}");
    }
}
