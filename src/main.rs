//! The command line of coilbreak.
fn main() {}
