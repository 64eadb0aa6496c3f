//! Carry chains: recognised, proven, described.
//!
//! In comes a netlist with its topology; out comes a list of [`Chain`]s, each a
//! theorem: its sums and carries are the stated functions of its operands for
//! every value of the free nets (inputs, register outputs, box outputs, cuts).

mod model;

pub use model::{BuiltAs, CarryForm, Chain, Kind, Position};
