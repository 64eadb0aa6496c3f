//! Which nets are proven sums and carries of which chain, and the gates that
//! make them.
//!
//! A chain is a theorem about nets, not about gates. To say which gates of a
//! path belong to it, its *cone* is walked back from its sums and carries to its
//! operands; a gate belongs to the chain when it stands on a way from an operand
//! to a result. The walk is bounded per chain by its width, so that a chain
//! whose operands do not enclose it cannot claim the whole netlist, and the work
//! stays linear in the gates of the chains.

use crate::chain::Chain;
use crate::netlist::{Bit, Driver, GateId, NetId, Netlist, Topology};
use fixedbitset::FixedBitSet;
use rustc_hash::{FxHashMap, FxHashSet};

/// Most gates of one cone: this many per position, and a base.
const CONE_GATES_PER_POSITION: usize = 256;
const CONE_GATES: usize = 1024;

/// What a net is to a chain.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Role {
    /// The carry out of the position.
    Carry,
    /// The sum of the position.
    Sum,
}

/// One membership.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Membership {
    /// The net.
    pub net: NetId,
    /// Index of the chain.
    pub chain: u32,
    /// Its position.
    pub position: u32,
    /// What the net is there.
    pub role: Role,
}

/// The sums and carries of all chains, by net.
pub struct Carried {
    members: Vec<Membership>,
    nets: FixedBitSet,
}

impl Carried {
    /// Collects them.
    pub fn of(netlist: &Netlist, chains: &[Chain]) -> Self {
        let mut members = Vec::new();
        for (chain, each) in chains.iter().enumerate() {
            for (position, bits) in each.positions.iter().enumerate() {
                let carries = bits.carries.iter().map(|signal| (signal, Role::Carry));
                let sums = bits.sums.iter().map(|signal| (signal, Role::Sum));
                members.extend(carries.chain(sums).map(|(signal, role)| Membership {
                    net: signal.net,
                    chain: chain as u32,
                    position: position as u32,
                    role,
                }));
            }
        }
        members.sort_unstable();
        let mut nets = FixedBitSet::with_capacity(netlist.net_count());
        nets.extend(members.iter().map(|member| member.net.index()));
        Self { members, nets }
    }

    /// What `net` is to the chains, the first chain first.
    #[inline]
    pub fn of_net(&self, net: NetId) -> &[Membership] {
        if !self.nets.contains(net.index()) {
            return &[];
        }
        let start = self.members.partition_point(|member| member.net < net);
        let length = self.members[start..].partition_point(|member| member.net == net);
        &self.members[start..start + length]
    }
}

/// The gates of every chain.
pub struct Cones {
    /// By chain, its gates in topological order.
    pub gates: Vec<Vec<GateId>>,
    chain_of: FxHashMap<GateId, u32>,
}

impl Cones {
    /// Walks the cones of `chains`.
    pub fn of(netlist: &Netlist, topology: &Topology, chains: &[Chain]) -> Self {
        let mut cones = Self {
            gates: Vec::with_capacity(chains.len()),
            chain_of: FxHashMap::default(),
        };
        if chains.is_empty() {
            return cones;
        }
        let mut rank = vec![0u32; netlist.gate_count()];
        for (at, gate) in topology.order.iter().enumerate() {
            rank[gate.index()] = at as u32;
        }
        for (index, chain) in chains.iter().enumerate() {
            let gates = cone(netlist, topology, chain, &rank);
            for &gate in &gates {
                cones.chain_of.entry(gate).or_insert(index as u32);
            }
            cones.gates.push(gates);
        }
        cones
    }

    /// The chain a gate belongs to; the first of several.
    pub fn chain_of(&self, gate: GateId) -> Option<u32> {
        self.chain_of.get(&gate).copied()
    }
}

/// The nets a chain starts from.
pub fn operand_nets(chain: &Chain) -> impl Iterator<Item = NetId> + '_ {
    let bits = chain.positions.iter().flat_map(|bits| [bits.a, bits.b]);
    bits.chain([chain.carry_in])
        .filter_map(Bit::signal)
        .map(|signal| signal.net)
}

fn cone(netlist: &Netlist, topology: &Topology, chain: &Chain, rank: &[u32]) -> Vec<GateId> {
    let most = CONE_GATES + CONE_GATES_PER_POSITION * chain.positions.len();
    let stops: FxHashSet<NetId> = operand_nets(chain).collect();
    let mut seen: FxHashSet<GateId> = FxHashSet::default();
    let mut gates: Vec<GateId> = Vec::new();
    let mut visit = |net: NetId, gates: &mut Vec<GateId>| {
        if let Driver::Gate(gate) = netlist.driver(net)
            && !topology.is_cut(net)
            && !stops.contains(&net)
            && seen.len() < most
            && seen.insert(gate)
        {
            gates.push(gate);
        }
    };
    for bits in &chain.positions {
        for signal in bits.carries.iter().chain(&bits.sums) {
            visit(signal.net, &mut gates);
        }
    }
    let mut at = 0;
    while at < gates.len() {
        for &net in netlist.fan_ins(gates[at]) {
            visit(net, &mut gates);
        }
        at += 1;
    }
    gates.sort_unstable_by_key(|gate| rank[gate.index()]);
    // What no operand reaches only happens to be read by the chain.
    let mut reached = stops;
    gates.retain(|&gate| {
        let on_the_way = netlist
            .fan_ins(gate)
            .iter()
            .any(|net| reached.contains(net));
        if on_the_way {
            reached.insert(netlist.gate_output(gate));
        }
        on_the_way
    });
    gates
}
