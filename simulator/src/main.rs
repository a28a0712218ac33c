//! `humward-sim`: synthetic pump signals with known truth.

fn main() {}
