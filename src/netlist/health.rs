//! Structure faults of a netlist, as plain data.
//!
//! A fault never stops an audit: the nets concerned are cut (see
//! [`super::Topology`]) and the rest goes on. This file only lists what is
//! there, in the netlist's own ids and lines; what it means to a reviewer is
//! said elsewhere. Each kind is listed up to [`MAX_LISTED`] faults and counted in
//! full, so that a netlist of nothing but faults stays within memory.

use super::function::Function;
use super::graph::Topology;
use super::histogram::reader_counts;
use super::id::{GateId, NetId};
use super::model::{Driver, Netlist};
use fixedbitset::FixedBitSet;
use std::collections::{BTreeMap, VecDeque};

/// Most faults listed of one kind.
pub const MAX_LISTED: usize = 1000;
/// Most nets listed of one loop.
pub const MAX_LOOP_NETS: usize = 256;

/// What is wrong.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum FaultKind {
    /// A net is read or leaves by a port, and nothing drives it.
    NoDriver,
    /// A net has several drivers.
    DrivenTwice,
    /// A combinational loop.
    Loop,
    /// Nothing reads the net and it leaves by no port.
    NoReader,
    /// A gate with inputs whose output constants alone decide.
    AlwaysConstant,
}

impl FaultKind {
    /// All kinds.
    pub const ALL: [Self; 5] = [
        Self::NoDriver,
        Self::DrivenTwice,
        Self::Loop,
        Self::NoReader,
        Self::AlwaysConstant,
    ];
}

/// One fault.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Fault {
    /// What is wrong.
    pub kind: FaultKind,
    /// The net; of a loop its nets in signal order, each read by the next and
    /// the last by the first.
    pub nets: Vec<NetId>,
    /// Source lines, 0 when unknown: of a net without driver its first reader,
    /// of a net driven twice every driver, of a loop the gate of each net, else
    /// the driver.
    pub lines: Vec<u32>,
    /// How many nets of the loop are not listed.
    pub left_out: usize,
    /// The constant of an [`FaultKind::AlwaysConstant`].
    pub value: Option<bool>,
}

/// All faults of a netlist.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Health {
    /// The faults by kind, then in net order, each kind up to [`MAX_LISTED`].
    pub faults: Vec<Fault>,
    counts: BTreeMap<FaultKind, usize>,
}

impl Health {
    /// Looks for faults in `netlist`.
    pub fn of(netlist: &Netlist, topology: &Topology) -> Self {
        let mut health = Self::default();
        let mut readers = reader_counts(netlist);
        for property in netlist.properties() {
            readers[property.signal.net.index()] += 1;
        }
        health.find_undriven(netlist, &readers);
        for contention in netlist.contended() {
            health.add(FaultKind::DrivenTwice, || Fault {
                lines: contention.drivers.iter().map(|&(_, line)| line).collect(),
                ..plain(FaultKind::DrivenTwice, contention.net, 0)
            });
        }
        health.find_loops(netlist, topology);
        for net in netlist.nets() {
            let driver = netlist.driver(net);
            let driven = !matches!(driver, Driver::None | Driver::Constant(_));
            if driven && readers[net.index()] == 0 {
                let line = driver_line(netlist, driver);
                health.add(FaultKind::NoReader, || {
                    plain(FaultKind::NoReader, net, line)
                });
            }
        }
        health.find_constants(netlist, topology);
        health
    }

    /// How many faults of `kind` there are, listed or not.
    pub fn count(&self, kind: FaultKind) -> usize {
        self.counts.get(&kind).copied().unwrap_or(0)
    }

    fn add(&mut self, kind: FaultKind, fault: impl FnOnce() -> Fault) {
        let count = self.counts.entry(kind).or_insert(0);
        *count += 1;
        if *count <= MAX_LISTED {
            self.faults.push(fault());
        }
    }

    fn find_undriven(&mut self, netlist: &Netlist, readers: &[u32]) {
        let bare = |net: NetId| matches!(netlist.driver(net), Driver::None);
        let mut first_line: BTreeMap<NetId, u32> = netlist
            .nets()
            .filter(|&net| bare(net) && readers[net.index()] > 0)
            .map(|net| (net, 0))
            .collect();
        if first_line.is_empty() {
            return;
        }
        let mut note = |net: NetId, line: u32| {
            if let Some(slot) = first_line.get_mut(&net)
                && (*slot == 0 || (line != 0 && line < *slot))
            {
                *slot = line;
            }
        };
        for gate in netlist.gates() {
            for &net in netlist.fan_ins(gate).iter().filter(|&&net| bare(net)) {
                note(net, netlist.gate_line(gate));
            }
        }
        for output in netlist.outputs() {
            note(output.signal.net, output.line);
        }
        for register in netlist.registers() {
            note(register.input.net, register.line);
            if let Some(control) = register.control {
                note(control, register.line);
            }
        }
        for each in netlist.boxes() {
            for &net in &each.inputs {
                note(net, each.line);
            }
        }
        for (net, line) in first_line {
            self.add(FaultKind::NoDriver, || {
                plain(FaultKind::NoDriver, net, line)
            });
        }
    }

