//! Monotone interpolation of tables: cubic between the points, one slope through each, straight beyond the ends.
//!
//! Fritsch and Carlson, SIAM J. Numer. Anal. 17 (1980) 238: a cubic between two points rises everywhere where its
//! end slopes lie within 0 and three times the secant. The slopes are weighted harmonic means of the two secants
//! (Fritsch and Butland, SIAM J. Sci. Stat. Comput. 5 (1984) 300), which keep within that range by themselves; both
//! from memory, the property is tested. The slope of a parabola cut to the range would follow smooth data more
//! closely, but leaves the span that convex data allow where secants change fast, as at the toe of a steel.
//! With a `floor` the same holds for y - floor x, so that no slope falls below it.

/// A rising curve through points, with slope `floor` or more everywhere.
#[derive(Clone, Debug, PartialEq)]
pub struct Monotone {
    x: Vec<f64>,
    y: Vec<f64>,
    slope: Vec<f64>,
    floor: f64,
}

/// Why points make no rising curve; the index is that of the second of the two points at fault.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Fault {
    /// Fewer than two points, or lists of different length.
    TooFew,
    /// A number is not finite.
    NotFinite(usize),
    /// x does not rise from the point before.
    XFalls(usize),
    /// y rises less than the floor allows from the point before.
    TooFlat(usize),
}

impl Monotone {
    /// A curve through (x, y), continued with slope `floor` (>= 0) before the first and beyond the last point.
    ///
    /// `start` and `end` fix the slopes of the first and last point; they are cut to the range that keeps
    /// the curve rising. A y that misses the floor by rounding (1e-6 of its rise at most) is lifted to it.
    pub fn new(x: &[f64], y: &[f64], floor: f64, start: f64, end: f64) -> Result<Self, Fault> {
        if x.len() < 2 || x.len() != y.len() {
            return Err(Fault::TooFew);
        }
        if let Some(k) = (0..x.len()).find(|&k| !x[k].is_finite() || !y[k].is_finite()) {
            return Err(Fault::NotFinite(k));
        }
        let mut excess = Vec::with_capacity(x.len());
        let mut lifted = vec![y[0]];
        for k in 1..x.len() {
            let run = x[k] - x[k - 1];
            if run <= 0.0 {
                return Err(Fault::XFalls(k));
            }
            if (y[k] - y[k - 1]) / run < floor * (1.0 - 1e-6) {
                return Err(Fault::TooFlat(k));
            }
            let rise = (y[k] - lifted[k - 1]) / run - floor;
            excess.push(rise.max(0.0));
            lifted.push(if rise > 0.0 {
                y[k]
            } else {
                lifted[k - 1] + floor * run
            });
        }
        let slope = slopes(x, &excess, start - floor, end - floor);
        Ok(Monotone {
            x: x.to_vec(),
            y: lifted,
            slope: slope.iter().map(|s| s + floor).collect(),
            floor,
        })
    }

    /// Abscissas of the points.
    pub fn x(&self) -> &[f64] {
        &self.x
    }

    /// Ordinates of the points.
    pub fn y(&self) -> &[f64] {
        &self.y
    }

    /// Value and slope at `x`.
    pub fn at(&self, x: f64) -> (f64, f64) {
        let (first, last) = (0, self.x.len() - 1);
        if x <= self.x[first] {
            return self.beyond(first, x);
        }
        if x >= self.x[last] {
            return self.beyond(last, x);
        }
        let piece = Piece::of(self, self.x.partition_point(|&known| known <= x) - 1);
        piece.at((x - piece.from) / piece.run)
    }

    /// The x at which the curve has value `y`, and the slope there. Needs a curve that rises strictly at `y`.
    pub fn inverse(&self, y: f64) -> (f64, f64) {
        let (first, last) = (0, self.y.len() - 1);
        let end = if y <= self.y[first] {
            Some(first)
        } else if y >= self.y[last] {
            Some(last)
        } else {
            None
        };
        match end {
            Some(k) if y == self.y[k] => (self.x[k], self.slope[k]),
            Some(k) => (self.x[k] + (y - self.y[k]) / self.floor, self.floor),
            None => Piece::of(self, self.y.partition_point(|&known| known <= y) - 1).inverse(y),
        }
    }

    /// Abscissas between the points at which the slope has a turning point.
    pub fn turning_slopes(&self) -> impl Iterator<Item = f64> + '_ {
        (0..self.x.len() - 1).filter_map(|k| {
            let piece = Piece::of(self, k);
            let t = -piece.p / (3.0 * piece.r);
            (t > 0.0 && t < 1.0).then_some(piece.from + piece.run * t)
        })
    }

    fn beyond(&self, end: usize, x: f64) -> (f64, f64) {
        let slope = if x == self.x[end] {
            self.slope[end]
        } else {
            self.floor
        };
        (self.y[end] + self.floor * (x - self.x[end]), slope)
    }
}

/// Slopes above the floor from the secants above the floor.
fn slopes(x: &[f64], secant: &[f64], start: f64, end: f64) -> Vec<f64> {
    let last = secant.len();
    let mut slope = Vec::with_capacity(x.len());
    slope.push(start.clamp(0.0, 3.0 * secant[0]));
    for k in 1..last {
        let (before, after) = (x[k] - x[k - 1], x[k + 1] - x[k]);
        let (low, high) = (secant[k - 1], secant[k]);
        let (one, other) = (before + 2.0 * after, 2.0 * before + after);
        // (one + other)/(one/low + other/high), written without division by a secant of zero.
        let mean = (one + other) * low * high / (one * high + other * low);
        slope.push(if low > 0.0 && high > 0.0 { mean } else { 0.0 });
    }
    slope.push(end.clamp(0.0, 3.0 * secant[last - 1]));
    slope
}

