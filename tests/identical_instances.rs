//! A thousand instances of one model.
//!
//! Sources outside the project: integer addition, since each instance adds; nothing
//! here is timed, but the run is short only while the cost stays in proportion.

#[path = "support/reading.rs"]
mod reading;

use carrywise::chain::{self, Kind};
use carrywise::netlist::Topology;
use reading::accept;
use std::collections::BTreeSet;
use std::fmt::Write;

const WIDTH: usize = 8;

/// `count` instances of a ripple adder with inputs and outputs of their own.
fn instances(count: usize) -> String {
    let mut blif = String::from(".model top\n");
    for i in 0..count {
        blif.push_str(".inputs");
        for bit in 0..WIDTH {
            let _ = write!(blif, " a{i}[{bit}] b{i}[{bit}]");
        }
        blif.push_str("\n.outputs");
        for bit in 0..WIDTH {
            let _ = write!(blif, " s{i}[{bit}]");
        }
        blif.push('\n');
    }
    for i in 0..count {
        blif.push_str(".subckt add");
        for bit in 0..WIDTH {
            let _ = write!(
                blif,
                " a{bit}=a{i}[{bit}] b{bit}=b{i}[{bit}] s{bit}=s{i}[{bit}]"
            );
        }
        blif.push('\n');
    }
    blif.push_str(".end\n.model add\n.inputs");
    for bit in 0..WIDTH {
        let _ = write!(blif, " a{bit} b{bit}");
    }
    blif.push_str("\n.outputs");
    for bit in 0..WIDTH {
        let _ = write!(blif, " s{bit}");
    }
    blif.push_str("\n.names c0\n");
    for bit in 0..WIDTH {
        let _ = writeln!(
            blif,
            ".names a{bit} b{bit} p{bit}\n10 1\n01 1\n.names p{bit} c{bit} s{bit}\n10 1\n01 1\n\
             .names a{bit} b{bit} c{bit} c{}\n11- 1\n1-1 1\n-11 1",
            bit + 1
        );
    }
    blif + ".end\n"
}

#[test]
fn every_one_of_a_thousand_identical_instances_is_proven_the_same() {
    let netlist = accept("top.blif", instances(1000)).netlist;
    let topology = Topology::of(&netlist);
    let found = chain::find(&netlist, &topology, chain::Options::default());
    assert!(found.unproven.is_empty());
    assert_eq!(found.chains.len(), 1000);
    let mut seen = BTreeSet::new();
    for chain in &found.chains {
        assert_eq!((chain.kind, chain.positions.len()), (Kind::Adder, WIDTH));
        let bit = chain.positions[0].a.signal().expect("an operand bit");
        seen.insert(netlist.net_name(bit.net));
        // Each adds its own operands into its own sums.
        let index = |name: String| {
            let digits = name[1..].split('[').next().map(str::to_owned);
            digits.and_then(|digits| digits.parse::<usize>().ok())
        };
        let own = index(netlist.net_name(bit.net));
        for position in &chain.positions {
            for signal in [position.a, position.b]
                .iter()
                .filter_map(|bit| bit.signal())
            {
                assert_eq!(index(netlist.net_name(signal.net)), own);
            }
            assert_eq!(index(netlist.net_name(position.sums[0].net)), own);
        }
    }
    assert_eq!(seen.len(), 1000);
}
