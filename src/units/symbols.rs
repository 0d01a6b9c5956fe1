//! Unit symbols and SI prefixes as tables.
//!
//! Source: SI brochure, 9th edition, tables 2, 4, 7 and 8 (from memory); eV by the fixed elementary charge.

use super::dimension::Dimension;
use super::kind;

/// A unit symbol: its size in coherent SI units, its dimension, and whether prefixes go before it.
pub struct Symbol {
    /// As written.
    pub text: &'static str,
    /// One of it in coherent SI units, up to the power of ten below.
    pub factor: f64,
    /// Power of ten of its size, kept apart so that decimal numbers stay exact.
    pub power: i32,
    /// Its dimension.
    pub dimension: Dimension,
    /// True where a prefix may stand before it.
    pub prefixed: bool,
}

const fn unit(text: &'static str, dimension: Dimension) -> Symbol {
    Symbol {
        text,
        factor: 1.0,
        power: 0,
        dimension,
        prefixed: true,
    }
}

const fn plain(text: &'static str, factor: f64, dimension: Dimension) -> Symbol {
    Symbol {
        text,
        factor,
        power: 0,
        dimension,
        prefixed: false,
    }
}

const fn tens(power: i32, symbol: Symbol) -> Symbol {
    Symbol { power, ..symbol }
}

const fn of(kind: kind::Kind) -> Dimension {
    match kind.dimension {
        Some(dimension) => dimension,
        None => Dimension::NONE,
    }
}

const ELECTRONVOLT: Symbol = Symbol {
    prefixed: true,
    ..plain("eV", 1.602_176_634e-19, of(kind::ENERGY))
};

/// Every unit symbol; the first spelling of a unit is the one that remedies use.
pub const SYMBOLS: &[Symbol] = &[
    unit("Ω", of(kind::RESISTANCE)),
    unit("\u{2126}", of(kind::RESISTANCE)),
    unit("ohm", of(kind::RESISTANCE)),
    unit("F", of(kind::CAPACITANCE)),
    unit("H", of(kind::INDUCTANCE)),
    unit("V", of(kind::VOLTAGE)),
    unit("A", of(kind::CURRENT)),
    unit("s", of(kind::TIME)),
    plain("min", 60.0, of(kind::TIME)),
    plain("h", 3600.0, of(kind::TIME)),
    unit("Hz", of(kind::FREQUENCY)),
    unit("m", of(kind::LENGTH)),
    tens(-3, unit("g", of(kind::MASS))),
    unit("K", of(kind::TEMPERATURE)),
    plain("°C", 1.0, of(kind::TEMPERATURE)),
    plain("degC", 1.0, of(kind::TEMPERATURE)),
    plain("\u{2103}", 1.0, of(kind::TEMPERATURE)),
    unit("W", of(kind::POWER)),
    unit("J", of(kind::ENERGY)),
    ELECTRONVOLT,
    unit("C", of(kind::CHARGE)),
    unit("Wb", of(kind::FLUX_LINKAGE)),
    unit("T", of(kind::FLUX_DENSITY)),
    unit("N", of(kind::FORCE)),
    unit("S", of(kind::CONDUCTANCE)),
    plain("deg", std::f64::consts::PI / 180.0, Dimension::ANGLE),
    plain("°", std::f64::consts::PI / 180.0, Dimension::ANGLE),
    unit("rad", Dimension::ANGLE),
    tens(-2, plain("%", 1.0, Dimension::NONE)),
    tens(-6, plain("ppm", 1.0, Dimension::NONE)),
    plain("1", 1.0, Dimension::NONE),
];

/// SI prefixes with their powers of ten, the micro in its three spellings.
pub const PREFIXES: &[(&str, i32)] = &[
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("µ", -6),
    ("\u{03bc}", -6),
    ("u", -6),
    ("m", -3),
    ("c", -2),
    ("d", -1),
    ("k", 3),
    ("M", 6),
    ("G", 9),
    ("T", 12),
];

/// The symbol and prefix power of one written unit without exponent: `kΩ`, `mm`, `min`.
pub fn look_up(text: &str) -> Option<(&'static Symbol, i32)> {
    if let Some(symbol) = SYMBOLS.iter().find(|symbol| symbol.text == text) {
        return Some((symbol, 0));
    }
    PREFIXES.iter().find_map(|&(prefix, power)| {
        let rest = text.strip_prefix(prefix)?;
        let symbol = SYMBOLS
            .iter()
            .find(|symbol| symbol.prefixed && symbol.text == rest)?;
        Some((symbol, power))
    })
}

/// The unit that was probably meant by a text that is none: letters in the wrong case, `ohms`, or a slip of one
/// letter. Units of the `wanted` dimension come first.
pub fn nearest_unit(text: &str, wanted: Option<Dimension>) -> Option<String> {
    let fold = |text: &str| {
        text.replace('\u{03bc}', "µ")
            .to_lowercase()
            .replace("ohms", "ω")
            .replace("ohm", "ω")
    };
    let folded = fold(text);
    let mut best: Option<(usize, String)> = None;
    for symbol in SYMBOLS.iter().filter(|symbol| symbol.text != "1") {
        let foreign = usize::from(wanted.is_some_and(|dimension| dimension != symbol.dimension));
        let prefixes = PREFIXES
            .iter()
            .filter(|_| symbol.prefixed)
            .map(|&(prefix, _)| prefix);
        for prefix in std::iter::once("").chain(prefixes) {
            let candidate = format!("{prefix}{}", symbol.text);
            let slip = strsim::osa_distance(&candidate, text);
            // Of several spellings only the first is suggested, unless another is a slip away.
            let first = !matches!(symbol.text, "ohm" | "\u{2126}" | "\u{2103}");
            let other_case = first && fold(&candidate) == folded;
            if !other_case && (slip > 1 || folded.chars().count() < 3) {
                continue;
            }
            let cost = foreign * 100 + if other_case { slip } else { 10 + slip };
            if best.as_ref().is_none_or(|(least, _)| cost < *least) {
                best = Some((cost, candidate));
            }
        }
    }
    best.map(|(_, unit)| unit)
}
