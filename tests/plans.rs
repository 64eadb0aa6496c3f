//! What is planned and why: reuse and sweeping, refusals, the front, the
//! recommendation, settings. That estimates are what is built is held by
//! `plans_recounted.rs`.

mod generators;
#[path = "support/recount.rs"]
mod recount;

use carrywise::chain::{self, Chain, Position};
use carrywise::netlist::{
    Bit, Function, NetId, Netlist, NetlistBuilder, ScopeId, Signal, Topology,
};
use carrywise::network::Propagate;
use carrywise::network::schemes::candidates;
use carrywise::plan::{
    DryRun, GateStyle, Ground, NewGates, Request, Settings, SettingsError, Site,
    depth_with_free_carry, earliest, plan,
};
use carrywise::timing::{DelayModel, Timing};
use generators::{Cell, Word};
use recount::*;

/// A hand-made netlist: two-bit adder among gates that a rebuild may reuse or
/// must keep, every count by hand.
#[test]
fn reuses_what_stays_and_removes_what_loses_its_last_use() {
    let mut b = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let net = |b: &mut NetlistBuilder, name: &str| {
        let id = b.name(name.as_bytes());
        b.add_net(Some(id), top).unwrap()
    };
    let [a0, a1, b0, b1] = ["a0", "a1", "b0", "b1"].map(|name| {
        let input = net(&mut b, name);
        b.add_input(input, 0);
        input
    });
    let mut line = 0;
    let mut gate = |b: &mut NetlistBuilder, function: Function, pins: &[NetId], name: &str| {
        let output = net(b, name);
        let id = b.function(function);
        line += 1;
        b.add_gate(id, pins, output, top, line).unwrap();
        output
    };
    let and = || Function::product(&[false; 2], false);
    let nor = || Function::product(&[true; 2], false);
    let or = || Function::product(&[true; 2], true);
    let xor = || Function::parity(2, false);
    let s0 = gate(&mut b, xor(), &[a0, b0], "s0");
    let g0 = gate(&mut b, and(), &[a0, b0], "c1");
    let p1 = gate(&mut b, xor(), &[a1, b1], "p1");
    let s1 = gate(&mut b, xor(), &[p1, g0], "s1");
    let t = gate(&mut b, and(), &[p1, g0], "t");
    // g1 is read from outside and stays; n1 is ~(a1 + b1) and stays.
    let g1 = gate(&mut b, and(), &[a1, b1], "g1");
    let n1 = gate(&mut b, nor(), &[a1, b1], "n1");
    let c2 = gate(&mut b, or(), &[g1, t], "c2");
    let out = gate(&mut b, and(), &[c2, n1], "out");
    let other = gate(&mut b, or(), &[g1, out], "other");
    for output in [s0, s1, c2, other] {
        b.add_output(Signal::plain(output), None, 0);
    }
    let netlist = b.finish();
    let bit = |net| Bit::Signal(Signal::plain(net));
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            Position {
                a: bit(a0),
                b: bit(b0),
                sums: vec![Signal::plain(s0)],
                carries: vec![Signal::plain(g0)],
            },
            Position {
                a: bit(a1),
                b: bit(b1),
                sums: vec![Signal::plain(s1)],
                carries: vec![Signal::plain(c2)],
            },
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: true,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Ripple,
        comparison: None,
        construction: chain::Construction::default(),
        mode: None,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.style),
        (2, GateStyle::SingleOperator)
    );
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    let network = candidates(2, false, 2)[0].network.clone();
    let run = DryRun::of(&site, &network, Propagate::Or);
    compare(&ground, &run, &chain, "by hand");
    let estimate = run.estimate();
    // Removed: s0, c1, p1, s1, t, c2. Added: s0, g0 inside, half sum, s1, p·g0,
    // c2; g1 and p1 = ~n1 are reused.
    assert_eq!(estimate.gates_removed, 6);
    assert_eq!(estimate.gates_added, 6);
    assert_eq!((estimate.block_before, estimate.block_after), (5, 5));
    let with_xor = DryRun::of(&site, &network, Propagate::Xor);
    compare(&ground, &with_xor, &chain, "by hand");
    assert_eq!(with_xor.estimate().gates_added, 6);
}

