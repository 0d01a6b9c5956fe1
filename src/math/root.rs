//! Roots of increasing functions, by Newton's rule kept inside a bracket.

/// The x in [`low`, `high`] where the increasing `f` (value, slope) passes zero.
///
/// Newton steps that leave the bracket, or that shrink it too slowly, are replaced by halving, so the end is
/// reached for every continuous increasing `f`. Where `f` has no zero inside, the nearer end is approached.
/// Accuracy: the last few digits of x.
pub fn increasing(
    mut f: impl FnMut(f64) -> (f64, f64),
    mut low: f64,
    mut high: f64,
    guess: f64,
) -> f64 {
    let mut x = if guess > low && guess < high {
        guess
    } else {
        0.5 * (low + high)
    };
    let mut last = high - low;
    for _ in 0..200 {
        let (value, slope) = f(x);
        if value > 0.0 {
            high = x;
        } else if value < 0.0 {
            low = x;
        } else {
            return x;
        }
        let step = value / slope;
        let newton = x - step;
        let inside = newton > low && newton < high && step.abs() < 0.5 * last;
        let next = if inside { newton } else { 0.5 * (low + high) };
        last = (next - x).abs();
        if last <= 1e-16 * x.abs() || next == low || next == high {
            return next;
        }
        x = next;
    }
    x
}

/// The x in [`low`, `high`] where `f`, negative (or zero) at `low` and positive at `high`, changes sign: by halving,
/// for functions without a slope. Accuracy: the last few digits of x.
pub fn halving(mut f: impl FnMut(f64) -> f64, mut low: f64, mut high: f64) -> f64 {
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            break;
        }
        if f(middle) > 0.0 {
            high = middle;
        } else {
            low = middle;
        }
    }
    0.5 * (low + high)
}

/// The smallest power-of-two multiple of `start` (> 0) at which the increasing `f` is positive, for a bracket.
///
/// None where 1e300 is passed without a sign change.
pub fn above(mut f: impl FnMut(f64) -> f64, start: f64) -> Option<f64> {
    let mut x = start;
    while x.is_finite() && x < 1e300 {
        if f(x) > 0.0 {
            return Some(x);
        }
        x *= 2.0;
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn roots_are_found_to_the_last_digits_wherever_the_search_starts() {
        for guess in [-3.0, 0.1, 1.0, 1.9, 7.0] {
            let root = increasing(|x| (x * x * x - 2.0, 3.0 * x * x), 0.0, 2.0, guess);
            assert!((root - 2f64.cbrt()).abs() < 4e-16);
        }
        assert!((halving(|x| x * x * x - 2.0, 0.0, 2.0) - 2f64.cbrt()).abs() < 4e-16);
        // A knee where plain Newton swings for ever.
        let root = increasing(|x| (x.atan(), 1.0 / (1.0 + x * x)), -50.0, 90.0, 80.0);
        assert!(root.abs() < 1e-15);
    }

    #[test]
    fn an_end_is_approached_where_no_root_lies_inside() {
        assert!(increasing(|x| (x + 1.0, 1.0), 0.0, 2.0, 1.0) < 1e-50);
        assert_eq!(above(|x| x - 9.0, 1.0), Some(16.0));
        assert_eq!(above(|_| -1.0, 1.0), None);
    }
}
