//! The audit: one record per netlist and the rules its findings refer to.

pub mod findings;
pub mod record;
pub mod words;
