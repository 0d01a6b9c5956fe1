//! Quantities as a person writes them, right and wrong.

use super::*;

fn read(text: &str, kind: Kind) -> Amount {
    parse_amount(text, kind).unwrap_or_else(|error| panic!("`{text}`: {error}"))
}

#[track_caller]
fn refused(text: &str, kind: Kind) -> UnitError {
    match parse_amount(text, kind) {
        Ok(amount) => panic!("`{text}` was read as {amount:?}"),
        Err(error) => {
            assert!(error.range.end <= text.len(), "{text}: {:?}", error.range);
            assert!(
                text.get(error.range.clone()).is_some(),
                "{text}: {:?} cuts a character",
                error.range
            );
            error
        }
    }
}

#[test]
fn quantities_are_read_in_si_units_without_rounding_twice() {
    let cases: &[(&str, Kind, f64)] = &[
        ("4.7 kΩ", RESISTANCE, 4700.0),
        ("4.7 kohm", RESISTANCE, 4700.0),
        ("4.7 k\u{2126}", RESISTANCE, 4700.0),
        ("4.7kΩ", RESISTANCE, 4700.0),
        ("47 nF", CAPACITANCE, 47e-9),
        ("0.1 uF", CAPACITANCE, 1e-7),
        ("0.1 µF", CAPACITANCE, 1e-7),
        ("0.1 \u{03bc}F", CAPACITANCE, 1e-7),
        ("24 V", VOLTAGE, 24.0),
        ("-24 V", VOLTAGE, -24.0),
        ("\u{2212}24 V", VOLTAGE, -24.0),
        ("+24 V", VOLTAGE, 24.0),
        (".5 V", VOLTAGE, 0.5),
        ("5. V", VOLTAGE, 5.0),
        ("1e-4 A", CURRENT, 1e-4),
        ("1E3 A", CURRENT, 1e3),
        ("1e3A", CURRENT, 1e3),
        ("50 mm²", AREA, 50e-6),
        ("50 mm2", AREA, 50e-6),
        ("50 mm^2", AREA, 50e-6),
        ("2 cm³", VOLUME, 2e-6),
        ("25 °C", TEMPERATURE, 298.15),
        ("25 degC", TEMPERATURE, 298.15),
        ("298.15 K", TEMPERATURE, 298.15),
        ("10 K", TEMPERATURE_RISE, 10.0),
        ("600 /h", RATE, 600.0 / 3600.0),
        ("90 /min", RATE, 1.5),
        ("3 /s", RATE, 3.0),
        ("3 1/s", RATE, 3.0),
        ("3 s⁻¹", RATE, 3.0),
        ("3 s^-1", RATE, 3.0),
        ("50 Hz", RATE, 50.0),
        ("100 kHz", FREQUENCY, 1e5),
        ("2 K/W", THERMAL_RESISTANCE, 2.0),
        ("2 °C/W", THERMAL_RESISTANCE, 2.0),
        ("0.4 J/K", THERMAL_CAPACITY, 0.4),
        ("400 A/m", FIELD_STRENGTH, 400.0),
        ("4 A/cm", FIELD_STRENGTH, 400.0),
        ("30 deg", ANGLE, std::f64::consts::PI / 6.0),
        ("30 °", ANGLE, std::f64::consts::PI / 6.0),
        ("1 rad", ANGLE, 1.0),
        ("5 %", RATIO, 0.05),
        ("0.05", RATIO, 0.05),
        ("20 ppm", RATIO, 20e-6),
        ("2300", PERMEABILITY, 2300.0),
        ("1 V/µs", VOLTAGE_RATE, 1e6),
        ("1.5 kV/us", VOLTAGE_RATE, 1.5e9),
        ("0.5 A/V²", SQUARE_LAW, 0.5),
        ("0.39 %/K", TEMPERATURE_COEFFICIENT, 3.9e-3),
        ("50 ppm/K", TEMPERATURE_COEFFICIENT, 50e-6),
        ("0.00393 /K", TEMPERATURE_COEFFICIENT, 3.93e-3),
        ("-2 mV/K", VOLTAGE_PER_KELVIN, -2e-3),
        ("17.2 nΩ m", RESISTIVITY, 17.2e-9),
        ("17.2 nΩ·m", RESISTIVITY, 17.2e-9),
        ("0.0172 Ω mm²/m", RESISTIVITY, 0.0172e-6),
        ("53 Ω/km", RESISTANCE_PER_METRE, 0.053),
        ("0.7 µH/m", INDUCTANCE_PER_METRE, 0.7e-6),
        ("100 pF/m", CAPACITANCE_PER_METRE, 1e-10),
        ("0.1 N s/m", DAMPING, 0.1),
        ("2 N/mm", SPRING_RATE, 2000.0),
        ("5 g", MASS, 0.005),
        ("5 kg", MASS, 5.0),
        ("20 µWb", FLUX_LINKAGE, 20e-6),
        ("1 V s", FLUX_LINKAGE, 1.0),
        ("1.12 eV", ENERGY, 1.12 * 1.602_176_634e-19),
        ("2 min", TIME, 120.0),
        ("1.5 h", TIME, 5400.0),
        ("12 h", TIME, 43200.0),
        ("15 µC", CHARGE, 15e-6),
        ("160 nH", INDUCTANCE_FACTOR, 160e-9),
        ("3", ANY, 3.0),
        ("0.1 Ω", ANY, 0.1),
        ("5 mS", ANY, 5e-3),
        ("0 Ω", RESISTANCE, 0.0),
        ("  24 V  ", VOLTAGE, 24.0),
        ("24\u{a0}V", VOLTAGE, 24.0),
    ];
    for (text, kind, value) in cases {
        let amount = read(text, *kind);
        assert!(
            (amount.nominal - value).abs() <= 1e-15 * value.abs(),
            "{text}: {} for {value}",
            amount.nominal
        );
        assert_eq!(
            (amount.low, amount.high),
            (amount.nominal, amount.nominal),
            "{text}"
        );
    }
    assert_eq!(read("4.7 kΩ", RESISTANCE).nominal, 4700.0);
    assert_eq!(read("0.1 uF", CAPACITANCE).nominal, 1e-7);
}