    fn find_loops(&mut self, netlist: &Netlist, topology: &Topology) {
        let mut inside = FixedBitSet::with_capacity(netlist.net_count());
        for component in &topology.loops {
            inside.extend(component.iter().map(|net| net.index()));
            let cycle = cycle_through(netlist, component[0], &inside);
            for net in component {
                inside.set(net.index(), false);
            }
            let left_out = cycle.len().saturating_sub(MAX_LOOP_NETS);
            let nets: Vec<NetId> = cycle.into_iter().take(MAX_LOOP_NETS).collect();
            let lines = nets
                .iter()
                .map(|&net| driver_line(netlist, netlist.driver(net)))
                .collect();
            self.add(FaultKind::Loop, || Fault {
                kind: FaultKind::Loop,
                nets,
                lines,
                left_out,
                value: None,
            });
        }
    }

    fn find_constants(&mut self, netlist: &Netlist, topology: &Topology) {
        let mut known = Known::new(netlist);
        let mut found = Vec::new();
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            let fan_ins = netlist.fan_ins(gate);
            if topology.is_cut(output) {
                continue;
            }
            if let Some(value) = known.gate(netlist, gate) {
                known.set(output, value);
                if !fan_ins.is_empty() {
                    found.push((output, gate, value));
                }
            }
        }
        found.sort_unstable_by_key(|&(net, ..)| net);
        for (net, gate, value) in found {
            self.add(FaultKind::AlwaysConstant, || Fault {
                value: Some(value),
                ..plain(FaultKind::AlwaysConstant, net, netlist.gate_line(gate))
            });
        }
    }
}

fn plain(kind: FaultKind, net: NetId, line: u32) -> Fault {
    Fault {
        kind,
        nets: vec![net],
        lines: vec![line],
        left_out: 0,
        value: None,
    }
}

fn driver_line(netlist: &Netlist, driver: Driver) -> u32 {
    match driver {
        Driver::Gate(gate) => netlist.gate_line(gate),
        Driver::Register(id) => netlist.registers()[id.index()].line,
        Driver::Box(id) => netlist.boxes()[id.index()].line,
        Driver::None | Driver::Input(_) | Driver::Constant(_) | Driver::Many(_) => 0,
    }
}

/// A shortest loop through `start`, in signal order, found breadth first over
/// the fan-ins that lie `inside` the component.
fn cycle_through(netlist: &Netlist, start: NetId, inside: &FixedBitSet) -> Vec<NetId> {
    let mut read_by: BTreeMap<NetId, NetId> = BTreeMap::new();
    let mut queue = VecDeque::from([start]);
    while let Some(net) = queue.pop_front() {
        let Driver::Gate(gate) = netlist.driver(net) else {
            continue;
        };
        for &from in netlist.fan_ins(gate) {
            if from == start {
                let mut cycle = vec![start];
                let mut at = net;
                while at != start {
                    cycle.push(at);
                    at = read_by[&at];
                }
                return cycle;
            }
            if inside.contains(from.index()) && !read_by.contains_key(&from) {
                read_by.insert(from, net);
                queue.push_back(from);
            }
        }
    }
    // Not reached for a strongly connected component.
    vec![start]
}

/// Nets known to be constant, by propagation of constants alone.
pub(super) struct Known {
    is: FixedBitSet,
    one: FixedBitSet,
    any: bool,
}

impl Known {
    pub(super) fn new(netlist: &Netlist) -> Self {
        let mut known = Self {
            is: FixedBitSet::with_capacity(netlist.net_count()),
            one: FixedBitSet::with_capacity(netlist.net_count()),
            any: false,
        };
        for net in netlist.nets() {
            if let Driver::Constant(value) = netlist.driver(net) {
                known.set(net, value);
            }
        }
        known
    }

    pub(super) fn set(&mut self, net: NetId, value: bool) {
        self.any = true;
        self.is.insert(net.index());
        self.one.set(net.index(), value);
    }

    pub(super) fn get(&self, net: NetId) -> Option<bool> {
        self.is
            .contains(net.index())
            .then(|| self.one.contains(net.index()))
    }

    pub(super) fn gate(&self, netlist: &Netlist, gate: GateId) -> Option<bool> {
        let fan_ins = netlist.fan_ins(gate);
        match netlist.function(gate) {
            Function::Table(table) => {
                let mut rest = *table;
                if self.any {
                    for (pin, &net) in fan_ins.iter().enumerate() {
                        if let Some(value) = self.get(net) {
                            rest = rest.cofactor(pin, value);
                        }
                    }
                }
                if rest.bits() == 0 {
                    Some(false)
                } else {
                    (rest.complement().bits() == 0).then_some(true)
                }
            }
            Function::Cover(cover) => {
                let mut all_false = true;
                for cube in cover.cubes() {
                    let mut value = Some(true);
                    for (pin, inverted) in cube {
                        match self.get(fan_ins[pin]) {
                            Some(bit) if bit == inverted => {
                                value = Some(false);
                                break;
                            }
                            Some(_) => {}
                            None => value = None,
                        }
                    }
                    match value {
                        Some(true) => return Some(!cover.is_complemented()),
                        Some(false) => {}
                        None => all_false = false,
                    }
                }
                all_false.then_some(cover.is_complemented())
            }
        }
    }
}
