//! Coils as `coil` shows them, for people and programs. A new figure of a coil has its place in each of the three: a part of
//! the text's page, a field of the object, a panel of the chart.

pub mod charts;
pub mod copper;
pub mod json;
pub mod text;
