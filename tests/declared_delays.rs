//! Delays that a user declares from pin to pin: of boxes, and of carry cells.
//!
//! Sources outside the project: the longest path of petgraph over a graph that the
//! test builds beside the netlist; hand-worked sums in the tests; the truth table
//! of a full adder (common practice, no source).

#[path = "support/reading.rs"]
mod reading;

use carrywise::audit::record::{Audit, Limit};
use carrywise::audit::{self, Asserting, AuditError, Options, Origin};
use carrywise::format::assumptions::{self, AssumptionsFile};
use carrywise::format::cells;
use carrywise::netlist::{Netlist, Topology};
use carrywise::source::Source;
use carrywise::timing::{DelayModel, NEVER, Time, Timing};
use petgraph::graph::{DiGraph, NodeIndex};
use reading::{VARIABLE, accept, told, values};
use std::collections::BTreeMap;
use std::fmt::Write;

fn file(yaml: &str) -> AssumptionsFile {
    let source = Source {
        name: "assume.yaml".to_owned(),
        bytes: yaml.as_bytes().to_vec(),
    };
    assumptions::read(source).unwrap_or_else(|error| panic!("{error}"))
}

fn audited(netlist: &Netlist, file: &AssumptionsFile) -> Result<Audit, String> {
    let origin = Origin {
        file: "test.blif".to_owned(),
        format: carrywise::format::Format::Blif,
        sha256: String::new(),
    };
    let asserting = Asserting {
        assumptions: &file.assumptions,
        sha256: String::new(),
    };
    audit::audit_under(netlist, &origin, &Options::default(), Some(&asserting)).map_err(|error| {
        match error {
            AuditError::Misfit(misfit) => file.misfit(&misfit, "test.blif").to_string(),
            other => panic!("{other}"),
        }
    })
}

fn longest(netlist: &Netlist) -> i32 {
    Timing::of(netlist, &Topology::of(netlist), DelayModel::Unit).longest()
}

/// An inverter, a box, an inverter; and another input of the box behind two.
const BOXED: &str = ".model m\n.inputs x y\n.outputs z\n.names x a\n0 1\n.names y y1\n0 1\n\
                     .names y1 b\n0 1\n.subckt MEM A=a B=b Q=q\n.names q z\n0 1\n.end\n";

#[test]
fn a_declared_delay_lets_paths_run_through_a_box() {
    let netlist = accept("test.blif", BOXED).netlist;
    assert_eq!(longest(&netlist), 2, "y to the box");
    // Both pairs: 1 + 4 + 1 from x, 2 + 7 + 1 from y; nothing ends at the box.
    let both = file(
        "box_delay:\n- {box: MEM, from: A, to: Q, delay: 4, why: data sheet}\n\
         - {box: \"M*\", from: B, to: \"?\", delay: 7, why: data sheet}\n",
    );
    let audit = audited(&netlist, &both).expect("it fits");
    assert_eq!(audit.depth.longest, Time::whole(10));
    assert_eq!(
        audit.depth.longest_without_assumptions,
        Some(Time::whole(2))
    );
    let kinds: Vec<_> = audit
        .verdict
        .by_path_kind
        .iter()
        .map(|k| &k.path_kind)
        .collect();
    assert_eq!(kinds, ["input→output"]);
    let path: Vec<_> = audit
        .depth
        .longest_path
        .iter()
        .map(|s| s.net.as_str())
        .collect();
    assert_eq!(path, ["y", "y1", "b", "q", "z"]);
    // What limits inside the box is not known.
    assert_eq!(audit.verdict.limit, Limit::Unknown);
    let said = "the longest path runs through MEM, of which only the delay is known";
    assert!(
        audit.verdict.sentence.contains(said),
        "{}",
        audit.verdict.sentence
    );
    assert_eq!(
        audit.assumed[0].assumption,
        "MEM takes 4 gate delays from A to Q"
    );
    assert_eq!(audit.netlist.gates, 4, "as read");
    // One pair: B ends its paths at the box still, and Q starts some.
    let one = file("box_delay: [{box: MEM, from: A, to: Q, delay: 4, why: data sheet}]");
    let audit = audited(&netlist, &one).expect("it fits");
    let kinds: BTreeMap<_, _> = audit
        .verdict
        .by_path_kind
        .iter()
        .map(|kind| (kind.path_kind.as_str(), kind.longest))
        .collect();
    assert_eq!(
        kinds,
        BTreeMap::from([
            ("input→output", Time::whole(6)),
            ("input→box", Time::whole(2)),
            ("box→output", Time::whole(1)),
        ])
    );
    assert!(
        audit
            .verdict
            .sentence
            .contains("an instance without a known function (MEM)"),
        "{}",
        audit.verdict.sentence
    );
}

