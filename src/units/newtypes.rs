//! Lengths and areas for building shapes in code: `Metres::mm(10.0)`.

/// A length [m].
#[derive(Clone, Copy, Debug, Default, PartialEq, PartialOrd)]
pub struct Metres(pub f64);

impl Metres {
    /// From metres.
    pub const fn m(value: f64) -> Self {
        Metres(value)
    }
    /// From millimetres.
    pub const fn mm(value: f64) -> Self {
        Metres(value * 1e-3)
    }
    /// From micrometres.
    pub const fn um(value: f64) -> Self {
        Metres(value * 1e-6)
    }
    /// The number [m].
    pub const fn value(self) -> f64 {
        self.0
    }
}

/// An area [m²].
#[derive(Clone, Copy, Debug, Default, PartialEq, PartialOrd)]
pub struct SquareMetres(pub f64);

impl SquareMetres {
    /// From square metres.
    pub const fn m2(value: f64) -> Self {
        SquareMetres(value)
    }
    /// From square millimetres.
    pub const fn mm2(value: f64) -> Self {
        SquareMetres(value * 1e-6)
    }
    /// The number [m²].
    pub const fn value(self) -> f64 {
        self.0
    }
}
