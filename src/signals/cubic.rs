//! A cubic over s from 0 to 1: its turning points and zeros, found so that rounding cannot lose one.

/// c0 + c1 s + c2 s² + c3 s³, with the value at s = 1 kept as it was given.
#[derive(Clone, Copy, Debug)]
pub(super) struct Cubic {
    c: [f64; 4],
    end: f64,
}

impl Cubic {
    /// Through values at 0, 1/3, 2/3 and 1, less `level`. Differences keep a small ripple on a large value.
    pub fn through(values: [f64; 4], level: f64) -> Self {
        let [y0, y1, y2, y3] = values;
        let (d1, d2, d3) = (y1 - y0, y2 - y0, y3 - y0);
        Cubic {
            c: [
                y0 - level,
                9.0 * d1 - 4.5 * d2 + d3,
                4.5 * (4.0 * d2 - 5.0 * d1 - d3),
                4.5 * (3.0 * (d1 - d2) + d3),
            ],
            end: y3 - level,
        }
    }

    /// Value at s.
    pub fn value(&self, s: f64) -> f64 {
        if s >= 1.0 {
            return self.end;
        }
        let [c0, c1, c2, c3] = self.c;
        c0 + s * (c1 + s * (c2 + s * c3))
    }

    /// Slope over s.
    pub fn slope(&self, s: f64) -> f64 {
        let [_, c1, c2, c3] = self.c;
        c1 + s * (2.0 * c2 + s * 3.0 * c3)
    }

    /// The s strictly inside where the slope changes its sign, in order.
    ///
    /// The quadratic is solved without the cancelling difference (Press et al., Numerical Recipes, section
    /// 5.6): q = -(b + sign(b) sqrt(b² - 4 a c))/2, then q/a and c/q; with a = 0 the second is the root.
    pub fn turning_points(&self) -> [Option<f64>; 2] {
        let [_, c, c2, c3] = self.c;
        let (a, b) = (3.0 * c3, 2.0 * c2);
        let discriminant = b * b - 4.0 * a * c;
        // A double root is an inflexion, where the slope keeps its sign.
        if discriminant.is_nan() || discriminant <= 0.0 {
            return [None; 2];
        }
        let q = -0.5 * (b + discriminant.sqrt().copysign(b));
        let inside = |s: f64| (s > 0.0 && s < 1.0).then_some(s);
        match (inside(q / a), inside(c / q)) {
            (Some(first), Some(second)) if first > second => [Some(second), Some(first)],
            both => [both.0, both.1],
        }
    }

    /// The s strictly inside where the slope is steepest or flattest.
    pub fn inflexion(&self) -> Option<f64> {
        let s = -self.c[2] / (3.0 * self.c[3]);
        (s > 0.0 && s < 1.0).then_some(s)
    }

    /// Where the value becomes greater than zero (true) or ceases to be (false), in order.
    ///
    /// Between turning points the cubic is monotone, so that each change of side encloses exactly one zero.
    pub fn crossings(&self) -> [Option<(f64, bool)>; 3] {
        let [first, second] = self.turning_points();
        let mut found = [None; 3];
        let mut left = (0.0, self.value(0.0));
        let ends = [first, second, Some(1.0)];
        for (slot, s) in found.iter_mut().zip(ends.into_iter().flatten()) {
            let right = (s, self.value(s));
            let rising = right.1 > 0.0;
            if (left.1 > 0.0) != rising {
                // An end that lies on the level is the zero itself.
                let zero = match (left.1 == 0.0, right.1 == 0.0) {
                    (true, _) => left.0,
                    (_, true) => right.0,
                    _ => self.zero_between(left.0, right.0, rising),
                };
                *slot = Some((zero, rising));
            }
            left = right;
        }
        found
    }

    /// The zero of a monotone stretch whose ends lie on different sides: Newton, held inside the bracket and
    /// replaced by halving where it does not halve the value (Numerical Recipes, section 9.4).
    fn zero_between(&self, mut low: f64, mut high: f64, rising: bool) -> f64 {
        let mut s = 0.5 * (low + high);
        let mut before = f64::INFINITY;
        // Halving alone needs 53 rounds; at worst every second one is a halving.
        for _ in 0..110 {
            let value = self.value(s);
            if value == 0.0 {
                return s;
            }
            if (value > 0.0) == rising {
                high = s;
            } else {
                low = s;
            }
            let newton = s - value / self.slope(s);
            let good = newton > low && newton < high && value.abs() < 0.5 * before;
            let next = if good { newton } else { 0.5 * (low + high) };
            before = value.abs();
            if (next - s).abs() <= 0.5 * f64::EPSILON {
                return next;
            }
            s = next;
        }
        s
    }
}