#[test]
fn a_box_beside_the_longest_path_hides_nothing_once_its_delay_is_declared() {
    let mut blif =
        String::from(".model m\n.inputs x y\n.outputs z s\n.subckt MEM A=y Q=q\n.names q s\n0 1\n");
    blif.push_str(".names x n0\n0 1\n");
    for i in 1..9 {
        let _ = writeln!(blif, ".names n{} n{i}\n0 1", i - 1);
    }
    blif.push_str(".names n8 z\n0 1\n.end\n");
    let netlist = accept("test.blif", &blif).netlist;
    let declared = |delay| {
        file(&format!(
            "box_delay: [{{box: MEM, from: A, to: Q, delay: {delay}, why: data sheet}}]"
        ))
    };
    let audit = audited(&netlist, &declared(3)).expect("it fits");
    assert_eq!(
        (audit.depth.longest, audit.verdict.limit),
        (Time::whole(10), Limit::Elsewhere)
    );
    assert_eq!(audit.seen.gates_without_function, 1, "it is still counted");
    let audit = audited(&netlist, &declared(30)).expect("it fits");
    assert_eq!(
        (audit.depth.longest, audit.verdict.limit),
        (Time::whole(31), Limit::Unknown)
    );
}

#[test]
fn a_loop_through_a_box_is_cut_and_told() {
    let blif = ".model m\n.inputs x\n.outputs z\n.names x q a\n11 1\n.subckt MEM A=a Q=q\n\
                .names a z\n0 1\n.end\n";
    let netlist = accept("test.blif", blif).netlist;
    let declared = file("box_delay: [{box: MEM, from: A, to: Q, delay: 3, why: data sheet}]");
    let audit = audited(&netlist, &declared).expect("it fits");
    assert_eq!(audit.verdict.limit, Limit::Unknown);
    assert!(
        audit
            .verdict
            .sentence
            .contains("a loop without a register is cut"),
        "{}",
        audit.verdict.sentence
    );
}

#[test]
fn patterns_of_boxes_and_pins_that_name_nothing_are_refused_at_their_line() {
    let netlist = accept("test.blif", BOXED).netlist;
    for (entry, said) in [
        (
            "{box: MAM, from: A, to: Q,",
            "expected a box, found none that `MAM` matches",
        ),
        (
            "{box: MEM, from: C, to: Q,",
            "expected an input of that box, found none that `C`",
        ),
        (
            "{box: MEM, from: A, to: R,",
            "expected an output of that box, found none that `R`",
        ),
    ] {
        let file = file(&format!(
            "box_delay:\n- {entry} delay: 1, why: data sheet}}\n"
        ));
        let error = audited(&netlist, &file).expect_err("it does not fit");
        assert!(error.contains(said) && error.contains(":2:"), "{error}");
    }
}

/// A random netlist with boxes, and beside it the graph of its delays.
fn random(
    seed: u64,
) -> (
    String,
    String,
    DiGraph<(), i32>,
    Vec<NodeIndex>,
    Vec<NodeIndex>,
) {
    let mut random = fastrand::Rng::with_seed(seed);
    let mut graph = DiGraph::new();
    let mut blif = String::from(".model r\n.inputs i0 i1 i2 i3\n.outputs o0 o1 o2\n");
    let mut yaml = String::from("box_delay:\n");
    let mut nets: Vec<(String, NodeIndex)> = (0..4)
        .map(|i| (format!("i{i}"), graph.add_node(())))
        .collect();
    let starts: Vec<NodeIndex> = nets.iter().map(|&(_, node)| node).collect();
    let mut boxes = 0;
    for n in 0..14 {
        let mut pick = || nets[random.usize(nets.len().saturating_sub(6)..nets.len())].clone();
        let (x, y) = (pick(), pick());
        if random.bool() {
            let node = graph.add_node(());
            graph.add_edge(x.1, node, 1);
            graph.add_edge(y.1, node, 1);
            let _ = writeln!(blif, ".names {} {} n{n}\n11 1", x.0, y.0);
            nets.push((format!("n{n}"), node));
        } else {
            let (p, q) = (graph.add_node(()), graph.add_node(()));
            let _ = writeln!(blif, ".subckt B{boxes} A={} B={} P=p{n} Q=q{n}", x.0, y.0);
            for (from, source) in [("A", x.1), ("B", y.1)] {
                for (to, sink) in [("P", p), ("Q", q)] {
                    let delay = random.i32(0..9);
                    graph.add_edge(source, sink, delay);
                    let _ = writeln!(
                        yaml,
                        "- {{box: B{boxes}, from: {from}, to: {to}, delay: {delay}, why: drawn}}"
                    );
                }
            }
            boxes += 1;
            nets.push((format!("p{n}"), p));
            nets.push((format!("q{n}"), q));
        }
    }
    let mut ends = Vec::new();
    for (i, (name, node)) in nets.iter().rev().take(3).enumerate() {
        let _ = writeln!(blif, ".names {name} o{i}\n0 1");
        let end = graph.add_node(());
        graph.add_edge(*node, end, 1);
        ends.push(end);
    }
    if boxes == 0 {
        yaml = String::from("arrival: [{ports: i0, at: 0, why: none}]\n");
    }
    (blif + ".end\n", yaml, graph, starts, ends)
}