/// A carry that nothing reads keeps its net in BLIF; the rest of the block is
/// the textbook ripple adder.
#[test]
fn a_result_that_nothing_reads_stays() {
    let text = ".model t\n.inputs a0 b0 a1 b1 a2 b2\n.outputs s0 s1 s2\n\
        .names a0 b0 s0\n10 1\n01 1\n.names a0 b0 c1\n11 1\n\
        .names a1 b1 c1 s1\n100 1\n010 1\n001 1\n111 1\n\
        .names a1 b1 c1 c2\n11- 1\n1-1 1\n-11 1\n\
        .names a2 b2 c2 s2\n100 1\n010 1\n001 1\n111 1\n\
        .names a2 b2 c2 unread\n11- 1\n1-1 1\n-11 1\n.end\n";
    let netlist = parse("t.blif", text.as_bytes());
    let mut chain = chains_of(&netlist).remove(0);
    let unread = netlist
        .nets()
        .find(|&net| netlist.net_name(net) == "unread")
        .unwrap();
    // Stated whether or not recognition lists what nothing reads.
    chain.positions[2].carries = vec![Signal::plain(unread)];
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    assert_eq!(settings.style, GateStyle::Cover);
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    for (fitted, propagate) in options(&site) {
        let run = DryRun::of(&site, &fitted.network, propagate);
        assert_eq!(run.estimate().gates_removed, 6);
        compare(&ground, &run, &chain, fitted.scheme);
    }
}

/// AND/inverter graph by hand: the second sum feeds only its own carry, which
/// nothing reads, so its operand, an AND of two inputs, loses its last use too.
#[test]
fn an_operand_that_no_new_gate_reads_is_swept() {
    // 2 a0, 4 b0, 6 x, 8 y; 10 = x·y; 12, 14 half sum and 16 = s0 of a0, b0;
    // 12 = c1; 18, 20, 22 = ~(c1 ⊕ 10); 24 = 10·~s1, the second carry.
    let text = "aag 12 4 0 1 8\n2\n4\n6\n8\n16\n10 6 8\n12 2 4\n14 3 5\n16 13 15\n\
        18 12 10\n20 13 11\n22 19 21\n24 10 23\n";
    let netlist = parse("t.aag", text.as_bytes());
    let by_variable = |variable: usize| {
        let ports = netlist.inputs();
        match variable {
            1..=4 => ports[variable - 1],
            _ => netlist.gate_output(netlist.gates().nth(variable - 5).unwrap()),
        }
    };
    let bit = |variable| Bit::Signal(Signal::plain(by_variable(variable)));
    let position = |a, b, sum, carry| Position {
        a,
        b,
        sums: vec![Signal::plain(by_variable(sum))],
        carries: vec![Signal::plain(by_variable(carry))],
    };
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            position(bit(1), bit(2), 8, 6),
            // The second operand of the second position is 0.
            position(bit(5), Bit::Constant(false), 11, 12),
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: false,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Ripple,
        comparison: None,
        construction: chain::Construction::default(),
        mode: None,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    for (fitted, propagate) in options(&site) {
        let run = DryRun::of(&site, &fitted.network, propagate);
        compare(&ground, &run, &chain, fitted.scheme);
        // All but 14, which s0 reads anew.
        assert_eq!(run.estimate().gates_removed, 8);
        assert_eq!(run.estimate().gates_added, 3);
    }
}

