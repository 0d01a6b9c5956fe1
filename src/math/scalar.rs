//! The numbers that matrices hold: real and complex, through one trait.

use num_complex::Complex64;
use std::fmt::Debug;
use std::ops::{Add, AddAssign, Div, Mul, MulAssign, Neg, Sub, SubAssign};

/// A real or complex number in double precision.
pub trait Scalar:
    Copy
    + Debug
    + Default
    + PartialEq
    + Send
    + Sync
    + 'static
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + AddAssign
    + SubAssign
    + MulAssign
{
    /// Zero.
    const ZERO: Self;
    /// One.
    const ONE: Self;
    /// The number with this real part.
    fn from_real(value: f64) -> Self;
    /// The sum of the parts' magnitudes: zero for zero alone, within a factor sqrt 2 of the modulus, and cheap.
    fn size(self) -> f64;
    /// The number times a real factor.
    fn scaled(self, factor: f64) -> Self;
    /// True where no part is infinite or not a number.
    fn is_finite(self) -> bool {
        self.size().is_finite()
    }
}

impl Scalar for f64 {
    const ZERO: f64 = 0.0;
    const ONE: f64 = 1.0;
    #[inline]
    fn from_real(value: f64) -> f64 {
        value
    }
    #[inline]
    fn size(self) -> f64 {
        self.abs()
    }
    #[inline]
    fn scaled(self, factor: f64) -> f64 {
        self * factor
    }
}

impl Scalar for Complex64 {
    const ZERO: Complex64 = Complex64::new(0.0, 0.0);
    const ONE: Complex64 = Complex64::new(1.0, 0.0);
    #[inline]
    fn from_real(value: f64) -> Complex64 {
        Complex64::new(value, 0.0)
    }
    #[inline]
    fn size(self) -> f64 {
        self.re.abs() + self.im.abs()
    }
    #[inline]
    fn scaled(self, factor: f64) -> Complex64 {
        self * factor
    }
}