#[test]
fn case_matters_in_prefixes() {
    assert_eq!(read("1 mΩ", RESISTANCE).nominal, 1e-3);
    assert_eq!(read("1 MΩ", RESISTANCE).nominal, 1e6);
    assert_eq!(refused("1 KΩ", RESISTANCE).help.as_deref(), Some("1 kΩ"));
}

#[test]
fn spreads_give_both_ends() {
    let cases: &[(&str, Kind, f64, f64)] = &[
        ("24 V ± 10 %", VOLTAGE, 21.6, 26.4),
        ("24 V +/- 10 %", VOLTAGE, 21.6, 26.4),
        ("24 V +- 10%", VOLTAGE, 21.6, 26.4),
        ("24V±10%", VOLTAGE, 21.6, 26.4),
        ("24 V +15 % -20 %", VOLTAGE, 19.2, 27.6),
        ("24 V -20 % +15 %", VOLTAGE, 19.2, 27.6),
        ("24 V + 15 % - 20 %", VOLTAGE, 19.2, 27.6),
        ("24 V +3 V -1 V", VOLTAGE, 23.0, 27.0),
        ("24 V +500 mV -1 %", VOLTAGE, 23.76, 24.5),
        ("400 Ω ± 20 Ω", RESISTANCE, 380.0, 420.0),
        ("1 kΩ ± 20 Ω", RESISTANCE, 980.0, 1020.0),
        ("24 V within 18 V .. 32 V", VOLTAGE, 18.0, 32.0),
        ("24 V within 18 V..32 V", VOLTAGE, 18.0, 32.0),
        ("-5 V ± 10 %", VOLTAGE, -5.5, -4.5),
        ("-5 V within -6 V .. -4 V", VOLTAGE, -6.0, -4.0),
        ("25 °C within -25 °C .. 70 °C", TEMPERATURE, 248.15, 343.15),
        ("25 °C ± 5 K", TEMPERATURE, 293.15, 303.15),
        ("0.5 ± 10 %", RATIO, 0.45, 0.55),
        ("0.5 ± 0.1", RATIO, 0.4, 0.6),
        ("50 % within 45 % .. 55 %", RATIO, 0.45, 0.55),
        ("160 nH ± 3 %", INDUCTANCE_FACTOR, 155.2e-9, 164.8e-9),
        ("600 /h ± 50 %", RATE, 300.0 / 3600.0, 900.0 / 3600.0),
        ("10 V ± 0 %", VOLTAGE, 10.0, 10.0),
        ("0 V ± 1 V", VOLTAGE, -1.0, 1.0),
        ("10 s^-1 ± 1 s^-1", RATE, 9.0, 11.0),
    ];
    for (text, kind, low, high) in cases {
        let amount = read(text, *kind);
        let near = |a: f64, b: f64| (a - b).abs() <= 1e-14 * b.abs();
        assert!(
            near(amount.low, *low) && near(amount.high, *high),
            "{text}: {amount:?}"
        );
        assert!(amount.low <= amount.nominal && amount.nominal <= amount.high);
    }
}

