//! What a user asserts about a block, and the netlist under it.
//!
//! Assumptions are plain data; [`Assumptions::apply`] makes another netlist in
//! which tied nets are constants and the starts and ends of paths carry what was
//! asserted of them. Every later stage reads that netlist and needs to know
//! nothing more.
//!
//! Names are matched by [`Pattern`]: a net by its full name; a start by the name
//! of its net; an end by the output port, by the register's output, by the name of
//! a box's model, or by a cut net. A pattern that matches nothing is refused, since
//! the assertion then holds for a block other than the one meant.

use super::carry_cell::CarryCell;
use super::model::Netlist;
use super::pattern::Pattern;
use std::collections::BTreeMap;

/// Most sets of starts, and of ends: each costs a pass over the netlist.
pub const MOST_SETS: usize = 16;

/// A net with a fixed value.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Tied {
    /// Which nets.
    pub nets: Pattern,
    /// Their value.
    pub value: bool,
    /// Why.
    pub why: String,
}

/// Paths that never count.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct NotAPath {
    /// Which.
    pub paths: Paths,
    /// Why.
    pub why: String,
}

/// Some paths.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Paths {
    /// Every path that passes a net.
    Through(Pattern),
    /// The paths between two sets.
    Between {
        /// Where they start; everywhere when not given.
        from: Option<Pattern>,
        /// Where they end; everywhere when not given.
        to: Option<Pattern>,
    },
    /// Of the paths between two sets those that pass a net.
    Part {
        /// Where they start; everywhere when not given.
        from: Option<Pattern>,
        /// What they pass.
        through: Pattern,
        /// Where they end; everywhere when not given.
        to: Option<Pattern>,
    },
}

impl Paths {
    pub(super) fn from(&self) -> Option<&Pattern> {
        match self {
            Self::Through(_) => None,
            Self::Between { from, .. } | Self::Part { from, .. } => from.as_ref(),
        }
    }

    pub(super) fn to(&self) -> Option<&Pattern> {
        match self {
            Self::Through(_) => None,
            Self::Between { to, .. } | Self::Part { to, .. } => to.as_ref(),
        }
    }
}

/// Paths that may take several cycles.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Cycles {
    /// Where they start; everywhere when not given.
    pub from: Option<Pattern>,
    /// Where they end; everywhere when not given.
    pub to: Option<Pattern>,
    /// How many.
    pub cycles: u32,
    /// Why.
    pub why: String,
}

/// When ports are ready, or must be.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct PortTime {
    /// Which ports.
    pub ports: Pattern,
    /// When, in whole units of the delay model.
    pub at: i32,
    /// Why.
    pub why: String,
}

/// How long a path takes through a box.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct BoxDelay {
    /// Which boxes, by the name of their model.
    pub name: Pattern,
    /// From these input pins.
    pub from: Pattern,
    /// To these output pins.
    pub to: Pattern,
    /// How long, in whole units of the delay model.
    pub delay: i32,
    /// Why.
    pub why: String,
}

/// Everything asserted.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Assumptions {
    /// Nets with a fixed value.
    pub tied: Vec<Tied>,
    /// Paths that never count.
    pub not_a_path: Vec<NotAPath>,
    /// Paths that may take several cycles.
    pub cycles: Vec<Cycles>,
    /// When inputs are ready.
    pub arrival: Vec<PortTime>,
    /// When outputs must be.
    pub required: Vec<PortTime>,
    /// How long paths take through boxes.
    pub box_delay: Vec<BoxDelay>,
    /// Cells whose delays are declared; see [`Cells::declare_carry`], which must
    /// have put them in place.
    ///
    /// [`Cells::declare_carry`]: super::cell::Cells::declare_carry
    pub carry_cells: Vec<CarryCell>,
}

/// A pattern of an assumption.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Item {
    /// The net of a tie.
    Tied(usize),
    /// Where paths that never count start.
    NotFrom(usize),
    /// What they pass.
    NotThrough(usize),
    /// Where they end.
    NotTo(usize),
    /// Where paths of several cycles start.
    CyclesFrom(usize),
    /// Where they end.
    CyclesTo(usize),
    /// Inputs with an arrival time.
    Arrival(usize),
    /// Outputs with a required time.
    Required(usize),
    /// Boxes with a delay.
    BoxName(usize),
    /// The inputs it counts from.
    BoxFrom(usize),
    /// The outputs it counts to.
    BoxTo(usize),
    /// Carry cells.
    CarryCell(usize),
    /// The inputs that one of their delays counts from.
    CarryFrom(usize, usize),
    /// The outputs it counts to.
    CarryTo(usize, usize),
}

/// Why assumptions do not fit a netlist.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
pub enum Misfit {
    /// A pattern matches nothing.
    #[error("expected {what}, found none that `{pattern}` matches")]
    NoMatch {
        /// Which pattern.
        item: Item,
        /// As written.
        pattern: String,
        /// What was looked for.
        what: &'static str,
    },
    /// A net is tied to both values.
    #[error("expected one value for the net {net}, found it tied to 0 and to 1")]
    BothValues {
        /// The later tie.
        item: Item,
        /// The net.
        net: String,
    },
    /// A net with several drivers is tied.
    #[error("expected a net with one driver, found {net}, which has several")]
    Contended {
        /// The tie.
        item: Item,
        /// The net.
        net: String,
    },
    /// A pair of pins of a carry cell has no delay.
    #[error("expected a delay from {from} to {to} of the carry cell {cell}, found none")]
    NoDelay {
        /// The declaration.
        item: Item,
        /// The cell.
        cell: String,
        /// The input.
        from: String,
        /// The output.
        to: String,
    },
    /// A carry cell holds what a delay from pin to pin does not fit.
    #[error("expected a carry cell of gates alone, found {cell}, which stores something or is cut")]
    NotPlain {
        /// The declaration.
        item: Item,
        /// The cell.
        cell: String,
    },
    /// The patterns tell too many sets apart.
    #[error("expected patterns that tell at most {MOST_SETS} sets of {what} apart, found more")]
    TooManySets {
        /// One of the patterns.
        item: Item,
        /// Starts or ends.
        what: &'static str,
    },
}

impl Misfit {
    /// The pattern concerned.
    pub fn item(&self) -> Item {
        match self {
            Self::NoMatch { item, .. }
            | Self::BothValues { item, .. }
            | Self::Contended { item, .. }
            | Self::NoDelay { item, .. }
            | Self::NotPlain { item, .. }
            | Self::TooManySets { item, .. } => *item,
        }
    }
}

/// A netlist under assumptions.
pub struct Assumed {
    /// The netlist; ids, gates and ports are those of the one read, and at most
    /// one net is new.
    pub netlist: Netlist,
    /// How many places each pattern matches.
    pub matched: BTreeMap<Item, usize>,
    /// By required time, the output ports it names.
    pub required: Vec<Vec<u32>>,
}
