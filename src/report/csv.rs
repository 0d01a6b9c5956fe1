//! Comma-separated values, RFC 4180: headings with units, numbers at full precision.
//!
//! A text that a spreadsheet would run as a formula (it begins with `=`, `+`, `-`, `@`, a tab or a carriage return)
//! is preceded by an apostrophe; numbers are written as they are. Lines end in CR LF as the RFC has it.

use std::fmt::Write;

/// One column of numbers.
#[derive(Clone, Debug)]
pub struct Column<'a> {
    /// What it holds, in words: `voltage at drive`.
    pub name: &'a str,
    /// Its unit, empty for none.
    pub unit: &'a str,
    /// The values; what is not finite becomes an empty cell.
    pub values: &'a [f64],
}

/// A table of number columns with a heading line: `time [s],voltage at drive [V]`. Shorter columns end in empty cells.
pub fn numbers(columns: &[Column<'_>]) -> String {
    let headings = columns.iter().map(|column| match column.unit {
        "" => column.name.to_string(),
        unit => format!("{} [{unit}]", column.name),
    });
    let mut text = line(headings);
    let rows = columns
        .iter()
        .map(|column| column.values.len())
        .max()
        .unwrap_or(0);
    for row in 0..rows {
        for (place, column) in columns.iter().enumerate() {
            if place > 0 {
                text.push(',');
            }
            push_number(
                &mut text,
                column.values.get(row).copied().unwrap_or(f64::NAN),
            );
        }
        text.push_str("\r\n");
    }
    text
}

/// A table of texts, headings first.
pub fn texts(headings: &[&str], rows: &[Vec<String>]) -> String {
    let mut text = line(headings.iter().map(|heading| heading.to_string()));
    for row in rows {
        text.push_str(&line(row.iter().cloned()));
    }
    text
}

/// A number as a cell: the shortest figures that read back as the same value; empty where it is not finite.
pub fn number(value: f64) -> String {
    let mut text = String::new();
    push_number(&mut text, value);
    text
}

fn push_number(text: &mut String, value: f64) {
    let magnitude = value.abs();
    let written = match value {
        value if !value.is_finite() => Ok(()),
        0.0 => write!(text, "0"),
        value if (1e-4..1e15).contains(&magnitude) => write!(text, "{value}"),
        value => write!(text, "{value:e}"),
    };
    written.expect("writing to a String cannot fail");
}

fn line(cells: impl Iterator<Item = String>) -> String {
    let cells: Vec<String> = cells.map(|cell| quoted(&harmless(cell))).collect();
    format!("{}\r\n", cells.join(","))
}

/// With an apostrophe where a spreadsheet would compute the text; a text that reads as a plain number stays.
fn harmless(cell: String) -> String {
    let risky = cell
        .trim_start_matches(' ')
        .starts_with(['=', '+', '-', '@', '\t', '\r']);
    match risky && cell.parse::<f64>().is_err() {
        true => format!("'{cell}"),
        false => cell,
    }
}

fn quoted(cell: &str) -> String {
    match cell.contains(['"', ',', '\r', '\n']) || cell.starts_with(' ') || cell.ends_with(' ') {
        true => format!("\"{}\"", cell.replace('"', "\"\"")),
        false => cell.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn waveforms_have_units_in_their_headings() {
        let columns = [
            Column {
                name: "time",
                unit: "s",
                values: &[0.0, 1e-6, 0.1 + 0.2],
            },
            Column {
                name: "voltage at drive",
                unit: "V",
                values: &[24.0, f64::NAN, -1.5e-9],
            },
            Column {
                name: "saturation of k1_coil",
                unit: "",
                values: &[0.5],
            },
        ];
        assert_eq!(
            numbers(&columns),
            "time [s],voltage at drive [V],saturation of k1_coil\r\n0,24,0.5\r\n1e-6,,\r\n0.30000000000000004,-1.5e-9,\r\n"
        );
        assert_eq!(numbers(&[]), "\r\n");
    }

    #[test]
    fn every_number_reads_back_as_itself() {
        let mut value = 1.234_567_890_123_456_7e-300;
        while value < 1e300 {
            for signed in [value, -value] {
                assert_eq!(
                    number(signed).parse::<f64>().expect("a number").to_bits(),
                    signed.to_bits()
                );
            }
            value *= 7.3;
        }
    }

    #[test]
    fn cells_are_quoted_and_formulas_disarmed() {
        let rows = vec![vec![
            "a,b".to_string(),
            "say \"no\"".to_string(),
            "=1+1".to_string(),
            "-5".to_string(),
        ]];
        assert_eq!(
            texts(&["+sum", "two\nlines", "@x", "-minus"], &rows),
            "'+sum,\"two\nlines\",'@x,'-minus\r\n\"a,b\",\"say \"\"no\"\"\",'=1+1,-5\r\n"
        );
    }
}
