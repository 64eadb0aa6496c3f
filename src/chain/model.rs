//! What a recognised chain is, for every later stage.

use crate::netlist::{Bit, Signal};

/// What a chain computes.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Kind {
    /// `a + b + carry-in`.
    Adder,
    /// `a - b`, as `a + ~b + carry-in`.
    Subtractor,
    /// `a + carry-in`.
    Incrementer,
    /// `a - 1 + carry-in`.
    Decrementer,
    /// `a + (b ⊕ mode) + carry-in`: adds or subtracts as the mode says.
    AdderSubtractor,
    /// Compares `a` with `b`; only carries, no sums.
    Comparator,
}

impl Kind {
    /// The word used in records and reports.
    pub fn word(self) -> &'static str {
        match self {
            Self::Adder => "adder",
            Self::Subtractor => "subtractor",
            Self::Incrementer => "incrementer",
            Self::Decrementer => "decrementer",
            Self::AdderSubtractor => "adder-subtractor",
            Self::Comparator => "comparator",
        }
    }
}

/// Whether the port the carry leaves by shows a carry or a borrow.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum CarryForm {
    /// A carry.
    Carry,
    /// A borrow: 1 when `a < b`.
    Borrow,
}

/// How a chain is built today.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum BuiltAs {
    /// Every carry is made from the carry just below it.
    Ripple,
    /// Carries are written out over their positions, at once or in groups.
    Lookahead,
    /// A ripple whose carries may pass whole blocks.
    Skip,
    /// Blocks are computed for both carries and chosen by the real one.
    Select,
    /// Blocks are computed without a carry; what comes in is passed on by their
    /// propagates.
    Increment,
    /// Both results of every block are chosen among those of its halves.
    ConditionalSum,
    /// Spans are joined in a network, each carry from spans that meet.
    Prefix,
    /// Only the last carry is made, from spans joined in a tree.
    Tree,
    /// The carries run inside cells declared carry cells.
    CarryCell,
    /// None of these, or not understood.
    Mixed,
}

impl BuiltAs {
    /// The word used in records and reports.
    pub fn word(self) -> &'static str {
        match self {
            Self::Ripple => "ripple",
            Self::Lookahead => "lookahead",
            Self::Skip => "skip",
            Self::Select => "select",
            Self::Increment => "increment",
            Self::ConditionalSum => "conditional-sum",
            Self::Prefix => "prefix",
            Self::Tree => "tree",
            Self::CarryCell => "carry-cell",
            Self::Mixed => "mixed",
        }
    }
}

/// The place of a prefix network of valency 2 in the taxonomy of D. Harris ("A
/// Taxonomy of Parallel Prefix Networks", Asilomar 2003), read off the network.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Taxonomy {
    /// Levels beyond the logarithm of the number of positions.
    pub extra_levels: usize,
    /// The logarithm of the most nodes that read one node in one row.
    pub fan_out: usize,
    /// The logarithm of the most wires side by side in one row.
    pub tracks: usize,
}

/// More about how a chain is built, where it was understood.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub struct Construction {
    /// The published scheme whose spans are most like it.
    pub nearest: Option<&'static str>,
    /// Positions of one group or block.
    pub group: Option<usize>,
    /// Nodes of the carry network on the longest way to a result.
    pub levels: Option<usize>,
    /// Nodes of the carry network.
    pub cells: Option<usize>,
    /// Its place among prefix networks.
    pub taxonomy: Option<Taxonomy>,
    /// A few words more.
    pub detail: String,
}

impl Construction {
    /// What is known of a chain inside carry cells.
    pub(super) fn of_carry_cells() -> Self {
        Self {
            detail: "its carries run inside cells declared carry cells, with their declared delays"
                .to_owned(),
            ..Self::default()
        }
    }
}

/// One bit position of a chain, least significant first.
///
/// With `c` the carry into the position (the chain's carry-in at position 0),
/// it is proven that every signal of `sums` equals `a ⊕ b ⊕ c` and every signal
/// of `carries` equals the majority of `a`, `b` and `c`. Both `a` and `b` are
/// what enters the *addition*: of a subtractor, `b` is the inverted subtrahend;
/// of an incrementer `b` is constant 0, of a decrementer constant 1; of a
/// comparator `b` is the complement of the second operand, and in the top
/// position of a signed one both are complemented once more. Only of an
/// adder-subtractor is `b` what stands before the exclusive or with the mode.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Position {
    /// First addend.
    pub a: Bit,
    /// Second addend.
    pub b: Bit,
    /// Every net proven equal to the sum, in either polarity; the preferred
    /// name first. Empty only where a chain has no sums.
    pub sums: Vec<Signal>,
    /// Every net proven equal to the carry out of this position, in either
    /// polarity; empty when no net carries it.
    pub carries: Vec<Signal>,
}

/// How the first operand of a comparator stands to the second when its result
/// is 1.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Relation {
    /// `a < b`.
    Less,
    /// `a <= b`.
    LessOrEqual,
    /// `a > b`.
    Greater,
    /// `a >= b`.
    GreaterOrEqual,
}

impl Relation {
    /// The word used in records and reports.
    pub fn word(self) -> &'static str {
        match self {
            Self::Less => "less",
            Self::LessOrEqual => "less-or-equal",
            Self::Greater => "greater",
            Self::GreaterOrEqual => "greater-or-equal",
        }
    }
}

/// What a comparator tells.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Comparison {
    /// The net that tells it: the carry out of the last position, in the
    /// polarity in which a port or register shows it.
    pub result: Signal,
    /// What it tells. With a carry-in that is a net, the carry-in counts with
    /// the first operand.
    pub relation: Relation,
    /// Whether the operands are read as two's complement.
    pub signed: bool,
}

/// A proven carry chain.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Chain {
    /// What it computes.
    pub kind: Kind,
    /// The positions, least significant first.
    pub positions: Vec<Position>,
    /// The carry into position 0, in the polarity of the addition.
    pub carry_in: Bit,
    /// Whether something outside the chain reads the carry out of the last
    /// position; its nets are the last position's `carries`.
    pub has_carry_out: bool,
    /// Carry or borrow at the carry-out.
    pub carry_form: CarryForm,
    /// How it is built today.
    pub built_as: BuiltAs,
    /// More about that.
    pub construction: Construction,
    /// What complements every `b` of an adder-subtractor.
    pub mode: Option<Signal>,
    /// What a comparator tells; of the others nothing.
    pub comparison: Option<Comparison>,
}
