//! The carrywise command.

fn main() {}
