//! Logical effort against its published worked examples.
//!
//! Sources: Sutherland, Sproull and Harris, *Logical Effort: Designing Fast CMOS
//! Circuits* (1999), chapter 1, and Weste and Harris, *CMOS VLSI Design* (4th
//! edition), chapter 4; the examples are quoted from memory of the books and their
//! figures computed again independently before they were written down here. Every
//! figure is compared to the digits printed.

use EffortCell::{Inverter, Multiplexer, Nand, Nor, Xor};
use carrywise::netlist::{Function, GateId, Netlist, NetlistBuilder, ScopeId, Signal, TruthTable};
use carrywise::timing::effort::{
    EffortCell, FO4, PathEffort, Stage, best_stage_effort, is_common_cell,
};
use carrywise::timing::{DelayModel, PinDelays};

fn path(cells: &[EffortCell]) -> Vec<Stage> {
    cells.iter().copied().map(Stage::new).collect()
}

/// Equal to as many digits as the book prints.
fn prints(value: f64, printed: &str) {
    let places = printed.split_once('.').map_or(0, |(_, after)| after.len());
    assert_eq!(format!("{value:.places$}"), printed);
}

fn delay(cells: &[EffortCell], electrical: f64, printed: &str) {
    prints(PathEffort::of(&path(cells), electrical).delay, printed);
}

#[test]
fn a_ring_of_31_inverters_oscillates_at_161_megahertz() {
    let stage = Inverter.delay(0, 1.0);
    assert_eq!(stage, 2.0);
    // A turn inverts, so the period is two turns.
    let frequency = |tau_ps: f64| 1e12 / (2.0 * 31.0 * stage * tau_ps);
    prints(frequency(50.0) / 1e6, "161");
    prints(frequency(3.0) / 1e9, "2.7");
}

#[test]
fn an_inverter_that_drives_four_takes_five_tau() {
    assert_eq!(Inverter.delay(0, 4.0), 5.0);
    assert_eq!(Inverter.delay(0, 4.0), FO4);
    assert_eq!(Inverter.delay(0, 4.0) * 50.0, 250.0);
    let four = PathEffort::of(&path(&[Inverter]), 4.0);
    assert_eq!(four.in_fo4(), 1.0);
}

#[test]
fn a_four_input_nor_that_drives_ten_takes_34_tau() {
    assert_eq!(Nor(4).delay(0, 10.0), 34.0);
}

#[test]
fn three_nands_in_series() {
    let three = path(&[Nand(2), Nand(2), Nand(2)]);
    let equal = PathEffort::of(&three, 1.0);
    prints(equal.effort, "2.37");
    prints(equal.delay, "10.0");
    let eight = PathEffort::of(&three, 8.0);
    prints(eight.effort, "18.96");
    prints(eight.delay, "14.0");
}

#[test]
fn branches_count_into_the_effort() {
    let stages = [
        Stage::new(Nand(2)).branching(2.0),
        Stage::new(Nand(2)).branching(3.0),
        Stage::new(Nand(2)),
    ];
    let found = PathEffort::of(&stages, 4.5);
    prints(found.effort, "64");
    prints(found.stage_effort, "4.0");
    prints(found.delay, "18.0");
}

#[test]
fn four_stages_and_their_sizes() {
    let stages = path(&[Inverter, Nand(3), Nand(2), Inverter]);
    let found = PathEffort::of(&stages, 20.0 / 10.0);
    prints(found.effort, "4.44");
    prints(found.stage_effort, "1.45");
    prints(found.parasitic, "7");
    prints(found.delay, "12.8");
    let sizes = found.sizes(&stages, 20.0);
    prints(sizes[0], "10.0");
    prints(sizes[1], "14.5");
    prints(sizes[2], "12.6");
    prints(sizes[3], "13.8");
}

#[test]
fn as_many_inverters_as_the_load_asks_for() {
    for (inverters, printed) in [(1, "26.0"), (3, "11.8"), (5, "14.5")] {
        delay(&vec![Inverter; inverters], 25.0, printed);
    }
    for (inverters, printed) in [(1, "65"), (2, "18.0"), (3, "15.0"), (4, "15.3")] {
        delay(&vec![Inverter; inverters], 64.0, printed);
    }
    prints(best_stage_effort(1.0), "3.59");
    prints(best_stage_effort(0.0), "2.718");
}

