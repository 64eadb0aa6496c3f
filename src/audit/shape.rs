//! A carry network as lines of text, for the record.
//!
//! A combine node is `[7:4] = [7:6] [5:4]`, position -1 being the carry-in. A
//! signal is one operation, `x3 = x2 + G[7:4]`, `x4 = x1 ? x3 : h5`: `G` and `P`
//! of spans, `t5` the OR and `h5` the half sum of a position. Then come the carries and sums
//! that are signals. Only what some carry or sum is made from is listed,
//! and what a line reads comes before it.

use crate::network::{Carry, CarryNetwork, Node, NodeId, SignalId, SignalNode};

/// The lines of a network.
pub(super) fn lines(network: &CarryNetwork) -> Vec<String> {
    let used = network.used();
    let combined = network.nodes().filter(|node| used[node.index()]);
    let mut lines: Vec<String> = combined
        .filter_map(|node| match network.node(node) {
            Node::Combine(parts) => {
                let parts: Vec<String> = parts.iter().map(|&part| span(network, part)).collect();
                Some(format!("{} = {}", span(network, node), parts.join(" ")))
            }
            Node::CarryIn | Node::Leaf(_) => None,
        })
        .collect();
    let used = network.used_signals();
    for signal in network.signal_ids().filter(|id| used[id.index()]) {
        if let Some(right) = operation(network, signal) {
            lines.push(format!("{} = {right}", name(network, signal)));
        }
    }
    for position in 0..network.positions() {
        if let Carry::Signal(signal) = network.carry(position) {
            lines.push(format!(
                "carry out of {position} = {}",
                name(network, signal)
            ));
        }
        if let Some(signal) = network.sum(position) {
            lines.push(format!("sum {position} = {}", name(network, signal)));
        }
    }
    lines
}

fn span(network: &CarryNetwork, node: NodeId) -> String {
    let span = network.span(node);
    format!("[{}:{}]", span.high, span.low)
}

fn name(network: &CarryNetwork, signal: SignalId) -> String {
    match network.signal(signal) {
        SignalNode::Generate(node) => format!("G{}", span(network, node)),
        SignalNode::Propagate(node) => format!("P{}", span(network, node)),
        SignalNode::Either(position) => format!("t{position}"),
        SignalNode::HalfSum(position) => format!("h{position}"),
        _ => format!("x{}", signal.index()),
    }
}

/// The right side of an operation; `None` for what has a name of its own.
fn operation(network: &CarryNetwork, signal: SignalId) -> Option<String> {
    let names = |list: &[SignalId], between: &str| {
        let list: Vec<String> = list.iter().map(|&id| name(network, id)).collect();
        list.join(between)
    };
    match network.signal(signal) {
        SignalNode::Generate(_)
        | SignalNode::Propagate(_)
        | SignalNode::Either(_)
        | SignalNode::HalfSum(_) => None,
        SignalNode::And(list) => Some(names(list, "·")),
        SignalNode::Or(list) => Some(names(list, " + ")),
        SignalNode::Xor(left, right) => Some(names(&[left, right], " ⊕ ")),
        SignalNode::Select {
            choose,
            if_one,
            if_zero,
        } => Some(format!(
            "{} ? {} : {}",
            name(network, choose),
            name(network, if_one),
            name(network, if_zero)
        )),
    }
}
