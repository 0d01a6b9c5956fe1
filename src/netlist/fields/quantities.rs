//! Single quantities of a mapping, and the range that they must lie in.

use super::{Fields, Written};
use crate::netlist::parameters::Value;
use crate::units::{Amount, Kind, engineering, parse_amount};

impl Fields<'_> {
    /// A quantity as a parameter with its path.
    pub fn value(&self, key: &str) -> Option<Value> {
        let kind = self.kind(key);
        match self.written(key) {
            Written::Node(node, path) => self.reader.value(node, &path, kind),
            Written::Default(text, path) => {
                Some(
                    self.reader
                        .register(&path, kind, self.default(key, text, kind), None),
                )
            }
            Written::Absent => None,
        }
    }

    /// A quantity without a parameter: for what no study varies.
    pub fn amount(&self, key: &str) -> Option<Amount> {
        let kind = self.kind(key);
        match self.written(key) {
            Written::Node(node, _) => self.reader.amount(node, key, kind),
            Written::Default(text, _) => Some(self.default(key, text, kind)),
            Written::Absent => None,
        }
    }

    fn default(&self, key: &str, text: &str, kind: Kind) -> Amount {
        parse_amount(text, kind)
            .unwrap_or_else(|error| panic!("the default of `{key}` is written wrongly: {error}"))
    }

    /// A quantity whose whole spread must lie above zero.
    pub fn positive(&self, key: &str) -> Option<Value> {
        self.checked(key, "above zero", |amount| amount.low > 0.0)
    }

    /// A quantity whose whole spread must not reach below zero.
    pub fn non_negative(&self, key: &str) -> Option<Value> {
        self.checked(key, "zero or more", |amount| amount.low >= 0.0)
    }

    /// A quantity whose whole spread must meet a condition, told in words: `duty must be between 0 and 1`.
    pub fn checked(
        &self,
        key: &str,
        must_be: &str,
        holds: impl Fn(&Amount) -> bool,
    ) -> Option<Value> {
        let amount = self.amount(key)?;
        if holds(&amount) {
            return self.value(key);
        }
        self.out_of_range(key, must_be, &amount);
        None
    }

    fn out_of_range(&self, key: &str, must_be: &str, amount: &Amount) {
        let kind = self.kind(key);
        let got = engineering(amount.nominal, kind, 6);
        let label = if amount.low < amount.high {
            format!(
                "from {} to {}",
                engineering(amount.low, kind, 6),
                engineering(amount.high, kind, 6)
            )
        } else {
            format!("{got} is not {must_be}")
        };
        let headline = format!("{key} must be {must_be}, got {got}");
        let headline = if amount.low < amount.high {
            format!("{headline} with its spread")
        } else {
            headline
        };
        self.error(key, "out-of-range", headline, label, None);
    }
}
