//! What a reading's result measures: the signal's kind times or per second.

use crate::units::{self, Dimension, Kind};

/// The kind of a time.
pub(super) fn time(_: Kind) -> Kind {
    units::TIME
}

/// The signal's own kind.
pub(super) fn own(kind: Kind) -> Kind {
    kind
}

/// A difference of two values: of temperatures a rise.
pub(super) fn difference(kind: Kind) -> Kind {
    if kind.on_scale {
        units::TEMPERATURE_RISE
    } else {
        kind
    }
}

/// The kind of an integral over time.
pub(super) fn integral(kind: Kind) -> Kind {
    look_up(INTEGRALS, kind, 1)
}

/// The kind of a slope.
pub(super) fn rate(kind: Kind) -> Kind {
    look_up(RATES, kind, -1)
}

const fn over_time(
    name: &'static str,
    symbol: &'static str,
    of: Kind,
    seconds: i8,
) -> (Kind, Kind) {
    let dimension = match of.dimension {
        Some(dimension) => Some(dimension.times(SECOND, seconds)),
        None => None,
    };
    let kind = Kind {
        name,
        symbol,
        takes: symbol,
        examples: symbol,
        dimension,
        on_scale: false,
    };
    (of, kind)
}

const SECOND: Dimension = Dimension::of(0, 0, 1, 0, 0);

/// Signal kind and the kind of its integral.
const INTEGRALS: &[(Kind, Kind)] = &[
    over_time("a voltage over time", "V s", units::VOLTAGE, 1),
    (units::CURRENT, units::CHARGE),
    (units::POWER, units::ENERGY),
    over_time("an energy over time", "J s", units::ENERGY, 1),
    over_time("a flux linkage over time", "Wb s", units::FLUX_LINKAGE, 1),
    over_time("a flux density over time", "T s", units::FLUX_DENSITY, 1),
    over_time(
        "a field strength over time",
        "A s/m",
        units::FIELD_STRENGTH,
        1,
    ),
    over_time("an inductance over time", "H s", units::INDUCTANCE, 1),
    (units::RATIO, units::TIME),
    over_time("a length over time", "m s", units::LENGTH, 1),
    over_time("a force over time", "N s", units::FORCE, 1),
    over_time("a temperature over time", "K s", units::TEMPERATURE, 1),
];

/// Signal kind and the kind of its slope.
const RATES: &[(Kind, Kind)] = &[
    (units::VOLTAGE, units::VOLTAGE_RATE),
    (units::CURRENT, units::CURRENT_RATE),
    over_time("a power rate", "W/s", units::POWER, -1),
    (units::ENERGY, units::POWER),
    over_time("a flux linkage rate", "Wb/s", units::FLUX_LINKAGE, -1),
    over_time("a flux density rate", "T/s", units::FLUX_DENSITY, -1),
    over_time("a field strength rate", "A/m/s", units::FIELD_STRENGTH, -1),
    over_time("an inductance rate", "H/s", units::INDUCTANCE, -1),
    (units::RATIO, units::RATE),
    (units::LENGTH, units::SPEED),
    over_time("a force rate", "N/s", units::FORCE, -1),
    over_time("a temperature rate", "K/s", units::TEMPERATURE, -1),
];

fn look_up(table: &[(Kind, Kind)], kind: Kind, seconds: i8) -> Kind {
    let found = table.iter().find(|(signal, _)| *signal == kind);
    // A signal of a kind that no phrase has yet: right in dimension, without a name of its own.
    found.map_or_else(
        || over_time("a quantity", "", kind, seconds).1,
        |(_, result)| *result,
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::signals::PHRASES;
    use crate::units::parse_amount;

    /// Each phrase's kind is in both tables, with the right dimension, and its symbol can be typed.
    #[test]
    fn every_signal_has_an_integral_and_a_slope() {
        for phrase in PHRASES {
            for (result, seconds) in [(integral(phrase.kind), 1), (rate(phrase.kind), -1)] {
                let wanted = phrase
                    .kind
                    .dimension
                    .map(|dimension| dimension.times(SECOND, seconds));
                assert_eq!(result.dimension, wanted, "{}", phrase.pattern);
                assert!(!result.symbol.is_empty(), "{}", phrase.pattern);
                let symbol = result.symbol.replace("1/s", "/s");
                let typed = parse_amount(&format!("2 {symbol}"), result);
                assert_eq!(typed.map(|amount| amount.nominal), Ok(2.0), "{symbol}");
            }
        }
    }
}
