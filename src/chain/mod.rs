//! Carry chains: recognised, proven, described.
//!
//! In comes a netlist with its topology; out comes a list of [`Chain`]s, each a
//! theorem: its sums and carries are the stated functions of its operands for
//! every value of the free nets (inputs, register outputs, box outputs, cuts).
//! Signatures nominate, the prover decides, and nothing is reported because it
//! looks like an adder.
//!
//! `entries` → `links` → `candidate` → `verify` → `trim` → `kinds` and `built_as` →
//! `collect`; then `carry_only` for carries without sums; `find` runs them.

mod built_as;
mod candidate;
mod carry_cells;
mod carry_only;
mod collect;
mod copies;
mod entries;
mod find;
mod kinds;
mod label;
mod links;
mod model;
mod modes;
mod trim;
mod twins;
mod verify;

pub use find::{Found, Options, Unproven, find};
pub use model::{
    BuiltAs, CarryForm, Chain, Comparison, Construction, Kind, Position, Relation, Taxonomy,
};