#[test]
fn a_wrong_dimension_names_both() {
    let cases = [
        (
            "47 nF",
            RESISTANCE,
            "resistance takes Ω, got 47 nF, a capacitance",
        ),
        (
            "0.32 mF",
            LENGTH,
            "length takes m, got 0.32 mF, a capacitance",
        ),
        (
            "24 V",
            TEMPERATURE,
            "temperature takes °C, got 24 V, a voltage",
        ),
        (
            "4 V",
            RATIO,
            "ratio takes a plain number or %, got 4 V, a voltage",
        ),
        (
            "1.12 eV",
            VOLTAGE,
            "voltage takes V, got 1.12 eV, an energy",
        ),
        ("5 %", VOLTAGE, "voltage takes V, got 5 %, a plain number"),
        ("1 kg m", FORCE, "force takes N, got 1 kg m, in kg m"),
        ("30", ANGLE, "angle takes deg, got 30 without a unit"),
        (
            "10",
            RESISTANCE,
            "resistance takes Ω, got 10 without a unit",
        ),
        (
            "10 °C",
            TEMPERATURE_RISE,
            "temperature rise takes K, got 10 °C, a point on the temperature scale",
        ),
        ("1 m", AREA, "area takes m², got 1 m, a length"),
    ];
    for (text, kind, headline) in cases {
        assert_eq!(refused(text, kind).to_string(), headline);
    }
    assert_eq!(
        refused("47 nF", RESISTANCE).headline("closed_resistance"),
        "closed_resistance takes Ω, got 47 nF, a capacitance"
    );
    assert_eq!(
        refused("47 nF", RESISTANCE).label,
        "a resistance is written in mΩ, Ω, kΩ, MΩ"
    );
}

#[test]
fn numbers_of_other_tongues_are_refused_with_the_remedy() {
    let cases = [
        ("4k7", RESISTANCE, Some("4.7 kΩ")),
        ("4K7", RESISTANCE, Some("4.7 kΩ")),
        ("2R2", RESISTANCE, Some("2.2 Ω")),
        ("1M5", RESISTANCE, Some("1.5 MΩ")),
        ("2n2", CAPACITANCE, Some("2.2 nF")),
        ("5V6", VOLTAGE, Some("5.6 V")),
        ("4u7", INDUCTANCE, Some("4.7 uH")),
        ("4,7 kΩ", RESISTANCE, Some("4.7 kΩ")),
        ("10 000 Ω", RESISTANCE, None),
        ("10_000 Ω", RESISTANCE, None),
        ("1.000.000 Ω", RESISTANCE, None),
        ("0x10 Ω", RESISTANCE, None),
    ];
    for (text, kind, remedy) in cases {
        assert_eq!(refused(text, kind).help.as_deref(), remedy, "{text}");
    }
    // Where the exponent makes sense it is one.
    assert_eq!(read("2m2", AREA).nominal, 2.0);
}

#[test]
fn what_is_no_finite_number_is_refused() {
    for text in [
        "NaN Ω",
        "nan",
        "inf Ω",
        "-inf Ω",
        "Infinity",
        "∞ Ω",
        "1e999 Ω",
        "-1e999 Ω",
        "1e308 MΩ",
        "1e-400 Ω",
        "1e99999999999 Ω",
        "",
    ] {
        assert_eq!(refused(text, RESISTANCE).word, "bad-number", "{text}");
    }
    assert_eq!(refused("1e308 V ± 100 %", VOLTAGE).word, "bad-spread");
    assert_eq!(refused("-274 °C", TEMPERATURE).word, "bad-number");
    assert_eq!(read("0e-999 Ω", RESISTANCE).nominal, 0.0);
}

