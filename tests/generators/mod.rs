//! Circuits made to order, with the truth about them, for tests that need to
//! know what a netlist contains before anything reads it.
//!
//! Nothing here uses the crate under test: a generated circuit is an outside
//! witness. A [`Circuit`] can be evaluated on 64 patterns at a time, written as
//! BLIF ([`Circuit::blif`]) and turned into an AND/inverter graph that is
//! written as AIGER ([`Aig::aag`], [`Aig::aig`]). A [`Generated`] carries one
//! [`Truth`] per arithmetic word in it, which integer arithmetic can check.
//!
//! Use from an integration test with `mod generators;`, from elsewhere with
//! `#[path = "…/generators/mod.rs"] mod generators;`.

// Every test file uses its own part of this module.
#![allow(dead_code, unused_imports)]

mod aig;
mod arrays;
mod blif;
mod cells;
mod circuit;
mod comparators;
pub mod corpus;
mod disguise;
mod embedding;
mod fast;
pub mod gauge;
mod hierarchy;
mod large;
mod mapper;
pub mod negatives;
mod prefix;
mod random;
mod reshape;
mod rows;
mod table;
mod truth;
pub mod witness;
mod words;

pub use aig::Aig;
pub use arrays::{Product, Reduction, multiplier, squarer};
pub use cells::{Addend, Carry, Cell};
pub use circuit::{Circuit, Function, Net, Register};
pub use comparators::{Comparator, Comparison, Relation, Shape};
pub use disguise::{disguise, rename, shuffle_gates, shuffle_ports};
pub use embedding::{
    Extension, accumulator, adder_subtractor, counter, gated_operands, selected_sums,
    series_adders, with_overflow,
};
pub use hierarchy::{Hierarchy, Item, Model, adder_hierarchy};
pub use large::{replicated, series};
pub use mapper::{Cells, mapped};
pub use random::Random;
pub use reshape::{complemented, in_blocks, reassociated};
pub use rows::{Oddity, both_sums, cut_short, divider, maximum, odd_word, square_root};
pub use truth::{Generated, Kind, Truth};
pub use words::{Architecture, Word};
