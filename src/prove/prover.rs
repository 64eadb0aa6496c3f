//! The incremental prover (solver: batsat; clauses after Tseitin 1968).

use crate::subject::{Literal, NodeId, NodeKind, Subject};
use batsat::{Callbacks, Solver, SolverInterface, SolverOpts, lbool};
use rustc_hash::{FxHashMap, FxHashSet};

/// How much work one question may cost: never a time, so that results do not
/// depend on the machine.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Effort {
    /// Solver conflicts per question, where at most a thousand nodes are
    /// encoded; in proportion fewer beyond, since each then costs more.
    pub conflicts: u64,
    /// Nodes encoded over the life of one prover.
    pub nodes: usize,
}

/// A value the solver knows: a subject literal or something defined on them.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Fact(batsat::Lit);

impl std::ops::Not for Fact {
    type Output = Self;
    fn not(self) -> Self {
        Self(!self.0)
    }
}

/// Nodes up to which a question has its full effort.
const FULL_EFFORT_NODES: usize = 1000;

/// Levels below the stops that an optional question may reach.
const NEARBY: usize = 8;

/// Values of free nodes under which a claimed equality fails.
pub type Counterexample = Vec<(NodeId, bool)>;

/// The answer to one question.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Answer {
    /// Equal for every value of the free nets.
    Proven,
    /// Different, for instance here.
    Refuted(Counterexample),
    /// Not settled within the effort.
    Undecided,
}

/// Counts conflicts and stops the search at the limit.
pub(super) struct Budget {
    spent: u64,
    limit: u64,
}

impl Budget {
    pub(super) fn new(limit: u64) -> Self {
        Self { spent: 0, limit }
    }

    /// Allows `limit` conflicts from here on.
    pub(super) fn restart(&mut self, limit: u64) {
        *self = Self::new(limit);
    }
}

impl Callbacks for Budget {
    fn on_new_clause(&mut self, _clause: &[batsat::Lit], source: batsat::ClauseKind) {
        if matches!(source, batsat::ClauseKind::Learnt) {
            self.spent += 1;
        }
    }
    fn stop(&self) -> bool {
        self.spent >= self.limit
    }
}

/// An incremental prover over one subject graph.
pub struct Prover<'a> {
    subject: &'a Subject,
    effort: Effort,
    solver: Solver<Budget>,
    variables: FxHashMap<NodeId, batsat::Var>,
    /// Nodes with a variable but without clauses, in order of discovery.
    frontier: Vec<NodeId>,
    encoded: FxHashSet<NodeId>,
    /// Where encoding pauses as long as it can.
    stops: FxHashSet<NodeId>,
    truth: batsat::Lit,
    conflicts: u64,
    clause: Vec<batsat::Lit>,
}

impl<'a> Prover<'a> {
    /// A prover without clauses. `stops` are nodes (operands, say) below which
    /// nothing is encoded until a refutation asks for it.
    pub fn new(
        subject: &'a Subject,
        effort: Effort,
        stops: impl IntoIterator<Item = NodeId>,
    ) -> Self {
        let budget = Budget {
            spent: 0,
            limit: effort.conflicts,
        };
        let mut solver = Solver::new(SolverOpts::default(), budget);
        let truth = batsat::Lit::new(solver.new_var_default(), true);
        solver.add_clause_reuse(&mut vec![truth]);
        Self {
            subject,
            effort,
            solver,
            variables: FxHashMap::default(),
            frontier: Vec::new(),
            encoded: FxHashSet::default(),
            stops: stops.into_iter().collect(),
            truth,
            conflicts: 0,
            clause: Vec::new(),
        }
    }

    /// Conflicts spent so far.
    pub fn conflicts(&self) -> u64 {
        self.conflicts
    }

    /// Nodes encoded so far.
    pub fn nodes(&self) -> usize {
        self.encoded.len()
    }

    fn add(&mut self, literals: &[batsat::Lit]) {
        self.clause.clear();
        self.clause.extend_from_slice(literals);
        self.solver.add_clause_reuse(&mut self.clause);
    }

    fn fresh(&mut self) -> batsat::Lit {
        batsat::Lit::new(self.solver.new_var_default(), true)
    }

    fn variable(&mut self, node: NodeId) -> batsat::Lit {
        if node == NodeId::FALSE {
            return !self.truth;
        }
        if let Some(&variable) = self.variables.get(&node) {
            return batsat::Lit::new(variable, true);
        }
        let variable = self.solver.new_var_default();
        self.variables.insert(node, variable);
        self.frontier.push(node);
        batsat::Lit::new(variable, true)
    }

    /// The fact that a constant is.
    pub fn constant(&self, value: bool) -> Fact {
        Fact(if value { self.truth } else { !self.truth })
    }

    /// The fact that a subject literal is.
    pub fn literal(&mut self, literal: Literal) -> Fact {
        let positive = self.variable(literal.node());
        Fact(if literal.is_inverted() {
            !positive
        } else {
            positive
        })
    }

