//! Exercised delay: how late a net can really settle.
//!
//! The longest path of a netlist may be one that no values exercise, as in a skip
//! adder. In floating mode a net is settled at value `v` by time `t` when some
//! prime of its gate's function for `v` has all its pins settled a pin delay
//! earlier; before its own arrival a start is settled at nothing. These timed
//! characteristic functions, and the question whether some input vector leaves a
//! net unsettled at `t`, are those of McGeer, Saldanha, Brayton and
//! Sangiovanni-Vincentelli, "Delay Models and Exact Timing Analysis", in Logic
//! Synthesis and Optimization, Kluwer 1993; here a SAT solver answers.
//!
//! Only times before a net's longest-path arrival need a variable: from then on
//! it is settled. A clause is needed in one direction only, since what is asked
//! for is an unsettled net.

use super::primes::Primes;
use super::prover::{Budget, Effort};
use crate::netlist::{Driver, FunctionId, GateId, NetId, Netlist, Topology};
use batsat::{Lit, Solver, SolverInterface, SolverOpts, lbool};
use rustc_hash::FxHashMap;
use std::rc::Rc;

/// What the question is about, and what it may use.
pub struct Timed<'a, D> {
    /// The netlist.
    pub netlist: &'a Netlist,
    /// Its topology.
    pub topology: &'a Topology,
    /// The delays of a gate's pins, in ticks.
    pub delays: D,
    /// Longest-path arrival of each net, in ticks; of a constant, below all times.
    pub arrivals: &'a [i32],
    /// Conflicts per question, and nets and timed variables in all.
    pub effort: Effort,
}

/// How late nets settle.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Settles {
    /// By the longest path.
    pub longest: i32,
    /// By what values can exercise; `None` when not settled within the effort.
    pub exercised: Option<i32>,
}

impl<'a, D: Fn(GateId) -> &'a [i32]> Timed<'a, D> {
    /// The latest time at which any of `nets` can settle.
    pub fn settles(&self, nets: &[NetId]) -> Settles {
        let arrivals = nets.iter().map(|net| self.arrivals[net.index()]);
        let longest = arrivals.max().unwrap_or(0);
        Settles {
            longest,
            exercised: self.exercised(nets, longest),
        }
    }

    fn exercised(&self, nets: &[NetId], longest: i32) -> Option<i32> {
        let mut question = Question::new(self, nets)?;
        // The smallest step between two times is the divisor of all delays.
        let step = question.step.max(1);
        let mut known_unsettled = longest.rem_euclid(step) - step;
        let mut known_settled = longest;
        let mut ask = longest - step;
        while known_unsettled + step < known_settled {
            if question.can_be_unsettled(nets, ask)? {
                known_unsettled = ask;
            } else {
                known_settled = ask;
            }
            let half = (known_settled - known_unsettled) / step / 2;
            ask = known_unsettled + half.max(1) * step;
        }
        Some(known_settled)
    }
}

struct Question<'t, 'a, D> {
    timed: &'t Timed<'a, D>,
    solver: Solver<Budget>,
    values: FxHashMap<NetId, Lit>,
    settled: FxHashMap<(NetId, i32, bool), Lit>,
    waiting: Vec<(NetId, i32, bool, Lit)>,
    primes: FxHashMap<FunctionId, Rc<Primes>>,
    step: i32,
}

