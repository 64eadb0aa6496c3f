//! Depth, fan-in and fan-out, taken over from netlist and timing into the
//! record. Long lists are cut to a bound that does not grow with the netlist.

use super::carried::{Carried, Cones};
use super::gate_words;
use super::names::port_buses;
use super::record::{
    Depth, DepthBar, FanIn, FanInBar, FanOut, FanOutBar, PathStep as StepRecord, PortDepth,
};
use crate::netlist::{NetId, Netlist, Topology, histogram};
use crate::timing::effort::FO4;
use crate::timing::{
    DelayModel, End, EndClass, KindTiming, NEVER, PathKind, PathStep, StartClass, StartGroup, Time,
    Timing, end_arrival, ends, longest_free_buffers, start_group, start_time,
};
use std::collections::BTreeMap;

/// Most steps of a path in the record, half from each end.
pub const PATH_STEPS: usize = 512;
/// Most buses in the record.
const PORTS: usize = 256;

/// Fan-in over all gates.
pub fn fan_in(netlist: &Netlist) -> FanIn {
    let measured = histogram::fan_in(netlist);
    let bar = |&(fan_in, gates): &(usize, usize)| FanInBar {
        fan_in: fan_in as u64,
        gates: gates as u64,
    };
    FanIn {
        largest: measured.largest as u64,
        mean: rounded(measured.mean),
        histogram: measured.bins.iter().map(bar).collect(),
    }
}

/// Fan-out over all nets.
pub fn fan_out(netlist: &Netlist) -> FanOut {
    let measured = histogram::fan_out(netlist);
    let bar = |&(fan_out, nets): &(usize, usize)| FanOutBar {
        fan_out: fan_out as u64,
        nets: nets as u64,
    };
    FanOut {
        largest: measured.largest as u64,
        mean: rounded(measured.mean),
        histogram: measured.bins.iter().map(bar).collect(),
    }
}

/// A mean to three places: what more digits say is the order of additions.
fn rounded(mean: f64) -> f64 {
    (mean * 1000.0).round() / 1000.0
}

/// Where chains run, for the steps of a path.
pub struct ChainMap<'a> {
    /// Sums and carries by net.
    pub carried: &'a Carried,
    /// Gates of each chain.
    pub cones: &'a Cones,
    /// Ids of the chains.
    pub ids: &'a [String],
}

/// Depth of the block. `path` is its longest path and `kind` that path's kind.
pub fn depth(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    model: DelayModel,
    longest: Option<(&KindTiming, &[PathStep])>,
    chains: &ChainMap<'_>,
) -> Depth {
    let mut bars: BTreeMap<Time, u64> = BTreeMap::new();
    for end in ends(netlist, topology) {
        let at = timing.end_time(netlist, end);
        *bars
            .entry(if at == NEVER {
                Time::ZERO
            } else {
                timing.time(at)
            })
            .or_insert(0) += 1;
    }
    let bar = |(depth, outputs)| DepthBar { depth, outputs };
    let (longest_path, longest_path_left_out) = match longest {
        Some((kind, path)) => path_record(netlist, topology, timing, kind, path, chains),
        None => (Vec::new(), 0),
    };
    Depth {
        longest: timing.time(timing.longest()),
        longest_without_assumptions: None,
        longest_through_transparent: None,
        late_ends: None,
        least_to_spare: None,
        unit: model.unit_word().to_owned(),
        longest_free_buffers: match model {
            DelayModel::Unit => Some(model.time(longest_free_buffers(netlist, topology))),
            DelayModel::Pairs | DelayModel::LogicalEffort | DelayModel::Table(_) => None,
        },
        longest_in_fo4: in_fo4(model, timing.longest()),
        histogram: bars.into_iter().map(bar).collect(),
        longest_path,
        longest_path_left_out,
        ports: ports(netlist, topology, timing),
    }
}

/// Ticks of logical effort in inverters that drive four like them, each 5 τ.
fn in_fo4(model: DelayModel, ticks: i32) -> Option<Time> {
    (model == DelayModel::LogicalEffort).then(|| model.time(ticks / FO4 as i32))
}

fn path_record(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    kind: &KindTiming,
    path: &[PathStep],
    chains: &ChainMap<'_>,
) -> (Vec<StepRecord>, u64) {
    let half = PATH_STEPS / 2;
    let (front, back, left_out) = if path.len() > PATH_STEPS {
        let hidden = path.len() - PATH_STEPS;
        (&path[..half], &path[path.len() - half..], hidden)
    } else {
        (path, &[][..], 0)
    };
    let steps = front.iter().chain(back);
    let mut record: Vec<StepRecord> = steps
        .map(|step| step_record(netlist, topology, timing, step, chains))
        .collect();
    record.extend(end_record(netlist, timing, kind));
    (record, left_out as u64)
}

