//! A second, independent witness: reduced ordered binary decision diagrams
//! (R. E. Bryant, "Graph-Based Algorithms for Boolean Function Manipulation",
//! IEEE Transactions on Computers C-35, 1986; library: biodivine-lib-bdd).
//!
//! The diagrams of a chain's nets are built from its operands upwards, operand
//! bits interleaved, and compared with the diagrams of what they are claimed to
//! be; equal functions have equal diagrams. Nothing is shared with the solver but
//! the subject graph. Where diagrams grow past the limit the witness is silent.

use crate::subject::{Literal, NodeId, NodeKind, Subject};
use biodivine_lib_bdd::{Bdd, BddVariableSet, op_function};
use rustc_hash::{FxHashMap, FxHashSet};

/// Nodes of the subject graph one witness looks at.
pub const MOST_NODES: usize = 4000;
/// Nodes of one diagram.
const LARGEST_DIAGRAM: usize = 4000;
/// Nodes of all diagrams of one witness.
const ALL_DIAGRAMS: usize = 1_000_000;

/// What a sum and a carry of one position are claimed to be: the exclusive or
/// and the majority of `a`, `b` and the carry below.
#[derive(Clone, Debug)]
pub struct Claim<'a> {
    /// First addend.
    pub a: Literal,
    /// Second addend.
    pub b: Literal,
    /// What is claimed to be the sum.
    pub sums: &'a [Literal],
    /// What is claimed to be the carry out.
    pub carries: &'a [Literal],
}

/// What the witness says.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Witness {
    /// Every claim holds.
    Agrees,
    /// Some claim is false.
    Contradicts,
    /// The diagrams or the cone are too large to tell.
    Silent,
}

/// Checks the claims of one chain, lowest position first.
pub fn witness(subject: &Subject, carry_in: Literal, claims: &[Claim<'_>]) -> Witness {
    let is_inner =
        |node: NodeId| matches!(subject.kind(node), NodeKind::And(..) | NodeKind::Xor(..));
    let operands: Vec<NodeId> = [carry_in.node()]
        .into_iter()
        .chain(
            claims
                .iter()
                .flat_map(|claim| [claim.a.node(), claim.b.node()]),
        )
        .collect();
    // Inner operands stand for themselves first. What fails then may still hold
    // for the values they really take.
    let inner = operands.iter().copied().filter(|&node| is_inner(node));
    let inner: FxHashSet<NodeId> = inner.collect();
    let said = Diagrams::of(subject, &operands, &inner, claims)
        .map_or(Witness::Silent, |diagrams| diagrams.check(carry_in, claims));
    if said != Witness::Contradicts || inner.is_empty() {
        return said;
    }
    Diagrams::of(subject, &operands, &FxHashSet::default(), claims)
        .map_or(Witness::Silent, |diagrams| diagrams.check(carry_in, claims))
}

/// The diagrams of every node between the operands and the claims.
struct Diagrams {
    of_node: FxHashMap<NodeId, Bdd>,
    constant: Bdd,
    spent: usize,
}

impl Diagrams {
    fn of(
        subject: &Subject,
        operands: &[NodeId],
        cuts: &FxHashSet<NodeId>,
        claims: &[Claim<'_>],
    ) -> Option<Self> {
        let mut seen: FxHashSet<NodeId> = FxHashSet::default();
        let mut variables: Vec<NodeId> = Vec::new();
        let mut cone: Vec<NodeId> = Vec::new();
        let claimed = claims
            .iter()
            .flat_map(|claim| claim.sums.iter().chain(claim.carries));
        // Operands first, so that their bits lie side by side in the order.
        let mut stack: Vec<NodeId> = claimed.map(|literal| literal.node()).collect();
        stack.extend(operands.iter().rev());
        while let Some(node) = stack.pop() {
            if node == NodeId::FALSE || !seen.insert(node) {
                continue;
            }
            if seen.len() > MOST_NODES {
                return None;
            }
            match subject.kind(node) {
                _ if cuts.contains(&node) => variables.push(node),
                NodeKind::False | NodeKind::Free(_) => variables.push(node),
                NodeKind::And(x, y) => {
                    cone.push(node);
                    stack.extend([x.node(), y.node()]);
                }
                NodeKind::Xor(x, y) => {
                    cone.push(node);
                    stack.extend([x, y]);
                }
            }
        }
        let set = BddVariableSet::new_anonymous(u16::try_from(variables.len()).ok()?);
        let mut diagrams = Self {
            of_node: FxHashMap::default(),
            constant: set.mk_false(),
            spent: 0,
        };
        for (&node, variable) in variables.iter().zip(set.variables()) {
            diagrams.of_node.insert(node, set.mk_var(variable));
        }
        // Numbers ascend from fan-ins to readers.
        cone.sort_unstable();
        for node in cone {
            let diagram = match subject.kind(node) {
                NodeKind::And(x, y) => {
                    let (x, y) = (diagrams.literal(x), diagrams.literal(y));
                    diagrams.combine(&x, &y, op_function::and)?
                }
                NodeKind::Xor(x, y) => {
                    let (x, y) = (diagrams.literal(x.literal()), diagrams.literal(y.literal()));
                    diagrams.combine(&x, &y, op_function::xor)?
                }
                NodeKind::False | NodeKind::Free(_) => continue,
            };
            diagrams.of_node.insert(node, diagram);
        }
        Some(diagrams)
    }

    fn literal(&self, literal: Literal) -> Bdd {
        let diagram = if literal.node() == NodeId::FALSE {
            &self.constant
        } else {
            &self.of_node[&literal.node()]
        };
        if literal.is_inverted() {
            diagram.not()
        } else {
            diagram.clone()
        }
    }

    fn combine(
        &mut self,
        x: &Bdd,
        y: &Bdd,
        operation: fn(Option<bool>, Option<bool>) -> Option<bool>,
    ) -> Option<Bdd> {
        let made = Bdd::binary_op_with_limit(LARGEST_DIAGRAM, x, y, operation)?;
        self.spent += made.size();
        (self.spent <= ALL_DIAGRAMS).then_some(made)
    }

    fn check(mut self, carry_in: Literal, claims: &[Claim<'_>]) -> Witness {
        let mut carry = self.literal(carry_in);
        for claim in claims {
            let Some((sum, out)) = self.added(claim, &carry) else {
                return Witness::Silent;
            };
            let holds = |claimed: &[Literal], function: &Bdd| {
                claimed.iter().all(|&each| self.literal(each) == *function)
            };
            if !holds(claim.sums, &sum) || !holds(claim.carries, &out) {
                return Witness::Contradicts;
            }
            carry = out;
        }
        Witness::Agrees
    }

    /// Sum and carry of one position.
    fn added(&mut self, claim: &Claim<'_>, carry: &Bdd) -> Option<(Bdd, Bdd)> {
        let (a, b) = (self.literal(claim.a), self.literal(claim.b));
        let half = self.combine(&a, &b, op_function::xor)?;
        let sum = self.combine(&half, carry, op_function::xor)?;
        let both = self.combine(&a, &b, op_function::and)?;
        let passed = self.combine(&half, carry, op_function::and)?;
        let out = self.combine(&both, &passed, op_function::or)?;
        Some((sum, out))
    }
}