#[test]
fn delays_through_boxes_agree_with_petgraph() {
    let mut with_boxes = 0;
    for seed in 0..60 {
        let (blif, yaml, graph, starts, ends) = random(seed);
        let netlist = accept("r.blif", &blif).netlist;
        with_boxes += usize::from(netlist.boxes().len() > 2);
        let file = file(&yaml);
        let under = file.assumptions.apply(&netlist).expect("it fits").netlist;
        let topology = Topology::of(&under);
        let timing = Timing::of(&under, &topology, DelayModel::Unit);
        // Longest path over petgraph's own order; its nodes are the test's.
        let order = petgraph::algo::toposort(&graph, None).expect("no loop");
        let mut at = vec![i32::MIN; graph.node_count()];
        for start in starts {
            at[start.index()] = 0;
        }
        for node in order {
            for edge in graph.edges(node) {
                use petgraph::visit::EdgeRef;
                let from = at[node.index()];
                if from != i32::MIN {
                    let slot = &mut at[edge.target().index()];
                    *slot = (*slot).max(from + edge.weight());
                }
            }
        }
        for (i, end) in ends.iter().enumerate() {
            let seen = timing.end_time(&under, carrywise::timing::End::Output(i as u32));
            let wanted = if at[end.index()] == i32::MIN {
                NEVER
            } else {
                at[end.index()]
            };
            assert_eq!(seen, wanted, "seed {seed}, output {i}\n{blif}\n{yaml}");
        }
    }
    assert!(with_boxes > 40, "{with_boxes}");
}

/// Full adders, one a cell; and cells of four positions, once with their inner
/// carries as outputs and once without.
const LIBRARY: &str = "\
.model FA\n.inputs A B CI\n.outputs S CO\n\
.names A B CI S\n100 1\n010 1\n001 1\n111 1\n.names A B CI CO\n11- 1\n1-1 1\n-11 1\n.end\n\
.model ADD4\n.inputs A0 A1 A2 A3 B0 B1 B2 B3 CI\n.outputs S0 S1 S2 S3 CO\n\
.names A0 B0 CI S0\n100 1\n010 1\n001 1\n111 1\n.names A0 B0 CI C0\n11- 1\n1-1 1\n-11 1\n\
.names A1 B1 C0 S1\n100 1\n010 1\n001 1\n111 1\n.names A1 B1 C0 C1\n11- 1\n1-1 1\n-11 1\n\
.names A2 B2 C1 S2\n100 1\n010 1\n001 1\n111 1\n.names A2 B2 C1 C2\n11- 1\n1-1 1\n-11 1\n\
.names A3 B3 C2 S3\n100 1\n010 1\n001 1\n111 1\n.names A3 B3 C2 CO\n11- 1\n1-1 1\n-11 1\n.end\n\
.model ADD2\n.inputs A0 A1 B0 B1 CI\n.outputs S0 S1 C0 CO\n\
.names A0 B0 CI S0\n100 1\n010 1\n001 1\n111 1\n.names A0 B0 CI C0\n11- 1\n1-1 1\n-11 1\n\
.names A1 B1 C0 S1\n100 1\n010 1\n001 1\n111 1\n.names A1 B1 C0 CO\n11- 1\n1-1 1\n-11 1\n.end\n";

const BUSES: &str = ".model m\n.inputs a[0] a[1] a[2] a[3] a[4] a[5] a[6] a[7] b[0] b[1] b[2] \
    b[3] b[4] b[5] b[6] b[7] c0\n.outputs s[0] s[1] s[2] s[3] s[4] s[5] s[6] s[7] c8\n";

/// An 8-bit adder of cells of `each` positions.
fn of_cells(each: usize) -> String {
    let mut blif = BUSES.to_owned();
    for low in (0..8).step_by(each) {
        let model = ["", "FA", "ADD2", "", "ADD4"][each];
        let _ = write!(blif, ".subckt {model} CI=c{low} CO=c{}", low + each);
        for i in 0..each {
            let pin = if each == 1 {
                String::new()
            } else {
                i.to_string()
            };
            let at = low + i;
            let _ = write!(blif, " A{pin}=a[{at}] B{pin}=b[{at}] S{pin}=s[{at}]");
            if each == 2 && i == 0 {
                let _ = write!(blif, " C0=c{}", at + 1);
            }
        }
        blif.push('\n');
    }
    blif + ".end\n"
}

