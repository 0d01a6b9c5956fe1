//! Objects of the JSON output: fields in the order they are written, SI numbers, null for what does not exist.

use serde_json::{Map, Value};

/// An object under construction; fields keep their order.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Object {
    fields: Map<String, Value>,
}

impl Object {
    /// An object without fields.
    pub fn new() -> Self {
        Object::default()
    }

    /// Adds a field of any value.
    pub fn value(mut self, name: &str, value: impl Into<Value>) -> Self {
        self.fields.insert(name.to_string(), value.into());
        self
    }

    /// Adds a number in SI units; null where it is not finite.
    pub fn number(self, name: &str, value: f64) -> Self {
        self.value(name, number(value))
    }

    /// Adds a number that may not exist.
    pub fn optional(self, name: &str, value: Option<f64>) -> Self {
        self.value(name, value.map_or(Value::Null, number))
    }

    /// Adds a text, null where there is none.
    pub fn text(self, name: &str, text: Option<&str>) -> Self {
        self.value(name, text.map_or(Value::Null, Value::from))
    }

    /// Adds a list.
    pub fn list(self, name: &str, items: impl IntoIterator<Item = impl Into<Value>>) -> Self {
        self.value(
            name,
            items.into_iter().map(Into::into).collect::<Vec<Value>>(),
        )
    }

    /// Adds an object whose fields are these, in this order.
    pub fn table(
        self,
        name: &str,
        rows: impl IntoIterator<Item = (impl Into<String>, impl Into<Value>)>,
    ) -> Self {
        self.value(name, table(rows))
    }
}

impl From<Object> for Value {
    fn from(object: Object) -> Value {
        Value::Object(object.fields)
    }
}

/// A number in SI units; null where it is not finite.
pub fn number(value: f64) -> Value {
    serde_json::Number::from_f64(value).map_or(Value::Null, Value::Number)
}

/// An object from pairs, in their order.
pub fn table(rows: impl IntoIterator<Item = (impl Into<String>, impl Into<Value>)>) -> Value {
    Value::Object(
        rows.into_iter()
            .map(|(name, value)| (name.into(), value.into()))
            .collect(),
    )
}

/// The text that goes to standard output: indented by two, one newline at the end.
pub fn text(value: &Value) -> String {
    format!("{value:#}\n")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fields_keep_their_order_and_numbers_their_value() {
        let limit = Object::new()
            .number("value", 24.7)
            .number("bound", 60.0)
            .optional("margin", None)
            .value("holds", true);
        let whole = Object::new()
            .text("title", Some("a \"relay\"\n"))
            .table(
                "limits",
                [
                    ("zeta", Value::from(limit.clone())),
                    ("alpha", limit.into()),
                ],
            )
            .list("cautions", ["one"])
            .number("error", f64::NAN)
            .number("long", 0.1 + 0.2);
        let text = Value::from(whole).to_string();
        assert_eq!(
            text,
            concat!(
                r#"{"title":"a \"relay\"\n","limits":{"#,
                r#""zeta":{"value":24.7,"bound":60.0,"margin":null,"holds":true},"#,
                r#""alpha":{"value":24.7,"bound":60.0,"margin":null,"holds":true}},"#,
                r#""cautions":["one"],"error":null,"long":0.30000000000000004}"#
            )
        );
    }

    #[test]
    fn what_is_not_finite_is_null() {
        for value in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
            assert_eq!(number(value), Value::Null);
        }
    }

    #[test]
    fn the_output_is_one_document_with_a_newline() {
        let shown = text(&Object::new().number("a", 1.0).into());
        assert!(shown.ends_with("}\n"));
        assert_eq!(
            serde_json::from_str::<Value>(&shown).expect("valid"),
            table([("a", 1.0)])
        );
    }
}
