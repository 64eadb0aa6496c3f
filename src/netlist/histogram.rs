//! How wide the gates of a netlist are and how many readers its nets have.
//!
//! Fan-in is counted over gates, constants written as gates as fan-in 0;
//! fan-out over nets, where a reader is a gate pin, an output port, a register
//! input or control, or a box pin. A constant of the format itself is no net
//! here. Both are one pass over flat arrays.

use super::model::{Driver, Netlist};
use std::collections::BTreeMap;

/// A histogram of whole numbers.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Histogram {
    /// Value and how often it occurs, smallest value first.
    pub bins: Vec<(usize, usize)>,
    /// The largest value, 0 when nothing was counted.
    pub largest: usize,
    /// The mean, 0 when nothing was counted.
    pub mean: f64,
}

impl Histogram {
    /// Counts `values`.
    pub fn of(values: impl IntoIterator<Item = usize>) -> Self {
        // Small values, nearly all there are, are counted without a search.
        let (mut small, mut large) = ([0usize; 64], BTreeMap::new());
        let (mut count, mut sum) = (0usize, 0u64);
        for value in values {
            count += 1;
            sum += value as u64;
            match small.get_mut(value) {
                Some(slot) => *slot += 1,
                None => *large.entry(value).or_insert(0) += 1,
            }
        }
        let bins: Vec<_> = small
            .into_iter()
            .enumerate()
            .filter(|&(_, n)| n > 0)
            .chain(large)
            .collect();
        Self {
            largest: bins.last().map_or(0, |&(value, _)| value),
            mean: if count == 0 {
                0.0
            } else {
                sum as f64 / count as f64
            },
            bins,
        }
    }
}

/// Fan-in over all gates.
pub fn fan_in(netlist: &Netlist) -> Histogram {
    Histogram::of(netlist.gates().map(|gate| netlist.fan_ins(gate).len()))
}

/// Fan-out over all nets.
pub fn fan_out(netlist: &Netlist) -> Histogram {
    let readers = reader_counts(netlist);
    Histogram::of(
        netlist
            .nets()
            .filter(|&net| !matches!(netlist.driver(net), Driver::Constant(_)))
            .map(|net| readers[net.index()] as usize),
    )
}

/// Number of readers of every net.
pub fn reader_counts(netlist: &Netlist) -> Vec<u32> {
    let mut counts = vec![0; netlist.net_count()];
    for gate in netlist.gates() {
        for net in netlist.fan_ins(gate) {
            counts[net.index()] += 1;
        }
    }
    let outputs = netlist.outputs().iter().map(|output| output.signal.net);
    let registers = netlist
        .registers()
        .iter()
        .flat_map(|register| std::iter::once(register.input.net).chain(register.control));
    let boxes = netlist
        .boxes()
        .iter()
        .flat_map(|each| &each.inputs)
        .copied();
    for net in outputs.chain(registers).chain(boxes) {
        counts[net.index()] += 1;
    }
    counts
}