#[test]
fn spreads_that_make_no_sense_are_refused() {
    let cases = [
        ("25 °C ± 10 %", TEMPERATURE),
        ("25 °C ± 5 °C", TEMPERATURE),
        ("25 °C within -300 °C .. 70 °C", TEMPERATURE),
        ("1 K ± 5 K", TEMPERATURE),
        ("24 V within 25 V .. 32 V", VOLTAGE),
        ("24 V within 32 V .. 18 V", VOLTAGE),
        ("24 V within 18 .. 32 V", VOLTAGE),
        ("24 V within 18 V", VOLTAGE),
        ("24 V within", VOLTAGE),
        ("24 V within 18 V .. ", VOLTAGE),
        ("24 V ± 1 Ω", VOLTAGE),
        ("24 V ± 1", VOLTAGE),
        ("24 V ±", VOLTAGE),
        ("24 V ± -10 %", VOLTAGE),
        ("24 V +10 %", VOLTAGE),
        ("24 V +10 % +20 %", VOLTAGE),
        ("24 V +10 % -20 % 5", VOLTAGE),
        ("24 V ± 10 % within 1 V .. 30 V", VOLTAGE),
        ("0 V ± 10 %", VOLTAGE),
        ("50 % ± 5 %", RATIO),
        ("24 V, 5 A", VOLTAGE),
        ("24 V ± NaN %", VOLTAGE),
        ("24 V ± 1e999 %", VOLTAGE),
    ];
    for (text, kind) in cases {
        refused(text, kind);
    }
    assert_eq!(
        refused("25 °C ± 5 °C", TEMPERATURE).help.as_deref(),
        Some("5 K")
    );
    assert_eq!(
        refused("24 V within 32 V .. 18 V", VOLTAGE).help.as_deref(),
        Some("within 18 V .. 32 V")
    );
    assert_eq!(
        refused("24 V +10 %", VOLTAGE).help.as_deref(),
        Some("+10 % -0 %")
    );
}

#[test]
fn an_unknown_unit_suggests_the_nearest_of_the_right_kind() {
    let cases = [
        ("10 kOhm", RESISTANCE, "10 kΩ"),
        ("10 Ohms", RESISTANCE, "10 Ω"),
        ("10 ohms", RESISTANCE, "10 Ω"),
        ("5 v", VOLTAGE, "5 V"),
        ("5 ma", CURRENT, "5 mA"),
        ("5 uf", CAPACITANCE, "5 uF"),
        ("5 PF", CAPACITANCE, "5 pF"),
        ("5 khz", FREQUENCY, "5 kHz"),
        ("5 KHz", FREQUENCY, "5 kHz"),
        ("5 k/w", THERMAL_RESISTANCE, "5 K/W"),
    ];
    for (text, kind, remedy) in cases {
        assert_eq!(refused(text, kind).help.as_deref(), Some(remedy), "{text}");
    }
    assert_eq!(refused("5 bananas", RESISTANCE).help, None);
}

#[test]
fn hostile_texts_are_refused_without_panic() {
    let long = "9".repeat(100_000);
    let texts = [
        "±",
        "+",
        "-",
        "%",
        "..",
        "within",
        "e",
        ".",
        "1 /",
        "1 //s",
        "1 (",
        "1 m^",
        "1 m^0",
        "1 m99",
        "1 m^-",
        "1 /\u{3a9}/",
        "1 Ω±",
        "1 ±±",
        "\u{202e}1 V",
        "1\0V",
        "1 \u{301}V",
        "1 µ",
        "1 k",
        "1 V²²",
        "1 V^2^2",
        "1 *",
        "1 m·",
        "1..2",
        "1e",
        "1e+",
        "1e+V",
        "--1 V",
        "+-1 V",
        &long,
    ];
    for text in texts {
        for kind in ALL {
            let _ = parse_amount(text, *kind)
                .map_err(|error| assert!(text.get(error.range).is_some(), "{text}"));
        }
    }
}

#[test]
fn every_printed_quantity_reads_back_as_itself() {
    // A fixed sequence over thirty decades: the multiplier of Park and Miller (from memory) as a source of digits.
    let mut state: u64 = 20_240_601;
    for _ in 0..2000 {
        state = state * 48_271 % 2_147_483_647;
        let digits = state as f64 / 2_147_483_647.0 * 9.0 + 1.0;
        let power = (state % 31) as i32 - 15;
        let value = digits * 10f64.powi(power) * if state.is_multiple_of(2) { 1.0 } else { -1.0 };
        for kind in ALL.iter().filter(|kind| !kind.on_scale) {
            let text = engineering(value, *kind, 17);
            let amount =
                parse_amount(&text, *kind).unwrap_or_else(|error| panic!("`{text}`: {error}"));
            assert!(
                (amount.nominal - value).abs() <= 4e-16 * value.abs(),
                "{text}: {} for {value}",
                amount.nominal
            );
        }
        let kelvin = value.abs().min(1e6);
        let text = engineering(kelvin, TEMPERATURE, 17);
        let back =
            parse_amount(&text, TEMPERATURE).unwrap_or_else(|error| panic!("`{text}`: {error}"));
        assert!(
            (back.nominal - kelvin).abs() <= 1e-12 * kelvin.max(273.15),
            "{text}"
        );
    }
}