/// One cubic: y = y0 + t (m0 + t (p + t r)) in t from 0 to 1, where m0 is the slope times the run.
struct Piece {
    from: f64,
    run: f64,
    y: f64,
    m: f64,
    p: f64,
    r: f64,
}

impl Piece {
    fn of(curve: &Monotone, k: usize) -> Self {
        let run = curve.x[k + 1] - curve.x[k];
        let rise = curve.y[k + 1] - curve.y[k];
        let (m0, m1) = (curve.slope[k] * run, curve.slope[k + 1] * run);
        Piece {
            from: curve.x[k],
            run,
            y: curve.y[k],
            m: m0,
            p: 3.0 * rise - 2.0 * m0 - m1,
            r: m0 + m1 - 2.0 * rise,
        }
    }

    #[inline]
    fn at(&self, t: f64) -> (f64, f64) {
        let value = self.y + t * (self.m + t * (self.p + t * self.r));
        (
            value,
            (self.m + t * (2.0 * self.p + t * 3.0 * self.r)) / self.run,
        )
    }

    /// Newton from the chord, kept in its bracket: three or four rounds.
    fn inverse(&self, y: f64) -> (f64, f64) {
        let goal = y - self.y;
        let rise = self.m + self.p + self.r;
        let t = super::root::increasing(
            |t| {
                let value = t * (self.m + t * (self.p + t * self.r)) - goal;
                (value, self.m + t * (2.0 * self.p + t * 3.0 * self.r))
            },
            0.0,
            1.0,
            goal / rise,
        );
        (self.from + self.run * t, self.at(t).1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rough() -> Monotone {
        let x = [0.0, 1.0, 1.1, 4.0, 5.0, 9.0];
        let y = [0.0, 0.1, 3.0, 3.3, 8.0, 8.5];
        Monotone::new(&x, &y, 0.1, 1.0, 0.0).unwrap()
    }

    #[test]
    fn the_curve_meets_its_points_and_never_falls_below_the_floor() {
        let curve = rough();
        for (x, y) in curve.x().iter().zip(curve.y()) {
            assert!((curve.at(*x).0 - y).abs() < 1e-14);
        }
        for step in -100..1000 {
            let x = f64::from(step) * 0.01;
            assert!(
                curve.at(x).1 >= 0.1 - 1e-12,
                "slope {} at {x}",
                curve.at(x).1
            );
        }
    }

    #[test]
    fn slopes_are_the_derivative_and_are_continuous() {
        let curve = rough();
        for step in 1..900 {
            let x = f64::from(step) * 0.01 + 0.003;
            let h = 1e-6;
            let difference = (curve.at(x + h).0 - curve.at(x - h).0) / (2.0 * h);
            assert!(
                (difference - curve.at(x).1).abs() < 1e-5 * (1.0 + difference),
                "{x}"
            );
        }
        for x in curve.x() {
            let jump = curve.at(x + 1e-9).1 - curve.at(x - 1e-9).1;
            // The first point has a given slope unlike the floor before it.
            assert!(jump.abs() < 1e-5 || *x == 0.0, "{jump} at {x}");
        }
    }

    #[test]
    fn the_inverse_undoes_the_curve() {
        let curve = rough();
        for step in -50..1100 {
            let y = f64::from(step) * 0.01;
            let (x, slope) = curve.inverse(y);
            let (back, rise) = curve.at(x);
            assert!(
                (back - y).abs() < 2e-15 * (1.0 + y.abs()) + 1e-15 * rise,
                "{y}: {back}"
            );
            assert!((slope - rise).abs() < 1e-9 * rise, "{y}: {slope} {rise}");
        }
    }

    #[test]
    fn smooth_data_are_met_to_third_order() {
        let mut last = f64::NAN;
        for n in [10usize, 20, 40] {
            let x: Vec<f64> = (0..=n).map(|k| k as f64 / n as f64).collect();
            let y: Vec<f64> = x.iter().map(|x| x.exp()).collect();
            let curve = Monotone::new(&x, &y, 0.0, 1.0, 1f64.exp()).unwrap();
            let error = (1..1000)
                .map(|k| f64::from(k) * 1e-3)
                .map(|x| (curve.at(x).0 - x.exp()).abs())
                .fold(0.0, f64::max);
            assert!(
                last.is_nan() || (last / error).log2() > 2.9,
                "{n}: {error} after {last}"
            );
            last = error;
        }
    }

    #[test]
    fn faults_name_their_point() {
        let fault = |x: &[f64], y: &[f64]| Monotone::new(x, y, 1.0, 1.0, 1.0).unwrap_err();
        assert_eq!(fault(&[0.0], &[0.0]), Fault::TooFew);
        assert_eq!(fault(&[0.0, 1.0, 1.0], &[0.0, 2.0, 3.0]), Fault::XFalls(2));
        assert_eq!(fault(&[0.0, 1.0, 2.0], &[0.0, 2.0, 2.5]), Fault::TooFlat(2));
        assert_eq!(fault(&[0.0, f64::NAN], &[0.0, 2.0]), Fault::NotFinite(1));
    }
}
