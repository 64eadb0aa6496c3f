//! Sets of proposals against reality: whatever is chosen for the chains of a
//! netlist, in series, in parallel or among other logic, the estimate of the whole
//! set is compared with a netlist made from it and measured from nothing, and that
//! netlist's function with the original's by simulation. The circuits come from the
//! generators, which know nothing of the crate.

mod generators;
#[path = "support/recount.rs"]
mod recount;
mod support;

use carrywise::chain::Chain;
use carrywise::netlist::{Netlist, Topology};
use carrywise::network::Propagate;
use carrywise::network::schemes::{Fitted, candidates};
use carrywise::plan::{
    DryRun, Ground, MOST_TOGETHER, NewGates, Refused, Request, SetRun, SetSite, Settings, Site,
    materialise_set,
};
use carrywise::timing::{DelayModel, Timing};
use generators::{Cell, Kind, Word};
use recount::*;

/// Random subsets of the chains with random choices, each recounted; sets that are
/// refused are counted apart.
fn compare_sets(netlist: &Netlist, request: Request, rounds: usize, what: &str) -> (usize, usize) {
    let chains = chains_of(netlist);
    let settings = Settings::resolve(request, netlist).unwrap();
    let topology = Topology::of(netlist);
    let timing = Timing::of(netlist, &topology, settings.model);
    let ground = Ground::of(netlist, &topology, &timing, &settings);
    let mut random = fastrand::Rng::with_seed(11);
    let (mut compared, mut refused) = (0, 0);
    let options: Vec<Vec<Fitted>> = chains
        .iter()
        .map(|chain| {
            let has_carry_in = chain.carry_in.signal().is_some();
            candidates(chain.positions.len(), has_carry_in, settings.gate_inputs)
        })
        .collect();
    for round in 0..rounds {
        let mut picked: Vec<usize> = (0..chains.len())
            .filter(|_| round == 0 || random.bool())
            .collect();
        random.shuffle(&mut picked);
        picked.truncate(MOST_TOGETHER);
        let members: Vec<&Chain> = picked.iter().map(|&i| &chains[i]).collect();
        let site = match SetSite::of(&ground, &members) {
            Ok(site) => site,
            Err(Refused::DependOnEachOther) => {
                refused += 1;
                continue;
            }
            Err(other) => panic!("{what}: {other}"),
        };
        let choices: Vec<_> = picked
            .iter()
            .map(|&i| {
                let fitted = &options[i][random.usize(..options[i].len())];
                let propagate = [Propagate::Or, Propagate::Xor][random.usize(..2)];
                (&fitted.network, propagate)
            })
            .collect();
        let run = SetRun::of(&site, &choices);
        let what = format!("{what}: {picked:?}, F={}", settings.gate_inputs);
        if picked.is_empty() {
            assert_eq!(run.estimate().whole.block_after, timing.longest(), "{what}");
            assert_eq!(run.estimate().whole.gates_added, 0, "{what}");
            continue;
        }
        let rebuilt = materialise_set(&run, "cw_").unwrap();
        compare_rebuilt(&ground, &rebuilt, &run.estimate().whole, &members, &what);
        compare_ends(&run, &rebuilt.netlist, &ground, &what);
        if let [only] = members[..] {
            // A set of one is that one.
            let alone = Site::of(&ground, only).unwrap();
            let alone = DryRun::of(&alone, choices[0].0, choices[0].1);
            assert_eq!(run.estimate().whole, *alone.estimate(), "{what}");
        }
        compared += 1;
    }
    (compared, refused)
}

/// The number of ends at the latest arrival of every kind, counted anew.
fn compare_ends(run: &SetRun<'_, '_>, new: &Netlist, ground: &Ground<'_>, what: &str) {
    let timing = Timing::of(new, &Topology::of(new), ground.settings.model);
    for (change, &ends) in run.estimate().whole.kinds.iter().zip(&run.estimate().ends) {
        if let Some(found) = timing.kind(change.kind) {
            assert_eq!(found.ends_at_longest, ends, "{what}: ends {}", change.kind);
        }
    }
}

/// The models under which the figures of a set are exact; where delay depends on
/// load they are a sketch, see `plan::SetRun`.
fn exact_models() -> impl Iterator<Item = DelayModel> {
    let models = DelayModel::ALL.into_iter();
    models.filter(|model| !model.depends_on_load())
}

/// Both formats, several limits.
fn compare_circuit(circuit: &generators::Circuit, rounds: usize, what: &str) -> usize {
    let (text, graph) = (blif(circuit), aiger(circuit));
    let mut compared = 0;
    for model in exact_models() {
        compared += compare_sets(&graph, Request::new(model), rounds, what).0;
        for (kind, inputs) in [
            (NewGates::SingleOperator, 2),
            (NewGates::SingleOperator, 4),
            (NewGates::Cover, 6),
        ] {
            compared += compare_sets(&text, request(model, kind, inputs), rounds, what).0;
        }
    }
    compared
}

#[test]
fn sets_in_series_are_what_is_built() {
    let mut compared = 0;
    for cell in Cell::ALL {
        let generated = generators::series_adders(5, 4, cell);
        compared += compare_circuit(&generated.circuit, 6, &generated.label);
    }
    assert!(compared > 100, "{compared}");
}

/// Two sums of four words, compared bit by bit and added up: chains in parallel
/// feed one more, among gates of other logic, with registers.
#[test]
fn sets_in_parallel_and_behind_are_what_is_built() {
    let mut compared = 0;
    for cell in Cell::ALL {
        let mut c = generators::Circuit::new("parallel");
        let word = |bits| Word {
            carry_out: false,
            ..Word::new(Kind::Adder, bits, cell)
        };
        let buses: Vec<_> = (0..4).map(|k| c.input_bus(&format!("x{k}"), 5)).collect();
        let held = c.register_bus("held", 5);
        let left = word(5).place(&mut c, &buses[0], &buses[1], None).sums;
        let right = word(5).place(&mut c, &buses[2], &buses[3], None).sums;
        let gated: Vec<_> = (0..5).map(|i| c.and(left[i], held[i])).collect();
        let total = word(5).place(&mut c, &gated, &right, None).sums;
        let again = word(5).place(&mut c, &held, &right, None).sums;
        c.set_next(&held, &again);
        let odd = c.xor(left[4], right[0]);
        c.output_bus(&total, "total");
        c.output(odd, "odd");
        c.drop_unread();
        compared += compare_circuit(&c, 8, &format!("parallel {cell:?}"));
    }
    assert!(compared > 100, "{compared}");
}

#[test]
fn sets_on_the_fixtures_are_what_is_built() {
    let mut compared = 0;
    for (name, bytes) in generators::gauge::files() {
        let netlist = parse(name, &bytes);
        for model in exact_models() {
            compared += compare_sets(&netlist, Request::new(model), 4, name).0;
        }
    }
    assert!(compared > 10, "{compared}");
}

/// Rows of arrays read each other's sums; alarms and units share operands.
#[test]
fn sets_on_open_circuits_are_what_is_built() {
    let Some(folder) = support::datasets() else {
        return;
    };
    for name in ["iscas85/c5315", "iscas85/c6288", "iscas85/c7552"] {
        let file = format!("{name}.blif");
        let netlist = parse(&file, &std::fs::read(folder.join(&file)).unwrap());
        let request = Request::new(DelayModel::Unit);
        let (compared, refused) = compare_sets(&netlist, request, 5, name);
        eprintln!("{name}: {compared} sets compared, {refused} refused");
        if name == "iscas85/c6288" {
            assert!(compared >= 4, "{compared}");
        }
    }
}
