//! What is counted of a carry network: cells, levels, readers, wires.
//!
//! All by one pass over the nodes and the signals. Figures are of what some carry
//! or sum is made from; a scheme may state more than it needs. As the literature
//! counts them: R. Zimmermann and D. Harris count cells and readers without the
//! buffers of drawings, tracks by the wires that cross between two columns.

use super::carry_network::CarryNetwork;
use super::signals::{Carry, SignalNode};

impl CarryNetwork {
    /// Combine nodes some carry or sum is made from: the cells of a prefix
    /// network.
    pub fn cells(&self) -> usize {
        let used = self.used();
        used[self.leaf_count()..].iter().filter(|&&u| u).count()
    }

    /// Combine nodes on the longest path to each node.
    pub fn node_levels(&self) -> Vec<u32> {
        let mut levels = vec![0; self.nodes().len()];
        for i in self.leaf_count()..levels.len() {
            let deepest = self.parts_at(i).iter().map(|part| levels[part.index()]);
            levels[i] = 1 + deepest.max().unwrap_or(0);
        }
        levels
    }

    /// Combine nodes on the longest path to any carry. Of signals an AND or OR
    /// counts half, rounded up at the end, since a combine node is both, and a
    /// two-way choice counts whole.
    pub fn levels(&self) -> usize {
        let spans = self.node_levels();
        let mut halves: Vec<u32> = Vec::with_capacity(self.signal_ids().len());
        for signal in self.signal_ids() {
            let deepest = self.arguments(signal).iter().map(|id| halves[id.index()]);
            let below = deepest.max().unwrap_or(0);
            halves.push(match self.signal(signal) {
                SignalNode::Generate(node) | SignalNode::Propagate(node) => 2 * spans[node.index()],
                SignalNode::Either(_) | SignalNode::HalfSum(_) => 0,
                SignalNode::And(_) | SignalNode::Or(_) => below + 1,
                SignalNode::Xor(..) => below,
                SignalNode::Select { .. } => below + 2,
            });
        }
        let deepest = (0..self.positions()).map(|position| match self.carry(position) {
            Carry::Span(node) => spans[node.index()],
            Carry::Signal(signal) => halves[signal.index()].div_ceil(2),
        });
        deepest.max().unwrap_or(0) as usize
    }

    /// Most readers of one node or signal: what some carry or sum needs, and one
    /// more where it is itself a carry whose sum reads it. Drawn networks put
    /// buffers between rows; here there are none.
    pub fn largest_fan_out(&self) -> usize {
        let used = self.used();
        let used_signals = self.used_signals();
        let mut readers = vec![0usize; self.nodes().len()];
        let mut of_signal = vec![0usize; used_signals.len()];
        for position in 0..self.positions() {
            match self.carry(position) {
                Carry::Span(node) => readers[node.index()] += 1,
                Carry::Signal(signal) => of_signal[signal.index()] += 1,
            }
        }
        for signal in self.signal_ids().filter(|id| used_signals[id.index()]) {
            for argument in self.arguments(signal) {
                of_signal[argument.index()] += 1;
            }
        }
        for signal in self.signal_ids() {
            if let SignalNode::Generate(node) | SignalNode::Propagate(node) = self.signal(signal) {
                readers[node.index()] += std::mem::take(&mut of_signal[signal.index()]);
            }
        }
        for i in (self.leaf_count()..used.len()).filter(|&i| used[i]) {
            for part in self.parts_at(i) {
                readers[part.index()] += 1;
            }
        }
        readers.into_iter().chain(of_signal).max().unwrap_or(0)
    }

    /// Most parts of one combine node some carry needs; 1 when there is none.
    pub fn largest_valency(&self) -> usize {
        let used = self.used();
        let combines = (self.leaf_count()..used.len()).filter(|&i| used[i]);
        combines.map(|i| self.parts_at(i).len()).max().unwrap_or(1)
    }

    /// Rows of the network as its publication draws it; where none are stated,
    /// its levels. A drawing may have a row more than the longest path has cells.
    pub fn rows(&self) -> usize {
        let used = self.used();
        let levels = self.node_levels();
        let cells = self.nodes().skip(self.leaf_count());
        let rows = cells
            .filter(|node| used[node.index()])
            .map(|node| self.row(node, &levels));
        rows.max().unwrap_or(0) as usize
    }

    /// Most readers of one column in one row, its own continuation among them: the
    /// fan-out of the taxonomy of prefix networks, whose drawings put a buffer
    /// where a column has no cell.
    pub fn row_fan_out(&self) -> usize {
        let wires = self.wires();
        let same = |a: &Wire, b: &Wire| (a.row, a.from) == (b.row, b.from);
        let most = wires.chunk_by(same).map(<[Wire]>::len).max();
        most.map_or(1, |readers| readers + 1)
    }

    /// Most wires of one row of cells that run between two neighbouring columns:
    /// the tracks of the taxonomy of prefix networks (D. Harris 2003). A wire
    /// runs from the column of what is read, its most significant position, to
    /// the reader's; one that several read runs once.
    pub fn wire_tracks(&self) -> usize {
        let wires = self.wires();
        let mut edges: Vec<(u32, i32, i32)> = Vec::with_capacity(2 * wires.len());
        let same = |a: &Wire, b: &Wire| (a.row, a.from) == (b.row, b.from);
        for wire in wires.chunk_by(same) {
            // The furthest reader comes last.
            let Wire { row, from, to } = wire[wire.len() - 1];
            edges.extend([(row, from, 1), (row, to, -1)]);
        }
        edges.sort_unstable();
        let (mut most, mut crossing) = (0, 0);
        for (_, _, step) in edges {
            crossing += step;
            most = most.max(crossing);
        }
        most as usize
    }

    /// The wires from column to column, ascending.
    fn wires(&self) -> Vec<Wire> {
        let used = self.used();
        let levels = self.node_levels();
        let mut wires = Vec::new();
        for node in self.nodes().skip(self.leaf_count()) {
            if !used[node.index()] {
                continue;
            }
            let (row, to) = (self.row(node, &levels), self.span(node).high);
            for part in self.parts_at(node.index()) {
                let from = self.span(*part).high;
                if from < to {
                    wires.push(Wire { row, from, to });
                }
            }
        }
        wires.sort_unstable();
        wires
    }
}

/// A wire of a drawn network, from the column read to the reader's.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Wire {
    row: u32,
    from: i32,
    to: i32,
}
