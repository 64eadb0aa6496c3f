//! Which net stands for a node, and which bits look like neighbours on a bus.

use super::entries::{Entries, EntryId};
use super::links::Preference;
use crate::netlist::bus::bus_bit;
use crate::netlist::{Driver, NetId, Netlist, Signal};
use crate::subject::{Literal, NodeId, Subject};
use rustc_hash::{FxHashMap, FxHashSet};

/// Representative nets of nodes.
pub(super) struct Labels<'a> {
    netlist: &'a Netlist,
    subject: &'a Subject,
    net: Vec<u32>,
    /// By node shown at a port or stored: whether it is shown inverted.
    ports: FxHashMap<NodeId, bool>,
    /// Output ports' nets.
    shown: FxHashSet<NetId>,
}

const NO_NET: u32 = u32::MAX;

impl<'a> Labels<'a> {
    /// Chooses for every node a net: a free net before a gate's, an output
    /// port's before an inner one, a named one before an unnamed, then the
    /// lowest number.
    pub(super) fn of(netlist: &'a Netlist, subject: &'a Subject) -> Self {
        let shown: FxHashSet<NetId> = netlist
            .outputs()
            .iter()
            .map(|output| output.signal.net)
            .collect();
        let mut labels = Self {
            netlist,
            subject,
            net: vec![NO_NET; subject.node_count()],
            ports: FxHashMap::default(),
            shown,
        };
        for net in netlist.nets() {
            let slot = subject.of_net(net).node().index();
            let known = labels.net[slot];
            if known == NO_NET || labels.rank(net) > labels.rank(NetId(known)) {
                labels.net[slot] = net.0;
            }
        }
        let stored = netlist.registers().iter().map(|register| register.input);
        let shown = netlist.outputs().iter().map(|output| output.signal);
        for signal in shown.chain(stored) {
            let literal = subject.of_signal(signal);
            labels
                .ports
                .entry(literal.node())
                .or_insert(literal.is_inverted());
        }
        labels
    }

    fn rank(&self, net: NetId) -> u8 {
        match self.netlist.driver(net) {
            // Another net shows it outside its cell or box.
            _ if self.netlist.is_inner(net) => 0,
            Driver::Gate(_) if self.shown.contains(&net) => 3,
            Driver::Gate(_) if self.netlist.local_name(net).is_some() => 2,
            Driver::Gate(_) => 1,
            _ => 4,
        }
    }

    /// The better-known of two nets of one node; larger is better.
    pub(super) fn preference(&self, net: NetId) -> (u8, std::cmp::Reverse<NetId>) {
        (self.rank(net), std::cmp::Reverse(net))
    }

    /// The net that stands for a node, and the literal it carries.
    pub(super) fn net(&self, node: NodeId) -> Option<(NetId, Literal)> {
        let net = self.net[node.index()];
        (net != NO_NET).then(|| (NetId(net), self.subject.of_net(NetId(net))))
    }

    /// The signal that carries a literal.
    pub(super) fn signal(&self, literal: Literal) -> Option<Signal> {
        self.net(literal.node()).map(|(net, own)| Signal {
            net,
            inverted: own != literal,
        })
    }

    /// Whether an output port or a register shows the node, and inverted or
    /// not.
    pub(super) fn port(&self, node: NodeId) -> Option<bool> {
        self.ports.get(&node).copied()
    }

    fn name(&self, node: NodeId) -> Option<String> {
        let (net, _) = self.net(node)?;
        self.netlist.local_name(net)?;
        Some(self.netlist.net_name(net))
    }

    /// How well `upper` looks like the bit above `lower` of one bus: 3 for the
    /// next index of the same base, 2 for another index of it, 0 otherwise.
    pub(super) fn follows(&self, lower: NodeId, upper: NodeId) -> u32 {
        let (Some(lower), Some(upper)) = (self.name(lower), self.name(upper)) else {
            return 0;
        };
        match (bus_bit(&lower), bus_bit(&upper)) {
            (Some(l), Some(u)) if l.base == u.base && l.tail == u.tail && l.index != u.index => {
                if u.index == l.index + 1 { 3 } else { 2 }
            }
            _ => 0,
        }
    }

    /// Net numbers as a fallback where names say nothing: whether `low`, `mid`,
    /// `high` stand at equal distances.
    pub(super) fn evenly_spaced(&self, low: NodeId, mid: NodeId, high: NodeId) -> bool {
        let at = |node| self.net(node).map(|(net, _)| i64::from(net.0));
        match (at(low), at(mid), at(high)) {
            (Some(low), Some(mid), Some(high)) => mid - low == high - mid,
            _ => false,
        }
    }
}

/// Prefers operands that continue the buses of the position below.
pub(super) struct BusPreference<'a> {
    pub(super) labels: &'a Labels<'a>,
    pub(super) entries: &'a Entries,
}

impl Preference for BusPreference<'_> {
    fn continues(&self, current: EntryId, next: EntryId) -> u32 {
        let operands = |entry: EntryId| {
            let i = entry as usize;
            [self.entries.a[i], self.entries.b[i]]
                .into_iter()
                .filter(|&n| n != NodeId::FALSE)
        };
        let best = |upper: NodeId| {
            operands(current)
                .map(|lower| self.labels.follows(lower, upper))
                .max()
                .unwrap_or(0)
        };
        operands(next).map(best).sum()
    }
}
