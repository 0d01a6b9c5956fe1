//! Dimensions as exponents of the SI base units that circuits need, and of the plane angle.

/// Exponents of the base units; the plane angle counts as a base so that `30 deg` and a bare `30` differ.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Dimension {
    /// Exponent of the metre.
    pub metre: i8,
    /// Exponent of the kilogram.
    pub kilogram: i8,
    /// Exponent of the second.
    pub second: i8,
    /// Exponent of the ampere.
    pub ampere: i8,
    /// Exponent of the kelvin.
    pub kelvin: i8,
    /// Exponent of the radian.
    pub radian: i8,
}

impl Dimension {
    /// No dimension: a plain number.
    pub const NONE: Dimension = Dimension::of(0, 0, 0, 0, 0);
    /// Plane angle.
    pub const ANGLE: Dimension = Dimension {
        radian: 1,
        ..Dimension::NONE
    };

    /// Exponents of metre, kilogram, second, ampere and kelvin.
    pub const fn of(metre: i8, kilogram: i8, second: i8, ampere: i8, kelvin: i8) -> Self {
        Dimension {
            metre,
            kilogram,
            second,
            ampere,
            kelvin,
            radian: 0,
        }
    }

    /// The dimension of a product with `other` to the power `exponent`. Saturates far beyond any real unit.
    pub const fn times(self, other: Dimension, exponent: i8) -> Self {
        const fn join(a: i8, b: i8, exponent: i8) -> i8 {
            a.saturating_add(b.saturating_mul(exponent))
        }
        Dimension {
            metre: join(self.metre, other.metre, exponent),
            kilogram: join(self.kilogram, other.kilogram, exponent),
            second: join(self.second, other.second, exponent),
            ampere: join(self.ampere, other.ampere, exponent),
            kelvin: join(self.kelvin, other.kelvin, exponent),
            radian: join(self.radian, other.radian, exponent),
        }
    }

    /// The dimension of a quotient.
    pub const fn over(self, other: Dimension) -> Self {
        self.times(other, -1)
    }

    /// True for a plain number.
    pub fn is_none(self) -> bool {
        self == Dimension::NONE
    }

    /// The base units as text: `kg m² s⁻³ A⁻¹`; empty for a plain number.
    pub fn base_units(self) -> String {
        let parts = [
            (self.kilogram, "kg"),
            (self.metre, "m"),
            (self.second, "s"),
            (self.ampere, "A"),
            (self.kelvin, "K"),
            (self.radian, "rad"),
        ];
        let written: Vec<String> = parts
            .iter()
            .filter(|(exponent, _)| *exponent != 0)
            .map(|&(exponent, symbol)| format!("{symbol}{}", superscript(exponent)))
            .collect();
        written.join(" ")
    }
}

/// An exponent in raised digits; nothing for 1.
fn superscript(exponent: i8) -> String {
    if exponent == 1 {
        return String::new();
    }
    exponent
        .to_string()
        .chars()
        .map(|digit| match digit {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            '0' => '⁰',
            // The raised digits 4 to 9 follow one another from U+2074.
            other => char::from_u32(0x2070 + other.to_digit(10).unwrap_or(0)).unwrap_or(other),
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_volt_is_a_watt_per_ampere() {
        let watt = Dimension::of(2, 1, -3, 0, 0);
        let ampere = Dimension::of(0, 0, 0, 1, 0);
        assert_eq!(watt.over(ampere), Dimension::of(2, 1, -3, -1, 0));
        assert_eq!(watt.over(ampere).base_units(), "kg m² s⁻³ A⁻¹");
    }

    #[test]
    fn absurd_exponents_saturate_and_print() {
        let metre = Dimension::of(100, 0, 0, 0, 0);
        assert_eq!(metre.times(metre, 100).metre, 127);
        assert_eq!(metre.times(metre, 100).base_units(), "m¹²⁷");
        assert_eq!(Dimension::of(4, 0, -6, 0, 0).base_units(), "m⁴ s⁻⁶");
    }
}