#[test]
fn refuses_a_chain_whose_operand_depends_on_it() {
    let mut b = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let nets: Vec<NetId> = (0..6).map(|_| b.add_net(None, top).unwrap()).collect();
    for &net in &nets[..3] {
        b.add_input(net, 0);
    }
    let xor = b.function(Function::parity(2, false));
    b.add_gate(xor, &[nets[0], nets[1]], nets[3], top, 0)
        .unwrap();
    b.add_gate(xor, &[nets[3], nets[2]], nets[4], top, 0)
        .unwrap();
    b.add_gate(xor, &[nets[4], nets[2]], nets[5], top, 0)
        .unwrap();
    b.add_output(Signal::plain(nets[5]), None, 0);
    let netlist = b.finish();
    let position = |a: NetId, b: NetId, sum: NetId| Position {
        a: Bit::Signal(Signal::plain(a)),
        b: Bit::Signal(Signal::plain(b)),
        sums: vec![Signal::plain(sum)],
        carries: Vec::new(),
    };
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            position(nets[0], nets[1], nets[3]),
            position(nets[4], nets[2], nets[5]),
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: false,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Mixed,
        comparison: None,
        construction: chain::Construction::default(),
        mode: None,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let plan = plan(&ground, &chain);
    let not_planned = plan.not_planned.unwrap();
    assert_eq!(
        not_planned.why,
        "operand bit 1 depends on the chain's own results"
    );
    assert_eq!(not_planned.slack, Some(0));
}

