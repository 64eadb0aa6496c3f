//! The netlist: a plain, compact value that every later stage reads.
//!
//! Struct of arrays with 32-bit ids; the fan-ins of all gates lie in one flat
//! array, functions are interned, names are interned and optional. A netlist
//! knows no file format and no delay; it is built by [`NetlistBuilder`] and not
//! changed afterwards.
//!
//! Invariants: every id held by a netlist is in range; the number of fan-ins of
//! a gate equals the inputs of its function; a net with [`Driver::Many`] is
//! listed in [`Netlist::contended`] with every one of its drivers. What a user
//! asserts about a block makes *another* netlist ([`Assumptions::apply`]); the one
//! that was read stays as it is.

mod apply;
mod asserted;
pub mod assume;
mod builder;
pub mod bus;
pub mod carry_cell;
pub mod cell;
mod declared;
mod delay_table;
pub mod function;
mod graph;
pub mod health;
pub mod histogram;
mod id;
mod model;
mod names;
mod passage;
mod pattern;
mod price;
mod product;
mod tie;
mod times;
mod transparent;

pub use asserted::{Asserted, EndPoint, Pairing};
pub use assume::Assumptions;
pub use builder::{NetlistBuilder, TooLarge};
pub use declared::Declared;
pub use delay_table::{CellDelays, DelayTable, Entry};
pub use function::{CellPins, Cover, Function, Shape, TruthTable};
pub use graph::{NetGraph, Readers, Topology};
pub use id::{BoxId, FunctionId, GateId, NetId, RegisterId, ScopeId};
pub use model::{
    Bit, BlackBox, BoxKind, Contention, Driver, Initial, Netlist, Output, Property, PropertyKind,
    Register, Signal, Trigger,
};
pub use names::{NameId, Names};
pub use pattern::Pattern;
pub use price::{Curve, PinPrice};
pub use times::FileTimes;
