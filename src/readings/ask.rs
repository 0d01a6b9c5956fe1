//! What a reading asks besides its signal.

/// The keys that a kind of reading takes besides `signal`, `take` and its window.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Needs {
    /// Its window alone.
    Window,
    /// `at:` instead of a window.
    Instant,
    /// `level:`.
    Level,
    /// `rises_to:` or `falls_to:`.
    Passing,
}

impl Needs {
    /// The keys, for the reader and the reference.
    pub const fn keys(self) -> &'static [&'static str] {
        match self {
            Needs::Window => &["from", "to"],
            Needs::Instant => &["at"],
            Needs::Level => &["level", "from", "to"],
            Needs::Passing => &["rises_to", "falls_to", "from", "to"],
        }
    }
}

/// The numbers asked for, with the values in force.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Ask {
    /// `level`, `rises_to` or `falls_to` [SI]; not looked at by the others.
    pub level: f64,
    /// True for `rises_to`.
    pub rising: bool,
}