fn bound(blif: &str, file: &AssumptionsFile) -> Result<Netlist, String> {
    let source = Source {
        name: "cells.blif".to_owned(),
        bytes: LIBRARY.into(),
    };
    let library = cells::read(&source).unwrap_or_else(|errors| panic!("{}", told(&errors)));
    let mut cells = library.cells;
    cells
        .declare_carry(&file.assumptions.carry_cells)
        .map_err(|misfit| file.misfit(&misfit, "cells.blif").to_string())?;
    let netlist = accept("test.blif", blif).netlist;
    let bound = cells.bind(netlist, 1_000_000);
    Ok(bound.unwrap_or_else(|fault| panic!("{fault}")).netlist)
}

#[test]
fn carry_cells_take_their_declared_delays_and_do_what_they_did() {
    // Into a cell 3, along the carry 1: from a[0] to the first carry 3, along the
    // carries of the cells between, out to a sum 3.
    for (each, cells, deepest) in [(1, 8, 3 + 6 + 3), (2, 4, 3 + 2 + 3), (4, 2, 3 + 3)] {
        let model = ["", "FA", "ADD2", "", "ADD4"][each];
        let declared = file(&format!(
            "carry_cells:\n- cell: {model}\n  delays:\n  - {{from: \"*\", to: \"*\", delay: 3}}\n  \
             - {{from: CI, to: CO, delay: 1}}\n  why: data sheet\n"
        ));
        let netlist = bound(&of_cells(each), &declared).expect("it fits");
        // What it does is what it did: every sum over 64 random vectors.
        let mut random = fastrand::Rng::with_seed(each as u64);
        let inputs: Vec<u64> = (0..17).map(|_| random.u64(..)).collect();
        let seen = values(&netlist, &inputs, &[]);
        let mut carry = inputs[16];
        for i in 0..8 {
            let (a, b) = (inputs[i], inputs[8 + i]);
            let net = netlist.outputs()[i].signal.net;
            assert_eq!(seen[net.index()], a ^ b ^ carry, "s[{i}] of {model}");
            carry = (a & b) | (carry & (a | b));
        }
        assert_eq!(VARIABLE.len(), 6);
        let audit = audited(&netlist, &declared).expect("it fits");
        assert_eq!(audit.depth.longest, Time::whole(deepest), "{model}");
        let chain = &audit.chains[0];
        assert_eq!((chain.kind.as_str(), chain.bits), ("adder", 8), "{model}");
        assert_eq!(chain.formula(), "a[7:0] + b[7:0] + c0");
        assert_eq!(chain.built_as.name, "carry-cell", "{model}");
        assert_eq!(audit.assumed[0].places, cells, "{model}");
        // A rebuild is compared with what the cells take.
        for proposal in &chain.proposals {
            assert_eq!(proposal.chain_depth.before, Time::whole(deepest));
        }
        // Undeclared, the same chain is a ripple of gates.
        let none = file("arrival: [{ports: c0, at: 0, why: none}]");
        let plain = bound(&of_cells(each), &none).expect("it fits");
        let audit = audited(&plain, &none).expect("it fits");
        assert_eq!(audit.chains[0].built_as.name, "ripple");
        assert_eq!(audit.depth.longest, Time::whole(8));
    }
}

#[test]
fn a_tied_pin_of_a_carry_cell_keeps_the_other_delays() {
    let declared = file(
        "carry_cells: [{cell: FA, delays: [{from: \"*\", to: \"*\", delay: 2}], why: data sheet}]\n\
         tied: {\"b[*]\": {value: 0, why: unused}}\n",
    );
    let netlist = bound(&of_cells(1), &declared).expect("it fits");
    let audit = audited(&netlist, &declared).expect("it fits");
    // a + 0 + c0 counts up still: eight cells of 2.
    assert_eq!(audit.depth.longest, Time::whole(16));
}

#[test]
fn a_carry_cell_with_a_pair_left_out_is_refused() {
    let refuse = |yaml: &str| bound(&of_cells(1), &file(yaml)).err().unwrap_or_default();
    let error = refuse("carry_cells: [{cell: FA, delays: [{from: CI, to: CO, delay: 1}], why: x}]");
    assert!(
        error.contains("expected a delay from A to S of the carry cell FA"),
        "{error}"
    );
    let error = refuse("carry_cells:\n- {cell: MUL, delays: [], why: x}\n");
    assert!(
        error.contains("found none that `MUL` matches") && error.contains(":2:"),
        "{error}"
    );
    let error = refuse(
        "carry_cells:\n- cell: FA\n  delays:\n  - {from: \"*\", to: \"*\", delay: 1}\n  \
         - {from: CJ, to: CO, delay: 1}\n  why: x\n",
    );
    assert!(
        error.contains("expected an input pin, found none that `CJ`") && error.contains(":5:"),
        "{error}"
    );
}