#[test]
fn the_best_eight_input_and_depends_on_its_load() {
    let wide = [Nand(8), Inverter];
    let two = [Nand(4), Nor(2)];
    let four = [Nand(2), Nor(2), Nand(2), Inverter];
    let parasitics =
        [&wide[..], &two, &four].map(|cells| PathEffort::of(&path(cells), 1.0).parasitic);
    assert_eq!(parasitics, [9.0, 6.0, 7.0]);
    delay(&wide, 1.0, "12.65");
    delay(&two, 1.0, "9.65");
    delay(&four, 1.0, "12.25");
    delay(&wide, 12.0, "21.6");
    delay(&two, 12.0, "18.6");
    delay(&four, 12.0, "16.8");
}

/// A register file of 16 words of 32 bits: H = 9.6, and every address bit drives
/// half of the 16 decoders.
#[test]
fn decoders_of_a_register_file() {
    let inverters = |n: usize| vec![Inverter; n];
    let nand2 = Nand(2);
    for (cells, printed) in [
        (vec![Nand(4), Inverter], "29.8"),
        (vec![nand2, Nor(2)], "30.1"),
        (vec![Inverter, Nand(4), Inverter], "22.1"),
        ([vec![Nand(4)], inverters(3)].concat(), "21.1"),
        ([vec![nand2, Nor(2)], inverters(2)].concat(), "20.5"),
        (vec![nand2, Inverter, nand2, Inverter], "19.7"),
        (vec![Inverter, nand2, Inverter, nand2, Inverter], "20.4"),
        (
            [vec![nand2, Inverter, nand2], inverters(3)].concat(),
            "21.6",
        ),
    ] {
        let mut stages = path(&cells);
        stages[0] = stages[0].branching(8.0);
        prints(PathEffort::of(&stages, 9.6).delay, printed);
    }
}

#[test]
fn three_stages_bear_an_effort_of_five_each() {
    let stages = [
        Stage::new(Nand(2)).branching(2.0),
        Stage::new(Nand(3)).branching(3.0),
        Stage::new(Nor(2)),
    ];
    let found = PathEffort::of(&stages, 45.0 / 8.0);
    prints(found.effort, "125");
    prints(found.stage_effort, "5.0");
    prints(found.delay, "22.0");
}

/// Table of efforts and parasitic delays of the book, pMOS/nMOS ratio 2.
#[test]
fn cells_have_their_published_values() {
    let thirds = |cell: EffortCell, pins: usize| {
        (0..pins)
            .map(|pin| cell.effort_in_thirds(pin))
            .collect::<Vec<_>>()
    };
    assert_eq!(thirds(Inverter, 1), [3]);
    for (inputs, nand, nor) in [(2, 4, 5), (3, 5, 7), (4, 6, 9)] {
        assert_eq!(thirds(Nand(inputs), 2), [nand; 2]);
        assert_eq!(thirds(Nor(inputs), 2), [nor; 2]);
        assert_eq!(
            (Nand(inputs).parasitic(), Nor(inputs).parasitic()),
            (inputs, inputs)
        );
    }
    assert_eq!(thirds(Multiplexer(2), 2), [6, 6]);
    assert_eq!(Multiplexer(3).parasitic(), 6);
    assert_eq!(thirds(Xor(2), 2), [12, 12]);
    assert_eq!(thirds(Xor(3), 3), [18, 36, 18]);
    assert_eq!(thirds(Xor(4), 4), [24, 48, 48, 24]);
    assert_eq!([2, 3, 4].map(|n| Xor(n).parasitic()), [4, 6, 8]);
}

/// A gate of `function` whose output `copies` gates like it read, all by their
/// first pin; gives the delay of every pin of the first.
fn driving_copies(function: &Function, copies: usize) -> Vec<i32> {
    let mut builder = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let id = builder.function(function.clone());
    let input = |builder: &mut NetlistBuilder| {
        let net = builder.add_net(None, top).unwrap();
        builder.add_input(net, 0);
        net
    };
    let pins: Vec<_> = (0..function.inputs())
        .map(|_| input(&mut builder))
        .collect();
    let first = builder.add_net(None, top).unwrap();
    builder.add_gate(id, &pins, first, top, 0).unwrap();
    for _ in 0..copies {
        let mut pins = pins.clone();
        pins[0] = first;
        let output = builder.add_net(None, top).unwrap();
        builder.add_gate(id, &pins, output, top, 0).unwrap();
        builder.add_output(Signal::plain(output), None, 0);
    }
    priced(&builder.finish(), GateId::new(0))
}

