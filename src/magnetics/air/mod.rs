//! Coils in air: circles, current sheets, thick sections and layered turns. Plain numbers in SI units.

pub mod loops;
pub mod section;
pub mod sheet;
pub mod turns;