impl<'t, 'a, D: Fn(GateId) -> &'a [i32]> Question<'t, 'a, D> {
    /// Encodes the values of everything `nets` depend on.
    fn new(timed: &'t Timed<'a, D>, nets: &[NetId]) -> Option<Self> {
        let budget = Budget::new(timed.effort.conflicts);
        let mut question = Self {
            timed,
            solver: Solver::new(SolverOpts::default(), budget),
            values: FxHashMap::default(),
            settled: FxHashMap::default(),
            waiting: Vec::new(),
            primes: FxHashMap::default(),
            step: 0,
        };
        let mut stack = nets.to_vec();
        while let Some(net) = stack.pop() {
            if question.values.contains_key(&net) {
                continue;
            }
            if question.values.len() >= timed.effort.nodes {
                return None;
            }
            let literal = Lit::new(question.solver.new_var_default(), true);
            question.values.insert(net, literal);
            match (question.gate_of(net), timed.netlist.driver(net)) {
                (Some(gate), _) => stack.extend(timed.netlist.fan_ins(gate)),
                (None, Driver::Constant(value)) => {
                    let unit = if value { literal } else { !literal };
                    question.solver.add_clause_reuse(&mut vec![unit]);
                }
                (None, _) => question.note(timed.arrivals[net.index()]),
            }
        }
        let mut gates: Vec<(NetId, GateId)> = question
            .values
            .keys()
            .filter_map(|&net| Some((net, question.gate_of(net)?)))
            .collect();
        gates.sort_unstable();
        for (net, gate) in gates {
            for &delay in (timed.delays)(gate) {
                question.note(delay);
            }
            let primes = question.primes_of(gate)?;
            let pins = timed.netlist.fan_ins(gate);
            for value in [false, true] {
                let output = question.value(net, value);
                for cube in &primes.0[usize::from(value)] {
                    let mut clause = vec![output];
                    for &(pin, inverted) in cube {
                        clause.push(!question.value(pins[pin], !inverted));
                    }
                    question.solver.add_clause_reuse(&mut clause);
                }
            }
        }
        Some(question)
    }

    /// Takes a time into the step between times.
    fn note(&mut self, time: i32) {
        let (mut a, mut b) = (self.step, time.saturating_abs());
        while b != 0 && b != i32::MAX {
            (a, b) = (b, a % b);
        }
        self.step = a;
    }

    fn gate_of(&self, net: NetId) -> Option<GateId> {
        match self.timed.netlist.driver(net) {
            Driver::Gate(gate) if !self.timed.topology.is_cut(net) => Some(gate),
            _ => None,
        }
    }

    fn primes_of(&mut self, gate: GateId) -> Option<Rc<Primes>> {
        let id = self.timed.netlist.function_id(gate);
        if let Some(known) = self.primes.get(&id) {
            return Some(known.clone());
        }
        let primes = Rc::new(Primes::of(self.timed.netlist.function(gate))?);
        self.primes.insert(id, primes.clone());
        Some(primes)
    }

    /// The literal that `net` has `value` in the end.
    fn value(&self, net: NetId, value: bool) -> Lit {
        let literal = self.values[&net];
        if value { literal } else { !literal }
    }

    /// The literal that `net` is settled at `value` by `time`; `None` when it
    /// never is.
    fn settled(&mut self, net: NetId, time: i32, value: bool) -> Option<Lit> {
        if time >= self.timed.arrivals[net.index()] {
            return Some(self.value(net, value));
        }
        if self.gate_of(net).is_none() || time < 0 {
            return None;
        }
        if let Some(&known) = self.settled.get(&(net, time, value)) {
            return Some(known);
        }
        let literal = Lit::new(self.solver.new_var_default(), true);
        self.settled.insert((net, time, value), literal);
        self.waiting.push((net, time, value, literal));
        Some(literal)
    }

    /// Gives every timed variable its clauses. `None` past the limit.
    fn encode(&mut self) -> Option<()> {
        while let Some((net, time, value, literal)) = self.waiting.pop() {
            if self.settled.len() > self.timed.effort.nodes {
                return None;
            }
            let gate = self.gate_of(net)?;
            let primes = self.primes_of(gate)?;
            let pins = self.timed.netlist.fan_ins(gate);
            let delays = (self.timed.delays)(gate);
            'cubes: for cube in &primes.0[usize::from(value)] {
                let mut clause = vec![literal];
                for &(pin, inverted) in cube {
                    match self.settled(pins[pin], time - delays[pin], !inverted) {
                        None => continue 'cubes,
                        Some(settled) => clause.push(!settled),
                    }
                }
                self.solver.add_clause_reuse(&mut clause);
            }
        }
        Some(())
    }

    /// Whether some input vector leaves one of `nets` unsettled at `time`; `None`
    /// when that is not settled within the effort.
    fn can_be_unsettled(&mut self, nets: &[NetId], time: i32) -> Option<bool> {
        let asked = Lit::new(self.solver.new_var_default(), true);
        let mut some = vec![!asked];
        for &net in nets {
            let both = [false, true].map(|value| self.settled(net, time, value));
            if time >= self.timed.arrivals[net.index()] {
                continue;
            }
            let unsettled = Lit::new(self.solver.new_var_default(), true);
            for settled in both.into_iter().flatten() {
                self.solver
                    .add_clause_reuse(&mut vec![!unsettled, !settled]);
            }
            some.push(unsettled);
        }
        self.encode()?;
        self.solver.add_clause_reuse(&mut some);
        self.solver.cb_mut().restart(self.timed.effort.conflicts);
        let answer = self.solver.solve_limited(&[asked]);
        if answer == lbool::TRUE {
            return Some(true);
        }
        (answer == lbool::FALSE).then_some(false)
    }
}
