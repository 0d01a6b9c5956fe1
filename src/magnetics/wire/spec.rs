//! The keys of a wire.

use super::{Gauge, GaugeFault, Wire};
use crate::magnetics::library::told_already;
use crate::netlist::{Fields, Key, Takes, Value, Values};
use crate::units::LENGTH;

/// Keys of the mapping behind `wire`.
pub const WIRE_KEYS: &[Key] = &[
    Key::optional(
        "gauge",
        Takes::Text,
        "American wire gauge, such as `32 AWG`",
    ),
    Key::optional(
        "diameter",
        Takes::Quantity(LENGTH),
        "diameter of the bare round wire",
    ),
    Key::optional(
        "litz",
        Takes::Map(LITZ_KEYS),
        "a bundle of insulated strands",
    ),
    Key::optional("foil", Takes::Map(FOIL_KEYS), "foil, one turn per layer"),
    Key::optional(
        "outer_diameter",
        Takes::Quantity(LENGTH),
        "diameter with insulation, instead of that of enamel grade 1",
    ),
];

const LITZ_KEYS: &[Key] = &[
    Key::required("strands", Takes::Count, "number of strands"),
    Key::required(
        "strand_diameter",
        Takes::Quantity(LENGTH),
        "diameter of a bare strand",
    ),
];

const FOIL_KEYS: &[Key] = &[
    Key::required(
        "thickness",
        Takes::Quantity(LENGTH),
        "thickness of the foil",
    ),
    Key::required(
        "width",
        Takes::Quantity(LENGTH),
        "width of the foil, along the axis",
    ),
];

const FORMS: [&str; 4] = ["gauge", "diameter", "litz", "foil"];

/// A wire as written.
#[derive(Clone, Copy, Debug)]
pub struct WireSpec {
    form: Form,
    outer: Option<Value>,
}

#[derive(Clone, Copy, Debug)]
enum Form {
    Gauge(Gauge),
    Round(Value),
    Litz(usize, Value),
    Foil(Value, Value),
}

impl WireSpec {
    /// Reads the mapping behind `wire` ([`WIRE_KEYS`]) and finishes it.
    pub fn read(fields: &Fields<'_>) -> Option<Self> {
        fields.finish();
        let written: Vec<&str> = FORMS.into_iter().filter(|form| fields.has(form)).collect();
        let outer = fields.positive("outer_diameter");
        let form = match written[..] {
            ["gauge"] => Form::Gauge(gauge(fields)?),
            ["diameter"] => Form::Round(fields.positive("diameter")?),
            ["litz"] => litz(&fields.map("litz")?)?,
            ["foil"] => foil(&fields.map("foil")?)?,
            _ => {
                unclear(fields, &written);
                return None;
            }
        };
        let spec = WireSpec { form, outer };
        spec.check_outer(fields)?;
        Some(spec)
    }

    /// The wire with numbers.
    pub fn derive(&self, values: &Values) -> Wire {
        let outer = self.outer.map(|outer| values[outer]);
        match self.form {
            Form::Gauge(gauge) => Wire::round(gauge.diameter(), outer),
            Form::Round(diameter) => Wire::round(values[diameter], outer),
            Form::Litz(strands, diameter) => Wire::litz(strands, values[diameter], outer),
            Form::Foil(thickness, width) => Wire::foil(values[thickness], values[width]),
        }
    }

    fn check_outer(&self, fields: &Fields<'_>) -> Option<()> {
        let Some(outer) = self.outer else {
            return Some(());
        };
        let nominal = fields.reader().parameters.borrow().nominal();
        let bare = match self.form {
            Form::Gauge(gauge) => gauge.diameter(),
            Form::Round(diameter) => nominal[diameter],
            Form::Litz(strands, diameter) => nominal[diameter] * (strands as f64).sqrt(),
            Form::Foil(..) => {
                let headline = "a foil has no `outer_diameter`";
                fields.error(
                    "outer_diameter",
                    "conflicting-keys",
                    headline,
                    "not with `foil`",
                    None,
                );
                return None;
            }
        };
        if nominal[outer] >= bare {
            return Some(());
        }
        let headline = "outer_diameter must not be below that of the bare copper";
        fields.error(
            "outer_diameter",
            "out-of-range",
            headline,
            "smaller than its copper",
            None,
        );
        None
    }
}

fn gauge(fields: &Fields<'_>) -> Option<Gauge> {
    let text = fields.text("gauge")?;
    let (headline, label) = match Gauge::parse(&text.text) {
        Ok(gauge) => return Some(gauge),
        Err(GaugeFault::NotAGauge) => ("gauge takes a wire gauge such as `32 AWG`", "not a gauge"),
        Err(GaugeFault::OutOfRange) => {
            ("gauge must be between 4/0 AWG and 56 AWG", "no such gauge")
        }
    };
    fields.error(
        "gauge",
        "bad-number",
        headline,
        label,
        Some("gauge: 32 AWG"),
    );
    None
}

fn litz(fields: &Fields<'_>) -> Option<Form> {
    fields.finish();
    fields
        .count("strands")
        .zip(fields.positive("strand_diameter"))
        .map(|(count, value)| Form::Litz(count, value))
}

fn foil(fields: &Fields<'_>) -> Option<Form> {
    fields.finish();
    fields
        .positive("thickness")
        .zip(fields.positive("width"))
        .map(|(thickness, width)| Form::Foil(thickness, width))
}

fn unclear(fields: &Fields<'_>, written: &[&str]) {
    if written.is_empty() && told_already(fields, &[WIRE_KEYS]) {
        return;
    }
    let diagnostic = if written.is_empty() {
        crate::diag::Diagnostic::error(
            "missing-key",
            format!("{} needs one of {}", fields.path(), FORMS.join(", ")),
        )
        .at(fields.head(), "no wire told")
    } else {
        let headline = format!(
            "{} takes one of {}, got {}",
            fields.path(),
            FORMS.join(", "),
            written.join(" and ")
        );
        crate::diag::Diagnostic::error("conflicting-keys", headline)
            .at(fields.head(), "more than one wire told")
    };
    fields
        .reader()
        .sink
        .report(diagnostic.help("wire: {gauge: 32 AWG}"));
}
