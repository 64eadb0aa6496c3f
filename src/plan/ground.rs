//! What every dry run on one netlist shares, computed once.
//!
//! Readers, uses, the rank of every gate in topological order, and the ends of
//! paths sorted by arrival and by net. All of it is linear in the netlist.

use super::settings::Settings;
use crate::netlist::histogram::reader_counts;
use crate::netlist::{Driver, GateId, NetId, Netlist, Readers, Topology};
use crate::timing::{
    End, EndGroup, NEVER, PathKind, StartGroup, Timing, end_arrival, end_net, ends,
};

/// See the head of the module.
pub struct Ground<'a> {
    /// The netlist.
    pub netlist: &'a Netlist,
    /// Its topology.
    pub topology: &'a Topology,
    /// Its timing under the model of the settings.
    pub timing: &'a Timing,
    /// The settings.
    pub settings: &'a Settings,
    pub(super) readers: Readers,
    uses: Vec<u32>,
    ranks: Vec<u32>,
    ends_by_net: Vec<(NetId, End)>,
    /// For each group of starts that occurs, all ends, the latest first.
    ends_by_arrival: Vec<(StartGroup, Vec<(i32, End)>)>,
}

impl<'a> Ground<'a> {
    /// Prepares `netlist`; the timing must be its own, under the model of the
    /// settings.
    pub fn of(
        netlist: &'a Netlist,
        topology: &'a Topology,
        timing: &'a Timing,
        settings: &'a Settings,
    ) -> Self {
        let mut uses = reader_counts(netlist);
        for property in netlist.properties() {
            uses[property.signal.net.index()] += 1;
        }
        let mut ranks = vec![0; netlist.gate_count()];
        for (rank, gate) in topology.order.iter().enumerate() {
            ranks[gate.index()] = rank as u32;
        }
        let mut ends_by_net: Vec<(NetId, End)> = ends(netlist, topology)
            .filter_map(|end| Some((end_net(netlist, end)?, end)))
            .collect();
        ends_by_net.sort_unstable();
        let ends_by_arrival = timing
            .by_start()
            .map(|(start, by_net)| {
                let mut list: Vec<(i32, End)> = ends(netlist, topology)
                    .map(|end| (end_arrival(netlist, &timing.delays, by_net, end), end))
                    .filter(|&(arrival, _)| arrival != NEVER)
                    .collect();
                list.sort_unstable_by_key(|&(arrival, end)| (std::cmp::Reverse(arrival), end));
                (start, list)
            })
            .collect();
        Self {
            netlist,
            topology,
            timing,
            settings,
            readers: Readers::of(netlist),
            uses,
            ranks,
            ends_by_net,
            ends_by_arrival,
        }
    }

    /// How many pins, ports and properties read a net.
    pub(super) fn uses(&self, net: NetId) -> u32 {
        self.uses[net.index()]
    }

    pub(super) fn rank(&self, gate: GateId) -> u32 {
        self.ranks[gate.index()]
    }

    /// The gate that drives a net, unless the net is cut.
    pub(super) fn gate_of(&self, net: NetId) -> Option<GateId> {
        match self.netlist.driver(net) {
            Driver::Gate(gate) if !self.topology.is_cut(net) => Some(gate),
            _ => None,
        }
    }

    /// The ends that read a net.
    pub(super) fn ends_at(&self, net: NetId) -> impl Iterator<Item = End> + '_ {
        let from = self.ends_by_net.partition_point(|&(each, _)| each < net);
        self.ends_by_net[from..]
            .iter()
            .take_while(move |&&(each, _)| each == net)
            .map(|&(_, end)| end)
    }

    /// The latest end of a kind for which `wanted` holds.
    pub(super) fn latest_end(
        &self,
        kind: PathKind,
        wanted: impl Fn(End) -> bool,
    ) -> Option<(i32, End)> {
        let (_, list) = self
            .ends_by_arrival
            .iter()
            .find(|&&(start, _)| start == kind.start)?;
        list.iter()
            .find(|&&(_, end)| end.is_in(self.netlist, kind.end) && wanted(end))
            .copied()
    }

    /// The ends of a kind whose latest path arrives at `time`.
    pub(super) fn ends_at_time(&self, kind: PathKind, time: i32) -> impl Iterator<Item = End> + '_ {
        let list = self
            .ends_by_arrival
            .iter()
            .find(|&&(start, _)| start == kind.start)
            .map_or(&[][..], |(_, list)| list);
        let from = list.partition_point(|&(arrival, _)| arrival > time);
        list[from..]
            .iter()
            .take_while(move |&&(arrival, _)| arrival == time)
            .map(|&(_, end)| end)
            .filter(move |end| end.group(self.netlist) == Some(kind.end))
    }

    /// The groups of ends that occur.
    pub(super) fn end_groups(&self) -> Vec<EndGroup> {
        self.timing.by_end().map(|(group, _)| group).collect()
    }
}
