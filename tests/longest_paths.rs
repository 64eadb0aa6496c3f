//! Arrival and required times against longest paths of petgraph.
//!
//! Source outside the project: petgraph's graph, its topological order and its
//! strongly connected components. The test builds a `DiGraph` of its own from the
//! drivers and pins of the netlist, with the nets of every loop cut free, and takes
//! the longest path over petgraph's order; the timing under test is not asked for
//! anything. Every net of every open circuit and of every fixture is compared.

#[path = "support/reading.rs"]
mod reading;
mod support;

use carrywise::netlist::{Driver, NetId, Netlist, Topology};
use carrywise::timing::{DelayModel, Timing};
use petgraph::Direction;
use petgraph::graph::{DiGraph, NodeIndex};
use reading::read;
use std::fs;
use std::path::{Path, PathBuf};
use support::datasets;

/// A net, or the pins of a gate that drives a net from which paths start anew.
type Graph = DiGraph<(), ()>;

const NONE: i64 = i64::MIN;

struct Reference {
    graph: Graph,
    order: Vec<NodeIndex>,
    /// By class (input, register, box): the nodes at which paths start.
    starts: [Vec<NodeIndex>; 3],
    /// By class (output, register, box): the nodes at which they end.
    ends: [Vec<NodeIndex>; 3],
}

impl Reference {
    fn of(netlist: &Netlist) -> Self {
        let mut graph = Graph::new();
        for _ in netlist.nets() {
            graph.add_node(());
        }
        let node = |net: NetId| NodeIndex::new(net.index());
        for gate in netlist.gates() {
            for &net in netlist.fan_ins(gate) {
                graph.add_edge(node(net), node(netlist.gate_output(gate)), ());
            }
        }
        let mut free = vec![false; netlist.net_count()];
        for component in petgraph::algo::kosaraju_scc(&graph) {
            let itself = graph.contains_edge(component[0], component[0]);
            if component.len() > 1 || itself {
                for node in component {
                    free[node.index()] = true;
                }
            }
        }
        for net in netlist.nets() {
            free[net.index()] |= matches!(netlist.driver(net), Driver::None | Driver::Many(_));
        }
        // A gate that drives a free net ends its paths at a node of its own.
        let mut graph = Graph::new();
        for _ in netlist.nets() {
            graph.add_node(());
        }
        let mut ends = [Vec::new(), Vec::new(), Vec::new()];
        for gate in netlist.gates() {
            let output = netlist.gate_output(gate);
            let to = if free[output.index()] {
                ends[0].push(graph.add_node(()));
                ends[0][ends[0].len() - 1]
            } else {
                node(output)
            };
            for &net in netlist.fan_ins(gate) {
                graph.add_edge(node(net), to, ());
            }
        }
        for output in netlist.outputs() {
            ends[0].push(node(output.signal.net));
        }
        for register in netlist.registers() {
            ends[1].push(node(register.input.net));
            ends[1].extend(register.control.map(node));
        }
        for each in netlist.boxes() {
            ends[2].extend(each.inputs.iter().copied().map(node));
        }
        let mut starts = [Vec::new(), Vec::new(), Vec::new()];
        for net in netlist.nets() {
            let class = match netlist.driver(net) {
                _ if free[net.index()] => 0,
                Driver::Input(_) => 0,
                Driver::Register(_) => 1,
                Driver::Box(_) => 2,
                _ => continue,
            };
            starts[class].push(node(net));
        }
        let order = petgraph::algo::toposort(&graph, None).expect("loops are cut");
        Self {
            graph,
            order,
            starts,
            ends,
        }
    }

    /// The longest path from `sources` to every node, or with `direction` turned
    /// the longest from every node to them.
    fn longest(&self, sources: &[NodeIndex], direction: Direction) -> Vec<i64> {
        let mut at = vec![NONE; self.graph.node_count()];
        for source in sources {
            at[source.index()] = 0;
        }
        let forward = direction == Direction::Outgoing;
        let order: Box<dyn Iterator<Item = &NodeIndex>> = match forward {
            true => Box::new(self.order.iter()),
            false => Box::new(self.order.iter().rev()),
        };
        for &node in order {
            let from = at[node.index()];
            if from == NONE {
                continue;
            }
            for next in self.graph.neighbors_directed(node, direction) {
                let slot = &mut at[next.index()];
                *slot = (*slot).max(from + 1);
            }
        }
        at
    }
}

