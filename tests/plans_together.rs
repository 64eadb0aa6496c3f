//! The choice over several chains: in parallel, in series, in both; what is
//! recommended is built and measured from nothing.

mod generators;
#[path = "support/recount.rs"]
mod recount;
mod support;

use carrywise::chain::Chain;
use carrywise::netlist::{Netlist, Topology};
use carrywise::plan::{
    ChainPlan, Ground, NewGates, Request, SetRun, SetSite, Settings, Together, choose_together,
    materialise_set, plan_all,
};
use carrywise::timing::{DelayModel, Timing};
use generators::{Cell, Circuit, Kind, Word};
use recount::*;

/// Plans a netlist, checks the recommended set against the netlist made from it,
/// and gives the block's depth before, single plans and set.
fn planned(netlist: &Netlist, what: &str) -> (i32, Vec<ChainPlan>, Option<Together>) {
    let chains = chains_of(netlist);
    let request = Request {
        margin: Some(i32::MAX),
        ..Request::new(DelayModel::Unit)
    };
    let settings = Settings::resolve(request, netlist).unwrap();
    let topology = Topology::of(netlist);
    let timing = Timing::of(netlist, &topology, settings.model);
    let ground = Ground::of(netlist, &topology, &timing, &settings);
    let single = plan_all(&ground, &chains);
    let mut plans = single.clone();
    let set = choose_together(&ground, &chains, &mut plans);
    if let Some(set) = &set {
        let members: Vec<&Chain> = set.members.iter().map(|&(c, _)| &chains[c]).collect();
        let site = SetSite::of(&ground, &members).unwrap();
        let choices: Vec<_> = set
            .members
            .iter()
            .map(|&(chain, proposal)| {
                assert_eq!(plans[chain].recommended, Some(proposal), "{what}");
                let proposal = &plans[chain].proposals[proposal];
                (&proposal.fitted.network, proposal.propagate)
            })
            .collect();
        let run = SetRun::of(&site, &choices);
        assert_eq!(run.estimate(), &set.estimate, "{what}");
        let rebuilt = materialise_set(&run, "cw_").unwrap();
        compare_rebuilt(&ground, &rebuilt, &set.estimate.whole, &members, what);
        assert!(set.after < set.before, "{what}");
    }
    (timing.longest(), single, set)
}

fn word(bits: usize) -> Word {
    Word {
        carry_out: false,
        ..Word::new(Kind::Adder, bits, Cell::PropagateXor)
    }
}

/// Two equal ripple adders side by side: neither rebuild gains anything while the
/// other chain stays, both together bring what one brings alone to one adder.
#[test]
fn equal_chains_in_parallel_are_rebuilt_together() {
    let mut alone = Circuit::new("alone");
    let mut c = Circuit::new("parallel");
    for (circuit, adders) in [(&mut alone, 1), (&mut c, 2)] {
        for k in 0..adders {
            let a = circuit.input_bus(&format!("a{k}"), 16);
            let b = circuit.input_bus(&format!("b{k}"), 16);
            let sums = word(16).place(circuit, &a, &b, None).sums;
            circuit.output_bus(&sums, &format!("s{k}"));
        }
        circuit.drop_unread();
    }
    for make in [blif, aiger] {
        let (before, _, one) = planned(&make(&alone), "alone");
        let one = one.unwrap();
        let (also, plans, set) = planned(&make(&c), "parallel");
        assert_eq!(before, also);
        for plan in &plans {
            assert_eq!(plan.recommended, None, "{}", plan.reason);
            assert!(plan.reason.contains("stays"), "{}", plan.reason);
            assert!(plan.proposals.iter().all(|proposal| !proposal.gains()));
        }
        let set = set.unwrap();
        assert!(set.none_alone);
        assert_eq!(set.members.len(), 2);
        assert_eq!(set.after, one.after);
        assert_eq!(set.estimate.cost(), 2 * one.estimate.cost());
    }
}