#[test]
fn a_chain_with_slack_is_not_planned() {
    let word = Word::new(generators::Kind::Adder, 4, Cell::PropagateXor);
    let mut circuit = word.generate().circuit;
    let mut at = circuit.input("slow");
    for _ in 0..100 {
        at = circuit.not(at);
    }
    circuit.output(at, "late");
    let netlist = blif(&circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    let not_planned = planned.not_planned.unwrap();
    let slack = not_planned.slack.unwrap();
    assert_eq!(slack, 100 - planned.leaves);
    assert!(
        not_planned.why.contains("more than the margin of 10"),
        "{}",
        not_planned.why
    );
    assert!(planned.proposals.is_empty());
    // With a margin as wide it is planned, and nothing is gained by it.
    let settings = Settings {
        margin: Some(slack),
        ..settings
    };
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    assert_eq!(planned.not_planned, None);
    assert_eq!(planned.recommended, None);
    assert!(
        planned
            .reason
            .starts_with("another input→output path of 100"),
        "{}",
        planned.reason
    );
}

/// What takes over is measured on the rebuilt netlist: its end is the latest.
#[test]
fn says_which_path_takes_over() {
    let word = Word::new(generators::Kind::Adder, 16, Cell::PropagateXor);
    let mut circuit = word.generate().circuit;
    let mut at = circuit.input("slow");
    for _ in 0..20 {
        at = circuit.not(at);
    }
    circuit.output(at, "late");
    let netlist = blif(&circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    let recommended = &planned.proposals[planned.recommended.unwrap()];
    assert_eq!(recommended.estimate.block_after, 20, "{}", planned.reason);
    assert!(
        planned
            .reason
            .starts_with("the cheapest that takes carry off")
    );
    let over = recommended.takes_over.unwrap();
    assert!(!over.through_chain);
    assert_eq!(over.end.describe(&netlist), "late");
    // No cheaper proposal of the front does the same.
    for proposal in &planned.proposals {
        let cheaper =
            proposal.estimate.gate_equivalents_added < recommended.estimate.gate_equivalents_added;
        assert!(!cheaper || proposal.kind.chain_is_on_it());
    }
}

/// The front by its definition, over the proposals themselves.
#[test]
fn no_listed_proposal_beats_another() {
    let word = Word::new(generators::Kind::Adder, 24, Cell::PropagateXor);
    let netlist = blif(&word.generate().circuit);
    let chains = chains_of(&netlist);
    let request = request(DelayModel::Unit, NewGates::SingleOperator, 4);
    let settings = Settings::resolve(request, &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    assert!(planned.proposals.len() > 2);
    let measures = planned.proposals.iter().map(|proposal| {
        let e = &proposal.estimate;
        [
            e.block_after as usize,
            e.chain_after as usize,
            e.gate_equivalents_added,
            e.largest_fan_in,
        ]
    });
    let measures: Vec<_> = measures.collect();
    for (i, one) in measures.iter().enumerate() {
        for (j, other) in measures.iter().enumerate() {
            assert!(i == j || one.iter().zip(other).any(|(a, b)| a > b) || one == other);
        }
    }
    for proposal in planned.proposals.iter().chain(&planned.best_of_scheme) {
        assert!(proposal.above_bound >= 0);
    }
}

/// ⌈log_F m⌉ by its definition for equal arrivals; for others a worked case.
#[test]
fn the_bound_is_the_depth_of_the_best_tree() {
    for inputs in 1..200usize {
        for width in 2..6usize {
            let levels = (0..).find(|&level| width.pow(level) >= inputs).unwrap();
            assert_eq!(earliest(&vec![0; inputs], width), levels as i32);
        }
    }
    assert_eq!(earliest(&[7], 2), 7);
    // Four at 0 make one at 2; with one at 2 that is 3, with one at 5 it is 6.
    assert_eq!(earliest(&[0, 0, 0, 0, 2], 2), 3);
    assert_eq!(earliest(&[0, 0, 0, 0, 5], 2), 6);
    assert_eq!(earliest(&[], 2), 0);
}

#[test]
fn settings_follow_the_netlist_and_refuse_what_it_cannot_have() {
    let word = Word::new(generators::Kind::Adder, 4, Cell::PropagateXor);
    let graph = aiger(&word.generate().circuit);
    let ask = |netlist: &Netlist, new_gates, gate_inputs| {
        let request = Request {
            new_gates,
            gate_inputs,
            ..Request::new(DelayModel::Unit)
        };
        Settings::resolve(request, netlist)
    };
    assert_eq!(ask(&graph, None, None).unwrap().gate_inputs, 2);
    assert_eq!(
        ask(&graph, None, Some(3)),
        Err(SettingsError::TooWideForAiger(3))
    );
    let cover = Some(NewGates::Cover);
    assert_eq!(ask(&graph, cover, None), Err(SettingsError::CoverInAiger));
    let with = |text: &str| parse("t.blif", text.as_bytes());
    let narrow = with(".model t\n.inputs a b\n.outputs y\n.names a b y\n11 1\n.end\n");
    assert_eq!(ask(&narrow, None, None).unwrap().gate_inputs, 2);
    assert_eq!(
        ask(&narrow, None, Some(1)),
        Err(SettingsError::TooFewInputs(1))
    );
    assert_eq!(
        ask(&narrow, cover, Some(7)),
        Err(SettingsError::TooWideForCover(7))
    );
    let wide = with(".model t\n.inputs a b c d e\n.outputs y\n.names a b c d e y\n11111 1\n.end\n");
    let settings = ask(&wide, None, None).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.new_gates),
        (4, NewGates::SingleOperator)
    );
    assert!(settings.gate_inputs_reason.contains("has 5"));
    let table = with(".model t\n.inputs a b c\n.outputs y\n.names a b c y\n11- 1\n--1 1\n.end\n");
    let settings = ask(&table, None, None).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.new_gates),
        (3, NewGates::Cover)
    );
}

/// A ripple adder of XOR/AND/OR cells: with free carries a sum is two gates.
#[test]
fn free_carries_leave_the_depth_of_the_cells() {
    let word = Word::new(generators::Kind::Adder, 16, Cell::PropagateXor);
    let netlist = blif(&word.generate().circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chains[0]).unwrap();
    assert_eq!(site.own_gates().len(), netlist.gate_count());
    let free = depth_with_free_carry(&ground, &chains);
    assert!(timing.longest() > 30);
    assert_eq!(free.into_values().collect::<Vec<_>>(), [2]);
}