/// Compares every net; how many.
fn compare(name: &str, netlist: &Netlist) -> usize {
    let reference = Reference::of(netlist);
    let topology = Topology::of(netlist);
    let timing = Timing::of(netlist, &topology, DelayModel::Unit);
    let all: Vec<NodeIndex> = reference.starts.concat();
    let arrivals = reference.longest(&all, Direction::Outgoing);
    let at: Vec<Vec<i64>> = (0..3)
        .map(|class| reference.longest(&reference.starts[class], Direction::Outgoing))
        .collect();
    let tail: Vec<Vec<i64>> = (0..3)
        .map(|class| reference.longest(&reference.ends[class], Direction::Incoming))
        .collect();
    // The longest path of every kind.
    let deepest = |from: usize, to: usize| {
        let ends = reference.ends[to].iter();
        ends.map(|end| at[from][end.index()]).max().unwrap_or(NONE)
    };
    let longest: Vec<Vec<i64>> = (0..3)
        .map(|from| (0..3).map(|to| deepest(from, to)).collect())
        .collect();
    let most = longest.iter().flatten().copied().max().unwrap_or(NONE);
    assert_eq!(i64::from(timing.longest()), most.max(0), "{name}");
    for net in netlist.nets() {
        let i = net.index();
        let wanted = (arrivals[i] != NONE).then_some(arrivals[i]);
        let seen = timing.arrivals.at(net).map(i64::from);
        assert_eq!(seen, wanted, "{name}: arrival at {}", netlist.net_name(net));
        let mut least: Option<i64> = None;
        for from in 0..3 {
            for to in 0..3 {
                let (at, tail) = (at[from][i], tail[to][i]);
                if at != NONE && tail != NONE {
                    let slack = longest[from][to] - (at + tail);
                    least = Some(least.map_or(slack, |least| least.min(slack)));
                }
            }
        }
        let seen = timing.slack(net).map(|slack| i64::from(slack.ticks));
        assert_eq!(seen, least, "{name}: slack of {}", netlist.net_name(net));
        let required = timing.required(net).map(i64::from);
        let wanted = least.map(|slack| arrivals[i] + slack);
        assert_eq!(
            required,
            wanted,
            "{name}: {} must be ready",
            netlist.net_name(net)
        );
    }
    netlist.net_count()
}

fn netlists_below(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(folder) = folders.pop() {
        for entry in fs::read_dir(folder).expect("a folder") {
            let path = entry.expect("an entry").path();
            let known = path.extension().is_some_and(|extension| {
                ["blif", "aag", "aig", "gz", "zst"]
                    .iter()
                    .any(|known| extension == *known)
            });
            if path.is_dir() {
                folders.push(path);
            } else if known {
                files.push(path);
            }
        }
    }
    files.sort();
    files
}

/// Compares all files that can be read by themselves; how many files and nets.
fn compare_all(folder: &Path) -> (usize, usize) {
    let (mut files, mut nets) = (0, 0);
    for path in netlists_below(folder) {
        let name = path.to_string_lossy().into_owned();
        let bytes = fs::read(&path).expect("a file");
        let Ok(parsed) = read(&name, bytes) else {
            continue;
        };
        nets += compare(&name, &parsed.netlist);
        files += 1;
    }
    (files, nets)
}

#[test]
fn times_of_every_fixture_agree_with_petgraph() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures");
    let (files, nets) = compare_all(&folder);
    assert!(files > 60 && nets > 2_500, "{files} files, {nets} nets");
}

#[test]
fn times_of_every_open_circuit_agree_with_petgraph() {
    let Some(folder) = datasets() else { return };
    let (files, nets) = compare_all(&folder);
    assert!(files > 30 && nets > 100_000, "{files} files, {nets} nets");
}
