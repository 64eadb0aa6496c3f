//! The netlist as a directed graph of nets, for petgraph's algorithms, and the
//! topological order of its gates.
//!
//! A node is a net; an edge runs from every fan-in of a gate to the gate's
//! output. [`NetGraph`] implements petgraph's visit traits on the model itself,
//! so nothing is copied. Registers and boxes are no edges: they end paths.
//!
//! petgraph's `tarjan_scc` and depth-first visitor recurse and overflow the
//! stack on deep netlists; only `toposort` and `kosaraju_scc` are used.

use super::id::{GateId, NetId};
use super::model::{Driver, Netlist};
use fixedbitset::FixedBitSet;
use petgraph::Direction;
use petgraph::visit::{
    GraphBase, GraphRef, IntoNeighbors, IntoNeighborsDirected, IntoNodeIdentifiers, NodeCount,
    NodeIndexable, Visitable,
};

/// For every net the gates that read it (once per pin), in one flat array.
pub struct Readers {
    starts: Vec<u32>,
    gates: Vec<GateId>,
}

impl Readers {
    /// Builds the table in two passes over the fan-ins.
    pub fn of(netlist: &Netlist) -> Self {
        let mut starts = vec![0u32; netlist.net_count() + 1];
        for gate in netlist.gates() {
            for net in netlist.fan_ins(gate) {
                starts[net.index() + 1] += 1;
            }
        }
        for i in 1..starts.len() {
            starts[i] += starts[i - 1];
        }
        let mut next = starts.clone();
        let mut gates = vec![GateId(0); starts[netlist.net_count()] as usize];
        for gate in netlist.gates() {
            for net in netlist.fan_ins(gate) {
                let slot = &mut next[net.index()];
                gates[*slot as usize] = gate;
                *slot += 1;
            }
        }
        Self { starts, gates }
    }

    /// The gates that read `net`, one entry per reading pin.
    #[inline]
    pub fn of_net(&self, net: NetId) -> &[GateId] {
        let i = net.index();
        &self.gates[self.starts[i] as usize..self.starts[i + 1] as usize]
    }
}

/// The graph of nets. A contended net has no incoming edges: it is cut.
#[derive(Clone, Copy)]
pub struct NetGraph<'a> {
    netlist: &'a Netlist,
    readers: &'a Readers,
}

impl<'a> NetGraph<'a> {
    /// The view of `netlist`; `readers` must be its own.
    pub fn new(netlist: &'a Netlist, readers: &'a Readers) -> Self {
        Self { netlist, readers }
    }
}

/// Neighbours of a net in one direction.
pub enum Neighbors<'a> {
    /// The nets driven by the gates that read a net.
    Successors(&'a Netlist, std::slice::Iter<'a, GateId>),
    /// The fan-ins of the gate that drives a net.
    Predecessors(std::slice::Iter<'a, NetId>),
}

impl Iterator for Neighbors<'_> {
    type Item = NetId;

    fn next(&mut self) -> Option<NetId> {
        match self {
            Self::Predecessors(nets) => nets.next().copied(),
            Self::Successors(netlist, gates) => gates
                .map(|&gate| netlist.gate_output(gate))
                .find(|&net| matches!(netlist.driver(net), Driver::Gate(_))),
        }
    }
}

impl GraphBase for NetGraph<'_> {
    type NodeId = NetId;
    type EdgeId = (NetId, NetId);
}

impl GraphRef for NetGraph<'_> {}

impl NodeCount for NetGraph<'_> {
    fn node_count(&self) -> usize {
        self.netlist.net_count()
    }
}

impl NodeIndexable for NetGraph<'_> {
    fn node_bound(&self) -> usize {
        self.netlist.net_count()
    }
    fn to_index(&self, net: NetId) -> usize {
        net.index()
    }
    fn from_index(&self, index: usize) -> NetId {
        NetId::new(index)
    }
}

impl IntoNodeIdentifiers for NetGraph<'_> {
    type NodeIdentifiers = std::iter::Map<std::ops::Range<u32>, fn(u32) -> NetId>;
    fn node_identifiers(self) -> Self::NodeIdentifiers {
        (0..self.netlist.net_count() as u32).map(NetId)
    }
}

impl Visitable for NetGraph<'_> {
    type Map = NetSet;
    fn visit_map(&self) -> NetSet {
        NetSet(FixedBitSet::with_capacity(self.netlist.net_count()))
    }
    fn reset_map(&self, map: &mut NetSet) {
        map.0.clear();
        map.0.grow(self.netlist.net_count());
    }
}

/// A set of nets: the visit map of [`NetGraph`].
pub struct NetSet(FixedBitSet);