    /// Exclusive or of two facts.
    pub fn xor(&mut self, left: Fact, right: Fact) -> Fact {
        let output = self.fresh();
        self.define_xor(output, left.0, right.0);
        Fact(output)
    }

    /// Majority of three facts.
    pub fn majority(&mut self, a: Fact, b: Fact, c: Fact) -> Fact {
        let output = self.fresh();
        for (x, y) in [(a.0, b.0), (a.0, c.0), (b.0, c.0)] {
            self.add(&[!x, !y, output]);
            self.add(&[x, y, !output]);
        }
        Fact(output)
    }

    fn define_xor(&mut self, output: batsat::Lit, x: batsat::Lit, y: batsat::Lit) {
        self.add(&[!output, x, y]);
        self.add(&[!output, !x, !y]);
        self.add(&[output, !x, y]);
        self.add(&[output, x, !y]);
    }

    /// Encodes one node; its fan-ins join the frontier.
    fn encode(&mut self, node: NodeId) {
        if !self.encoded.insert(node) {
            return;
        }
        let output = self.variable(node);
        match self.subject.kind(node) {
            NodeKind::False | NodeKind::Free(_) => {}
            NodeKind::Xor(x, y) => {
                let (x, y) = (self.variable(x), self.variable(y));
                self.define_xor(output, x, y);
            }
            NodeKind::And(x, y) => {
                let (x, y) = (self.literal(x).0, self.literal(y).0);
                self.add(&[!output, x]);
                self.add(&[!output, y]);
                self.add(&[output, !x, !y]);
            }
        }
    }

    /// Encodes what has been discovered: everything down to the stops, then
    /// `levels` levels of what lies below them. Returns `false` past the node
    /// limit.
    fn grow(&mut self, levels: usize) -> bool {
        let mut waiting = Vec::new();
        while let Some(node) = self.frontier.pop() {
            if self.encoded.len() >= self.effort.nodes {
                self.frontier.push(node);
                return false;
            }
            if self.stops.contains(&node) {
                waiting.push(node);
            } else {
                self.encode(node);
            }
        }
        for _ in 0..levels {
            for node in std::mem::take(&mut waiting) {
                if self.encoded.len() >= self.effort.nodes {
                    return false;
                }
                self.stops.remove(&node);
                self.encode(node);
            }
            std::mem::swap(&mut waiting, &mut self.frontier);
        }
        // What waits now is where encoding pauses from here on.
        self.stops.extend(waiting.iter().copied());
        self.frontier = waiting;
        true
    }

    fn solve(&mut self, assumption: batsat::Lit) -> lbool {
        let nodes = self.encoded.len().max(FULL_EFFORT_NODES) as u64;
        let full = self
            .effort
            .conflicts
            .saturating_mul(FULL_EFFORT_NODES as u64);
        self.solver.cb_mut().limit = full / nodes;
        let before = self.solver.cb().spent;
        let result = self.solver.solve_limited(&[assumption]);
        self.conflicts += self.solver.cb().spent - before;
        result
    }

    /// Asks whether two facts are equal. What is proven is kept and helps the
    /// questions that follow.
    pub fn equal(&mut self, left: Fact, right: Fact) -> Answer {
        self.ask(left, right, usize::MAX)
    }

    /// As [`Self::equal`], but looks no further than a few levels below the
    /// stops: for equalities that are welcome and not needed.
    pub fn equal_nearby(&mut self, left: Fact, right: Fact) -> Answer {
        self.ask(left, right, NEARBY)
    }

    /// As [`Self::equal_nearby`], `levels` levels below the stops at most.
    pub fn equal_within(&mut self, left: Fact, right: Fact, levels: usize) -> Answer {
        self.ask(left, right, levels)
    }

    fn ask(&mut self, left: Fact, right: Fact, deepest: usize) -> Answer {
        let differ = self.xor(left, right).0;
        self.solver.cb_mut().spent = 0;
        let mut levels = 0;
        loop {
            if !self.grow(levels) {
                return Answer::Undecided;
            }
            let result = self.solve(differ);
            if result == lbool::FALSE {
                self.add(&[!differ]);
                return Answer::Proven;
            }
            if result != lbool::TRUE {
                return Answer::Undecided;
            }
            if self.frontier.is_empty() {
                return Answer::Refuted(self.counterexample());
            }
            // The model may rest on an operand being freer than it is: look
            // twice as far below.
            levels = (2 * levels).max(2);
            if levels > deepest {
                return Answer::Undecided;
            }
        }
    }

    fn counterexample(&self) -> Counterexample {
        let mut values: Counterexample = self
            .variables
            .iter()
            .filter(|(node, _)| matches!(self.subject.kind(**node), NodeKind::Free(_)))
            .map(|(&node, &variable)| (node, self.solver.value_var(variable) == lbool::TRUE))
            .collect();
        values.sort_unstable();
        values
    }
}