#[test]
fn printed_quantities_look_as_a_person_writes_them() {
    let cases: &[(f64, Kind, usize, &str)] = &[
        (4700.0, RESISTANCE, 3, "4.7 kΩ"),
        (999.96, RESISTANCE, 4, "1 kΩ"),
        (999.4, RESISTANCE, 3, "999 Ω"),
        (0.0263, TIME, 3, "26.3 ms"),
        (1e-6, CURRENT, 3, "1 µA"),
        (-64.23, VOLTAGE, 4, "-64.23 V"),
        (0.0, VOLTAGE, 3, "0 V"),
        (-0.0, VOLTAGE, 3, "0 V"),
        (343.15, TEMPERATURE, 3, "70 °C"),
        (248.15, TEMPERATURE, 3, "-25 °C"),
        (50e-6, AREA, 3, "50 mm²"),
        (1.5e-4, AREA, 3, "1.5 cm²"),
        (3e-6, VOLUME, 3, "3 cm³"),
        (0.005, MASS, 3, "5 g"),
        (1200.0, FIELD_STRENGTH, 3, "1.2 kA/m"),
        (2300.0, PERMEABILITY, 3, "2300"),
        (0.123456, RATIO, 3, "0.123"),
        (1e-9, RATIO, 3, "1e-9"),
        (1e20, VOLTAGE, 3, "1e20 V"),
        (f64::NAN, VOLTAGE, 3, "undefined"),
        (f64::INFINITY, VOLTAGE, 3, "∞ V"),
        (f64::NEG_INFINITY, AREA, 3, "-∞ m²"),
        (2.5e7, VOLTAGE_RATE, 3, "25 MV/s"),
        (0.00393, TEMPERATURE_COEFFICIENT, 3, "0.00393 1/K"),
        (0.5, ANGLE, 3, "0.5 rad"),
        (f64::MAX, RESISTANCE, 3, "1.8e308 Ω"),
        (5e-324, RESISTANCE, 3, "4.94e-324 Ω"),
    ];
    for (value, kind, digits, text) in cases {
        assert_eq!(engineering(*value, *kind, *digits), *text);
    }
    assert_eq!(engineering(4700.0, "Ω", 2), "4.7 kΩ");
}

#[test]
fn random_texts_are_read_or_refused_without_panic() {
    let pieces = [
        "4",
        ".",
        "7",
        "0",
        "-",
        "+",
        "±",
        "+/-",
        " ",
        "\u{a0}",
        "e",
        "E",
        "k",
        "m",
        "µ",
        "M",
        "V",
        "Ω",
        "F",
        "s",
        "h",
        "/",
        "%",
        "°C",
        "K",
        "²",
        "2",
        "^",
        "within",
        "..",
        "·",
        "deg",
        "R",
        ",",
        "_",
        "\u{2212}",
        "nan",
        "∞",
        "\n",
        "(",
        "\u{1f600}",
        "\u{301}",
    ];
    let mut state: u64 = 11;
    let mut next = |below: usize| {
        state = state * 48_271 % 2_147_483_647;
        state as usize % below
    };
    for _ in 0..60_000 {
        let text: String = (0..=next(12)).map(|_| pieces[next(pieces.len())]).collect();
        let kind = ALL[next(ALL.len())];
        match parse_amount(&text, kind) {
            Ok(amount) => assert!(
                amount.low <= amount.nominal
                    && amount.nominal <= amount.high
                    && amount.low.is_finite()
                    && amount.high.is_finite(),
                "{text}"
            ),
            Err(error) => assert!(text.get(error.range.clone()).is_some(), "{text}: {error:?}"),
        }
    }
}

#[test]
fn a_huge_text_is_refused_with_a_short_message() {
    for text in [
        "9".repeat(10_000_000),
        format!("1 {}", "k".repeat(10_000_000)),
        format!("1 V ± {}", "1,".repeat(5_000_000)),
        "1 / ".repeat(2_000_000),
    ] {
        let error = refused(&text, VOLTAGE);
        assert!(
            error.problem.len() + error.label.len() + error.help.map_or(0, |help| help.len())
                < 1000
        );
    }
}
