//! A waveform between two instants, as the cubic through four equally spaced values.
//!
//! With s = (t - from)/(to - from) the cubic through the values y0 to y3 at s = 0, 1/3, 2/3 and 1 is
//! y0 + c1 s + c2 s² + c3 s³; with the differences d1 = y1 - y0, d2 and d3 Lagrange's interpolation gives
//! c1 = 9 d1 - 9/2 d2 + d3, c2 = 9/2 (4 d2 - 5 d1 - d3), c3 = 9/2 (3 d1 - 3 d2 + d3).

use super::cubic::Cubic;

/// A cubic on `[from, to]`. A piece of no duration is one instant; then the first value is the one before a
/// jump there and the last the one after it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Piece {
    /// Start [s].
    pub from: f64,
    /// End [s], not before `from`.
    pub to: f64,
    /// Values at `from`, at one third, at two thirds and at `to` [the signal's SI unit].
    pub values: [f64; 4],
}

/// Where a piece passes a level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crossing {
    /// Instant [s].
    pub time: f64,
    /// True where the signal is above the level afterwards, false where it was above before.
    pub rising: bool,
}

impl Piece {
    /// One value throughout; with `from` equal to `to` a single instant.
    pub fn constant(from: f64, to: f64, value: f64) -> Self {
        Piece {
            from,
            to,
            values: [value; 4],
        }
    }

    /// A single instant.
    pub fn instant(time: f64, value: f64) -> Self {
        Piece::constant(time, time, value)
    }

    /// The cubic through a function's values at the four places.
    pub fn sampled(from: f64, to: f64, mut value: impl FnMut(f64) -> f64) -> Self {
        let third = (to - from) / 3.0;
        Piece {
            from,
            to,
            values: [
                value(from),
                value(from + third),
                value(to - third),
                value(to),
            ],
        }
    }

    /// The same with a function applied to each value; exact for a linear function only.
    pub fn map(self, value: impl FnMut(f64) -> f64) -> Self {
        Piece {
            values: self.values.map(value),
            ..self
        }
    }

    /// Length in time [s].
    pub fn duration(&self) -> f64 {
        self.to - self.from
    }

    /// Value at the start, the one after a jump there.
    pub fn first(&self) -> f64 {
        self.values[0]
    }

    /// Value at the end, the one before a jump there.
    pub fn last(&self) -> f64 {
        self.values[3]
    }

    /// Value at an instant [s]; outside the piece its nearer end holds. Exact at both ends.
    pub fn value_at(&self, time: f64) -> f64 {
        if time >= self.to {
            return self.last();
        }
        self.cubic(0.0).value(self.place(time))
    }

    /// Slope at an instant [unit/s]; zero for a piece of no duration.
    pub fn slope_at(&self, time: f64) -> f64 {
        if self.duration() > 0.0 {
            self.cubic(0.0).slope(self.place(time)) / self.duration()
        } else {
            0.0
        }
    }

    /// Turning points strictly inside, in order of time: (instant, value).
    pub fn turning_points(&self) -> impl Iterator<Item = (f64, f64)> {
        let cubic = self.cubic(0.0);
        let piece = *self;
        let inside = cubic.turning_points().into_iter().flatten();
        inside.map(move |s| (piece.instant_of(s), cubic.value(s)))
    }

    /// All places where the piece may be highest or lowest, in order of time: ends and turning points.
    pub fn extremes(&self) -> impl Iterator<Item = (f64, f64)> {
        std::iter::once((self.from, self.first()))
            .chain(self.turning_points())
            .chain(std::iter::once((self.to, self.last())))
    }

    /// Largest magnitude of the slope [unit/s] and its instant; zero for a piece of no duration.
    pub fn steepest(&self) -> (f64, f64) {
        let places = [Some(0.0), self.cubic(0.0).inflexion(), Some(1.0)];
        let mut best = (self.from, 0.0);
        for time in places.into_iter().flatten().map(|s| self.instant_of(s)) {
            let slope = self.slope_at(time).abs();
            if slope > best.1 {
                best = (time, slope);
            }
        }
        best
    }

    /// Where the signal becomes greater than `level` or ceases to be, in order of time, at most three times.
    /// Rising and falling alternate: falling needs a value above the level before and one at or below it after.
    pub fn crossings(&self, level: f64) -> impl Iterator<Item = Crossing> {
        let piece = *self;
        let found = self.cubic(level).crossings();
        found
            .into_iter()
            .flatten()
            .map(move |(s, rising)| Crossing {
                time: piece.instant_of(s),
                rising,
            })
    }

    /// Integral over the piece [unit s]: Simpson's three-eighths rule, exact for a cubic.
    pub fn integral(&self) -> f64 {
        let [a, b, c, d] = self.values;
        self.duration() / 8.0 * (a + 3.0 * (b + c) + d)
    }

    /// Integral of the square [unit² s]: Gauss-Legendre with four points, exact up to degree seven.
    pub fn integral_of_square(&self) -> f64 {
        // Abramowitz and Stegun, table 25.4, n = 4 (from memory; the tests integrate a sixth degree with them).
        const NODES: [(f64, f64); 2] = [
            (0.339_981_043_584_856_3, 0.652_145_154_862_546_1),
            (0.861_136_311_594_052_6, 0.347_854_845_137_453_85),
        ];
        let cubic = self.cubic(0.0);
        let square = |s: f64| cubic.value(s).powi(2);
        let sum: f64 = NODES
            .iter()
            .map(|&(x, weight)| weight * (square(0.5 * (1.0 - x)) + square(0.5 * (1.0 + x))))
            .sum();
        0.5 * self.duration() * sum
    }

    /// Integral of the magnitude [unit s].
    pub fn integral_of_magnitude(&self) -> f64 {
        let mut from = self.from;
        let mut sum = 0.0;
        for crossing in self.crossings(0.0) {
            sum += self.part(from, crossing.time).integral().abs();
            from = crossing.time;
        }
        sum + self.part(from, self.to).integral().abs()
    }

    /// Time for which the signal is greater than `level` [s].
    pub fn time_above(&self, level: f64) -> f64 {
        let mut above = self.first() > level;
        let mut since = self.from;
        let mut sum = 0.0;
        for crossing in self.crossings(level) {
            if above {
                sum += crossing.time - since;
            }
            above = crossing.rising;
            since = crossing.time;
        }
        if above { sum + self.to - since } else { sum }
    }

    /// The part within `[from, to]`; None where they have no instant in common. A common end gives a piece
    /// of no duration.
    pub fn within(&self, from: f64, to: f64) -> Option<Piece> {
        let (from, to) = (from.max(self.from), to.min(self.to));
        (from <= to).then(|| self.part(from, to))
    }

    /// The same cubic on a smaller range that lies inside.
    fn part(&self, from: f64, to: f64) -> Piece {
        if from == self.from && to == self.to {
            return *self;
        }
        if from == to && from == self.from {
            return Piece::instant(from, self.first());
        }
        Piece::sampled(from, to, |time| self.value_at(time))
    }

    /// The cubic over s from 0 to 1, less a level.
    fn cubic(&self, level: f64) -> Cubic {
        Cubic::through(self.values, level)
    }

    /// s of an instant, held to 0 to 1.
    fn place(&self, time: f64) -> f64 {
        let s = (time - self.from) / self.duration();
        // A piece of no duration gives NaN: its start.
        if s > 0.0 { s.min(1.0) } else { 0.0 }
    }

    /// Instant of s.
    fn instant_of(&self, s: f64) -> f64 {
        (self.from + s * self.duration()).clamp(self.from, self.to)
    }
}

#[cfg(test)]
mod tests;