/// Two 16-bit ripple adders in series take about n + 1 levels and not 2n, since
/// the second follows the first bit by bit (common practice, no source). So with
/// one of them fast the other's whole length stays, and single plans gain nothing;
/// with both fast the block is about twice a fast adder deep.
#[test]
fn equal_chains_in_series_are_rebuilt_together() {
    let generated = generators::series_adders(16, 3, Cell::PropagateXor);
    for make in [blif, aiger] {
        let netlist = make(&generated.circuit);
        let one = make(&generators::series_adders(16, 2, Cell::PropagateXor).circuit);
        let (single, ..) = planned(&one, "alone");
        let (before, plans, set) = planned(&netlist, "series");
        assert!(before <= single + 4, "{before} after {single}");
        for plan in &plans {
            assert_eq!(plan.recommended, None, "{}", plan.reason);
            assert!(plan.proposals.iter().all(|proposal| !proposal.gains()));
        }
        let set = set.unwrap();
        assert!(set.none_alone);
        assert_eq!(set.members.len(), 2);
        assert!(set.after < before, "{} of {before}", set.after);
    }
}

/// Of two chains in parallel that differ in width only the longer is rebuilt when
/// that is enough: the cheapest set, not the largest.
#[test]
fn a_chain_that_need_not_change_is_left_out() {
    let mut c = Circuit::new("uneven");
    for (k, bits) in [24, 5].into_iter().enumerate() {
        let a = c.input_bus(&format!("a{k}"), bits);
        let b = c.input_bus(&format!("b{k}"), bits);
        let sums = word(bits).place(&mut c, &a, &b, None).sums;
        c.output_bus(&sums, &format!("s{k}"));
    }
    c.drop_unread();
    let (_, _, set) = planned(&blif(&c), "uneven");
    assert_eq!(set.unwrap().members.len(), 1);
}

/// With nothing to gain there is no set.
#[test]
fn nothing_is_recommended_where_nothing_gains() {
    // A chain of XORs as long as the adder beside it stays, whatever is done.
    let mut c = Circuit::new("beside");
    let a = c.input_bus("a", 8);
    let b = c.input_bus("b", 8);
    let sums = word(8).place(&mut c, &a, &b, None).sums;
    c.output_bus(&sums, "s");
    let mut long = a[0];
    for k in 0..40 {
        let x = c.input(&format!("x{k}"));
        long = c.xor(long, x);
    }
    c.output(long, "long");
    c.drop_unread();
    let (_, plans, set) = planned(&blif(&c), "beside");
    assert!(!plans.is_empty());
    assert_eq!(set, None);
}

/// What is recommended on the open circuits is what is built, and how deep they are
/// then; `--nocapture` prints the table. Depths before are published (`facts.tsv`).
#[test]
fn sets_recommended_on_open_circuits_are_what_is_built() {
    let Some(folder) = support::datasets() else {
        return;
    };
    for (name, depth, gains) in [
        ("iscas85/c6288.blif", 124, true),
        ("iscas85/c7552.blif", 43, false),
        ("iscas85/c5315.blif", 49, false),
        ("iscas85/c880.blif", 24, true),
        ("mcnc/my_adder.blif", 17, true),
    ] {
        let netlist = parse(name, &std::fs::read(folder.join(name)).unwrap());
        let (before, plans, set) = planned(&netlist, name);
        assert_eq!(before, depth, "{name}");
        let after = set.as_ref().map(|set| set.after);
        eprintln!("{name}: {} chains, {before} then {after:?}", plans.len());
        assert_eq!(set.is_some(), gains, "{name}");
    }
}

/// Covers of six inputs: the set holds in that style too.
#[test]
fn sets_of_covers_are_what_is_built() {
    let generated = generators::series_adders(16, 4, Cell::PropagateXor);
    let netlist = blif(&generated.circuit);
    let chains = chains_of(&netlist);
    let settings =
        Settings::resolve(request(DelayModel::Unit, NewGates::Cover, 6), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, settings.model);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let mut plans = plan_all(&ground, &chains);
    let set = choose_together(&ground, &chains, &mut plans).unwrap();
    assert!(set.after < set.before);
}
