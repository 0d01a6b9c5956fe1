//! From a chart to shapes on a page: where every line and text stands, so that nothing overlaps and nothing is cut.
//!
//! In: a [`Chart`](super::chart::Chart), a size, a measure of text. Out: a [`Drawing`] in pixels, x to the right and y
//! down. It knows no plotting library; `plots` paints what stands here.

mod bars;
mod callouts;
mod clip;
mod ink;
mod margin_labels;
mod page;
mod panel;
mod range;
mod ruler;
mod shapes;
mod spread;
mod stack;
mod text;
mod traces;

pub use ink::Ink;
pub use page::lay_out;
pub use shapes::{Anchor, Drawing, Shape, Text};
pub use text::{Font, Measure};

#[cfg(test)]
mod tests;