fn step_record(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    step: &PathStep,
    chains: &ChainMap<'_>,
) -> StepRecord {
    let PathStep {
        net,
        gate,
        fan_in,
        line,
        arrival,
    } = *step;
    let chain = gate.and_then(|gate| chains.cones.chain_of(gate));
    let member = chain.and_then(|chain| {
        let members = chains.carried.of_net(net);
        members.iter().find(|member| member.chain == chain)
    });
    StepRecord {
        net: netlist.net_name(net),
        gate: match gate {
            Some(gate) => gate_words::gate(netlist, gate),
            None => gate_words::driver(netlist, topology, net),
        },
        line: (line > 0).then_some(u64::from(line)),
        fan_in: gate.map(|_| fan_in as u64),
        arrival: timing.time(arrival),
        chain: chain.map(|chain| chains.ids[chain as usize].clone()),
        bit: member.map(|member| u64::from(member.position)),
    }
}

/// The end of a path, where it has a name of its own.
fn end_record(netlist: &Netlist, timing: &Timing, kind: &KindTiming) -> Option<StepRecord> {
    let (gate, line) = match kind.end {
        End::Output(i) => {
            let output = &netlist.outputs()[i as usize];
            output.name?;
            ("output", output.line)
        }
        End::RegisterInput(id) => ("into register", netlist.registers()[id.index()].line),
        End::RegisterControl(id) => ("controls register", netlist.registers()[id.index()].line),
        End::BoxInput(id, _) => ("into unknown instance", netlist.boxes()[id.index()].line),
        End::Cut(_) => return None,
    };
    Some(StepRecord {
        net: kind.end.describe(netlist),
        gate: gate.to_owned(),
        line: (line > 0).then_some(u64::from(line)),
        fan_in: None,
        arrival: timing.time(kind.longest),
        chain: None,
        bit: None,
    })
}

fn ports(netlist: &Netlist, topology: &Topology, timing: &Timing) -> Vec<PortDepth> {
    // The longest path from an input to an end of one class.
    let from = |net: NetId, class: EndClass| {
        let start = start_group(netlist, topology, net)?;
        let tails = timing.by_end().filter(|&(end, _)| {
            let kind = PathKind {
                start: StartGroup {
                    way: end.way,
                    ..start
                },
                end,
            };
            end.class == class && timing.kind(kind).is_some()
        });
        let tail = tails.map(|(_, by_net)| by_net[net.index()]).max();
        let tail = tail.filter(|&tail| tail != NEVER)?;
        let start = start_time(netlist, timing.delays.model(), net);
        Some(timing.time(start + tail))
    };
    // The longest path to an output from a start of one class.
    let to = |output: usize, class: StartClass| {
        let end = End::Output(output as u32);
        let group = end.group(netlist)?;
        let starts = timing.by_start().filter(|&(start, _)| {
            start.class == class && timing.kind(PathKind::from_to(start, group)).is_some()
        });
        let at = starts
            .map(|(_, by_net)| end_arrival(netlist, &timing.delays, by_net, end))
            .max();
        at.filter(|&at| at != NEVER).map(|at| timing.time(at))
    };
    let inputs = netlist.inputs();
    let names: Vec<String> = inputs.iter().map(|&n| netlist.net_name(n)).collect();
    let mut ports = Vec::new();
    for (bus, range) in port_buses(&names) {
        let deepest = |class| {
            let nets = inputs[range.clone()].iter();
            nets.filter_map(|&net| from(net, class)).max()
        };
        ports.push(PortDepth {
            bus,
            deepest_in: deepest(EndClass::Register),
            deepest_out: None,
            deepest_through: deepest(EndClass::Output),
        });
    }
    let outputs = netlist.outputs();
    let names: Vec<String> = outputs.iter().map(|o| netlist.output_name(o)).collect();
    for (bus, range) in port_buses(&names) {
        let deepest = |class| range.clone().filter_map(|i| to(i, class)).max();
        ports.push(PortDepth {
            bus,
            deepest_in: None,
            deepest_out: deepest(StartClass::Register),
            deepest_through: deepest(StartClass::Input),
        });
    }
    if ports.len() > PORTS {
        // The deepest stay; the order of the netlist is kept among them.
        let depth = |port: &PortDepth| {
            let all = [port.deepest_in, port.deepest_out, port.deepest_through];
            std::cmp::Reverse(all.into_iter().flatten().max())
        };
        let mut order: Vec<usize> = (0..ports.len()).collect();
        order.sort_by_key(|&i| depth(&ports[i]));
        order.truncate(PORTS);
        order.sort_unstable();
        ports = order.into_iter().map(|i| ports[i].clone()).collect();
    }
    ports
}