fn priced(netlist: &Netlist, gate: GateId) -> Vec<i32> {
    let delays = PinDelays::of(netlist, DelayModel::LogicalEffort);
    delays.of_gate(netlist, gate).to_vec()
}

/// The linear rule of the same books: a NANDn that drives h copies takes
/// n + h(n + 2)/3, a NORn n + h(2n + 1)/3; to the thousandth of a τ kept per pin.
#[test]
fn nands_and_nors_that_drive_copies_follow_the_linear_rule() {
    for inputs in 2..=9_usize {
        for copies in 1..=8_usize {
            let (n, h) = (inputs as f64, copies as f64);
            let close = |ticks: i32, tau: f64| {
                let off = (f64::from(ticks) / 1000.0 - tau).abs();
                assert!(
                    off <= 0.0005 * h + 1e-9,
                    "{inputs} {copies}: {ticks} and {tau}"
                );
            };
            let nand = driving_copies(&Function::product(&vec![false; inputs], true), copies);
            let nor = driving_copies(&Function::product(&vec![true; inputs], false), copies);
            for pin in 0..inputs {
                close(nand[pin], n + h * (n + 2.0) / 3.0);
                close(nor[pin], n + h * (2.0 * n + 1.0) / 3.0);
            }
        }
    }
}

/// The same d = g·h + p for the other cells of the table.
#[test]
fn gates_of_a_netlist_have_their_published_delays() {
    assert_eq!(driving_copies(&Function::buffer(true), 4), [5_000]);
    // Two inverters in series: 1 + 1, then 1 and the load.
    assert_eq!(driving_copies(&Function::buffer(false), 4), [7_000]);
    for odd in [false, true] {
        assert_eq!(driving_copies(&Function::parity(2, odd), 1), [8_000; 2]);
        assert_eq!(driving_copies(&Function::parity(3, odd), 1), [12_000; 3]);
        assert_eq!(driving_copies(&Function::parity(4, odd), 2), [24_000; 4]);
    }
    // Pin 2 chooses between pins 0 and 1.
    let multiplexer = Function::Table(TruthTable::new(3, 0xCA));
    assert_eq!(driving_copies(&multiplexer, 3), [10_000; 3]);
}

/// Worked by hand with the values of the table, for gates that are no cell.
#[test]
fn other_gates_are_priced_as_the_cells_they_are_made_of() {
    // AND2: a NAND2 (p = 2) that drives an inverter (1) of p = 1; its pins load 4/3.
    let and = Function::product(&[false, false], false);
    assert_eq!(driving_copies(&and, 1), [4_000 + 1_333; 2]);
    // AND of a and not b: a NOR2 (p = 2), a behind an inverter (p = 1) that drives
    // its 5/3; a copy loads one inverter. A NAND2 between inverters is slower: b
    // would wait 1 + 4/3 + 2 + 1 + 1.
    let mixed = Function::product(&[false, true], false);
    assert_eq!(driving_copies(&mixed, 1), [4_667 + 1_000, 2_000 + 1_000]);
    // Majority ab + ac + bc: every pin drives two NAND2 (p = 2), each of them a
    // pin of a NAND3 (5/3, p = 3); a copy loads 2 · 4/3.
    let majority = Function::Table(TruthTable::new(3, 0xE8));
    assert_eq!(
        driving_copies(&majority, 1),
        [2_000 + 1_667 + 3_000 + 2_666; 3]
    );
    // An exclusive-or of five as a tree of two-input ones (4, and 4 to drive the
    // next): two pins three deep, three pins two deep.
    let five = Function::parity(5, false);
    let delays = driving_copies(&five, 1);
    assert_eq!(delays, [24_000, 24_000, 16_000, 16_000, 16_000]);
}

#[test]
fn look_up_tables_are_told_from_cells() {
    let table = |inputs, bits| Function::Table(TruthTable::new(inputs, bits));
    // a·b + c·d, (a + b)·c, a multiplexer and a majority are cells.
    for cell in [
        table(4, 0xF888),
        table(3, 0xE0),
        table(3, 0xCA),
        table(3, 0xE8),
    ] {
        assert!(is_common_cell(&cell), "{cell:?}");
    }
    // The sum's exclusive-or with the carry of two positions in it is not.
    let sum = table(5, 0x0777_F888 ^ 0x5555_AAAA);
    assert!(!is_common_cell(&sum));
    assert!(!is_common_cell(&table(6, 0x8421_1248_8421_7BDE)));
}
