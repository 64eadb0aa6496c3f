//! Recognition in open circuits whose contents their collections describe. The
//! source stands at each test; where the circuits are absent the tests say so
//! and pass.

mod generators;
#[path = "support/recognition.rs"]
mod recognition;
mod support;

use carrywise::chain::{BuiltAs, Found, Kind};
use carrywise::netlist::{Bit, Netlist};
use recognition::*;

/// A public circuit as read and what is found in it.
fn public(path: &str) -> Option<(Netlist, Found)> {
    let bytes = std::fs::read(support::datasets()?.join(path)).expect("the circuit is there");
    let netlist = parse(path, bytes);
    let found = recognise(&netlist);
    check_theorems(path, &netlist, &found.chains);
    Some((netlist, found))
}

/// EPFL suite (Amarù, Gaillardon, De Micheli, IWLS 2015): `adder` is one
/// 128-bit ripple adder, no carry-in, 129 outputs.
#[test]
fn finds_the_public_128_bit_adder_in_both_forms() {
    for path in ["epfl/adder.aig", "epfl/adder.blif"] {
        let Some((netlist, found)) = public(path) else {
            return;
        };
        let [chain] = &found.chains[..] else {
            panic!("{path}: {} chains", found.chains.len())
        };
        assert_eq!((chain.kind, chain.positions.len()), (Kind::Adder, 128));
        assert_eq!(
            (chain.carry_in, chain.built_as),
            (Bit::Constant(false), BuiltAs::Ripple)
        );
        assert!(chain.has_carry_out);
        for (i, position) in chain.positions.iter().enumerate() {
            let name = |b: Bit| b.signal().map(|s| netlist.signal_name(s));
            assert_eq!(name(position.a), Some(format!("a[{i}]")));
            assert_eq!(name(position.b), Some(format!("b[{i}]")));
        }
    }
}

/// MCNC `my_adder` (Yang 1991): 16 bits, the carry-in is the last input, sums
/// most significant first, carry-out last.
#[test]
fn finds_the_public_16_bit_adder_with_its_carry_in() {
    let Some((netlist, found)) = public("mcnc/my_adder.blif") else {
        return;
    };
    let [chain] = &found.chains[..] else {
        panic!("{} chains", found.chains.len())
    };
    assert_eq!((chain.kind, chain.positions.len()), (Kind::Adder, 16));
    let carry_in = chain.carry_in.signal().expect("a net");
    assert_eq!(Some(&carry_in.net), netlist.inputs().last());
    assert!(!carry_in.inverted && chain.has_carry_out);
    let outputs = netlist.outputs();
    for (i, position) in chain.positions.iter().enumerate() {
        assert_eq!(position.sums[0], outputs[15 - i].signal, "sum {i}");
    }
    let top = &chain.positions[15].carries;
    assert!(
        top.contains(&outputs[16].signal),
        "the carry-out is the last output"
    );
}

/// ISCAS'85 `c6288` (Hansen, Yalcin, Hayes, IEEE Design & Test 1999): a 16×16
/// array multiplier of 240 adder cells in 15 rows of 16. The cells of a row
/// hand their carries on, so the rows' positions add up to the cells.
#[test]
fn finds_the_240_adder_cells_of_the_public_array_multiplier() {
    let Some((_, found)) = public("iscas85/c6288.blif") else {
        return;
    };
    assert_eq!(found.chains.len(), 15);
    let cells: usize = found.chains.iter().map(|chain| chain.positions.len()).sum();
    assert_eq!(cells, 240);
    assert!(found.chains.iter().all(|chain| chain.kind == Kind::Adder));
    assert_eq!(found.unproven, []);
}

/// ISCAS'85 `c17` and `c432`, EPFL `ctrl`, `dec` and `bar` (a barrel shifter)
/// contain no adder.
#[test]
fn finds_no_adder_in_public_circuits_without_one() {
    for path in [
        "iscas85/c17.blif",
        "iscas85/c432.blif",
        "epfl/ctrl.aig",
        "epfl/dec.aig",
        "epfl/bar.aig",
    ] {
        let Some((_, found)) = public(path) else {
            return;
        };
        assert_eq!(found.chains, [], "{path}");
        assert_eq!(found.unproven, [], "{path}");
    }
}
