//! How late a chain's results can really settle, where the longest path may lie:
//! chains built as skip, and chains whose rebuild is recommended because of it.

use super::record::{ChainRecord, Exercised};
use crate::chain::Chain;
use crate::netlist::{NetId, Netlist, Topology};
use crate::prove::{Effort, Timed};
use crate::timing::Timing;

/// Chains looked at in one netlist.
const MOST_CHAINS: usize = 16;
/// Nets below one chain, and timed variables.
const MOST_NETS: usize = 60_000;

/// Notes for each chain that asks for it whether values exercise the longest path
/// to its results.
pub fn note(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    chains: &[Chain],
    conflicts: u64,
    records: &mut [ChainRecord],
) {
    let timed = Timed {
        netlist,
        topology,
        delays: |gate| timing.delays.of_gate(netlist, gate),
        arrivals: &timing.arrivals.by_net,
        effort: Effort {
            conflicts,
            nodes: MOST_NETS,
        },
    };
    let asks = |record: &ChainRecord| {
        let gains = record.proposals.iter().any(|each| each.recommended);
        record.built_as.name == "skip" || gains && record.on_longest_path
    };
    let asking = chains
        .iter()
        .zip(records)
        .filter(|(_, record)| asks(record));
    for (chain, record) in asking.take(MOST_CHAINS) {
        let positions = chain.positions.iter();
        let results = positions.flat_map(|bits| bits.sums.iter().chain(&bits.carries));
        let nets: Vec<NetId> = results.map(|signal| signal.net).collect();
        let settles = timed.settles(&nets);
        let verdict = match settles.exercised {
            Some(depth) if depth == settles.longest => "possible",
            Some(_) => "impossible",
            None => "undecided",
        };
        record.depth.exercised = Some(Exercised {
            verdict: verdict.to_owned(),
            depth: settles.exercised.map(|ticks| timing.time(ticks)),
        });
    }
}