impl petgraph::visit::VisitMap<NetId> for NetSet {
    fn visit(&mut self, net: NetId) -> bool {
        !self.0.put(net.index())
    }
    fn is_visited(&self, net: &NetId) -> bool {
        self.0.contains(net.index())
    }
    fn unvisit(&mut self, net: NetId) -> bool {
        let was = self.0.contains(net.index());
        self.0.set(net.index(), false);
        was
    }
}

impl<'a> IntoNeighbors for NetGraph<'a> {
    type Neighbors = Neighbors<'a>;
    fn neighbors(self, net: NetId) -> Neighbors<'a> {
        Neighbors::Successors(self.netlist, self.readers.of_net(net).iter())
    }
}

impl<'a> IntoNeighborsDirected for NetGraph<'a> {
    type NeighborsDirected = Neighbors<'a>;
    fn neighbors_directed(self, net: NetId, direction: Direction) -> Neighbors<'a> {
        match (direction, self.netlist.driver(net)) {
            (Direction::Outgoing, _) => self.neighbors(net),
            (Direction::Incoming, Driver::Gate(gate)) => {
                Neighbors::Predecessors(self.netlist.fan_ins(gate).iter())
            }
            (Direction::Incoming, _) => Neighbors::Predecessors([].iter()),
        }
    }
}

/// The gates in an order in which every fan-in comes first, once all loops and
/// contended nets are cut.
pub struct Topology {
    /// All gates of the netlist.
    pub order: Vec<GateId>,
    /// Nets on combinational loops, one list per strongly connected component.
    pub loops: Vec<Vec<NetId>>,
    /// By net: whether it is cut (on a loop, contended, or without driver).
    pub cut: FixedBitSet,
}

impl Topology {
    /// Orders the gates of `netlist`. When the gates already stand in order (as
    /// in every binary AIGER file) one pass says so and no graph is searched.
    pub fn of(netlist: &Netlist) -> Self {
        let mut cut = FixedBitSet::with_capacity(netlist.net_count());
        for net in netlist.nets() {
            if matches!(netlist.driver(net), Driver::None | Driver::Many(_)) {
                cut.insert(net.index());
            }
        }
        if stands_in_order(netlist) {
            return Self {
                order: netlist.gates().collect(),
                loops: Vec::new(),
                cut,
            };
        }
        let readers = Readers::of(netlist);
        let graph = NetGraph::new(netlist, &readers);
        match petgraph::algo::toposort(graph, None) {
            Ok(nets) => Self {
                order: gates_of(netlist, &nets),
                loops: Vec::new(),
                cut,
            },
            Err(_) => Self::with_loops(netlist, graph, cut),
        }
    }

    fn with_loops(netlist: &Netlist, graph: NetGraph<'_>, mut cut: FixedBitSet) -> Self {
        let mut loops = Vec::new();
        // Components come in reverse topological order, so flattened and
        // reversed they order the gates once the loops themselves are cut.
        let components = petgraph::algo::kosaraju_scc(graph);
        let mut nets = Vec::with_capacity(netlist.net_count());
        for component in components.into_iter().rev() {
            if component.len() > 1 || reads_itself(netlist, component[0]) {
                let mut members = component.clone();
                members.sort_unstable();
                for net in &members {
                    cut.insert(net.index());
                }
                loops.push(members);
            }
            nets.extend(component);
        }
        loops.sort_unstable();
        Self {
            order: gates_of(netlist, &nets),
            loops,
            cut,
        }
    }

    /// Whether `net` is cut and so treated as a free input.
    #[inline]
    pub fn is_cut(&self, net: NetId) -> bool {
        self.cut.contains(net.index())
    }
}

fn reads_itself(netlist: &Netlist, net: NetId) -> bool {
    match netlist.driver(net) {
        Driver::Gate(gate) => netlist.fan_ins(gate).contains(&net),
        _ => false,
    }
}

fn stands_in_order(netlist: &Netlist) -> bool {
    netlist.gates().all(|gate| {
        netlist
            .fan_ins(gate)
            .iter()
            .all(|&net| match netlist.driver(net) {
                Driver::Gate(driver) => driver < gate,
                _ => true,
            })
    })
}

/// The driving gates of `nets` in that order, then the gates of contended nets,
/// which nothing waits for.
fn gates_of(netlist: &Netlist, nets: &[NetId]) -> Vec<GateId> {
    let mut order = Vec::with_capacity(netlist.gate_count());
    for &net in nets {
        if let Driver::Gate(gate) = netlist.driver(net) {
            order.push(gate);
        }
    }
    for contention in netlist.contended() {
        for &(driver, _) in &contention.drivers {
            if let Driver::Gate(gate) = driver {
                order.push(gate);
            }
        }
    }
    order
}
