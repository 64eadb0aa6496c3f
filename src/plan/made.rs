//! Which nodes of an overlay become gates, and what that costs.
//!
//! The literals that existing nets are to show decide it: a gate that nothing
//! reaches is not made; in BLIF every net to be driven is a gate of its own, in
//! either polarity (a buffer, inverter or constant where it equals an operand or a
//! constant), in AIGER it is none, since readers are redirected. Invariant: the
//! writer ([`super::materialise`]) makes exactly these gates.

use super::overlay::{GateStyle, Literal, Node, Operator, Overlay};
use crate::netlist::NetId;

/// See the head of the module.
pub(super) struct Made {
    /// By node: whether its gate is made, once or once per real net.
    pub(super) is_made: Vec<bool>,
    /// By node: the real nets that are gates of it (BLIF only).
    real_nets: Vec<u32>,
}

/// What new gates cost.
#[derive(Default)]
pub(super) struct Count {
    pub(super) gates: usize,
    /// A k-input gate counted k − 1.
    pub(super) equivalents: usize,
    pub(super) largest_fan_in: usize,
}

impl Made {
    /// What is made so that a net each can show `literals`.
    pub(super) fn of(overlay: &Overlay, literals: &[Literal]) -> Self {
        let mut live = vec![false; overlay.len()];
        let mut is_made = vec![false; overlay.len()];
        let mut real_nets = vec![0; overlay.len()];
        for literal in literals {
            let node = literal.node();
            live[node.index()] = true;
            if overlay.style() != GateStyle::AndInverter && overlay.is_gate(node) {
                real_nets[node.index()] += 1;
            }
        }
        for node in overlay.nodes().rev() {
            let i = node.index();
            let shared = live[i] && overlay.is_gate(node) && overlay.existing(node).is_none();
            if shared || real_nets[i] > 0 {
                is_made[i] = true;
                for input in overlay.inputs(node) {
                    live[input.node().index()] = true;
                }
            }
        }
        Self { is_made, real_nets }
    }

    /// How many gates a node is.
    fn copies(&self, overlay: &Overlay, node: Node) -> usize {
        if !self.is_made[node.index()] {
            return 0;
        }
        let real = self.real_nets[node.index()] as usize;
        let shared = usize::from(overlay.existing(node).is_none());
        real.max(shared)
    }

    /// The new gates.
    pub(super) fn count(&self, overlay: &Overlay, literals: &[Literal]) -> Count {
        let mut count = Count::default();
        let mut add = |gates: usize, inputs: usize| {
            count.gates += gates;
            count.equivalents += gates * inputs.saturating_sub(1);
            if gates > 0 {
                count.largest_fan_in = count.largest_fan_in.max(inputs);
            }
        };
        for node in overlay.nodes() {
            add(self.copies(overlay, node), overlay.inputs(node).len());
        }
        if overlay.style() != GateStyle::AndInverter {
            for literal in literals {
                match overlay.operator(literal.node()) {
                    Operator::Constant => add(1, 0),
                    Operator::Net(_) => add(1, 1),
                    Operator::And | Operator::Xor | Operator::Cover(_) => {}
                }
            }
        }
        count
    }

    /// Most readers of a new gate; `shown` are the literals with the readers that
    /// the nets showing them have outside.
    pub(super) fn largest_fan_out(&self, overlay: &Overlay, shown: &[(Literal, u32)]) -> usize {
        let mut inner = vec![0usize; overlay.len()];
        for node in overlay.nodes() {
            let copies = self.copies(overlay, node);
            for input in overlay.inputs(node) {
                inner[input.node().index()] += copies;
            }
        }
        let mut largest = 0;
        if overlay.style() == GateStyle::AndInverter {
            for &(literal, uses) in shown {
                inner[literal.node().index()] += uses as usize;
            }
        } else {
            // The first real net of a node also serves the new gates.
            let mut first = vec![true; overlay.len()];
            for &(literal, uses) in shown {
                let node = literal.node();
                let serves = overlay.is_gate(node)
                    && overlay.existing(node).is_none()
                    && std::mem::take(&mut first[node.index()]);
                let inside = if serves { inner[node.index()] } else { 0 };
                largest = largest.max(uses as usize + inside);
            }
        }
        for node in overlay.nodes() {
            if self.copies(overlay, node) > 0
                && self.real_nets[node.index()] == 0
                && overlay.existing(node).is_none()
            {
                largest = largest.max(inner[node.index()]);
            }
        }
        largest
    }

    /// The existing nets that new gates or driven nets read, ascending.
    pub(super) fn reads(&self, overlay: &Overlay, literals: &[Literal]) -> Vec<NetId> {
        let inputs = overlay
            .nodes()
            .filter(|node| self.is_made[node.index()])
            .flat_map(|node| overlay.inputs(node));
        let mut nets: Vec<NetId> = inputs
            .chain(literals)
            .filter_map(|literal| match overlay.operator(literal.node()) {
                Operator::Net(net) => Some(net),
                _ => overlay.existing(literal.node()).map(|shown| shown.net),
            })
            .collect();
        nets.sort_unstable();
        nets.dedup();
        nets
    }
}
