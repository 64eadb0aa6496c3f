//! Files of delays: what is read of them, and what netlists take under them.
//!
//! Sources outside the project: the open Liberty description (groups, templates,
//! axes; from memory) and linear interpolation, worked by hand beside each figure.
//! The table is our own format; its figures are worked by hand too. Clauses in
//! `grammar-notes/delays.md`.

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::{cells, delays};
use carrywise::netlist::{DelayTable, Netlist, Topology};
use carrywise::source::Source;
use carrywise::timing::{DelayModel, PinDelays, Time, Timing};
use reading::accept;
use std::path::{Path, PathBuf};

fn fixture(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("fixtures/delays")
        .join(name)
}

fn source(name: &str) -> Source {
    let bytes = std::fs::read(fixture(name)).expect("the fixture is there");
    let name = name.to_owned();
    Source { name, bytes }
}

fn table(text: &str) -> Result<DelayTable, String> {
    let source = Source {
        name: "delays.yaml".to_owned(),
        bytes: text.as_bytes().to_vec(),
    };
    delays::read(&source).map_err(|fault| fault.render(&source, false))
}

fn harbour(name: &str) -> DelayModel {
    let read = delays::read(&source(name));
    DelayModel::table(read.unwrap_or_else(|fault| panic!("{fault}")))
}

fn parsed(blif: &str) -> Netlist {
    accept("test.blif", blif).netlist
}

fn longest(netlist: &Netlist, model: DelayModel) -> Time {
    let timing = Timing::of(netlist, &Topology::of(netlist), model);
    timing.time(timing.longest())
}

/// The delays of the pins of the gate that drives `net`, in thousandths.
fn pins(netlist: &Netlist, model: DelayModel, net: &str) -> Vec<i32> {
    let gate = netlist
        .gates()
        .find(|&gate| netlist.net_name(netlist.gate_output(gate)) == net)
        .expect("the gate is there");
    PinDelays::of(netlist, model)
        .of_gate(netlist, gate)
        .to_vec()
}

#[test]
fn a_table_prices_gates_by_inputs_and_what_reads_them() {
    let model = harbour("harbour.yaml");
    assert_eq!((model.name(), model.unit_word()), ("delay-table", "ns"));
    // n: an inverter (0.020 + 0.008 a reader) with two readers, 0.036; y: three
    // inputs, priced as four (0.050 + 0.020 a load) with a port of load 2, 0.090;
    // z: an exclusive-or (0.060 + 0.012 a load), 0.084.
    let netlist = parsed(
        ".model t\n.inputs a b c\n.outputs y z\n.names a n\n0 1\n.names n b c y\n111 1\n\
         .names n b z\n01 1\n10 1\n.end\n",
    );
    assert_eq!(pins(&netlist, model, "n"), [36]);
    assert_eq!(pins(&netlist, model, "y"), [90; 3]);
    assert_eq!(pins(&netlist, model, "z"), [84; 2]);
    assert_eq!(longest(&netlist, model), Time::thousandths(126));
    assert_eq!(longest(&netlist, model).to_string(), "0.126");
}

#[test]
fn gates_wider_than_the_table_are_trees_of_its_widest() {
    let model = harbour("harbour.yaml");
    // Five inputs are two levels of four: the inner drives one pin (0.050 + 0.020),
    // the outer the port (0.050 + 0.040). Seventeen are three levels.
    for (inputs, expected) in [(4, 90), (5, 160), (16, 160), (17, 230)] {
        let names: String = (0..inputs).map(|i| format!(" a{i}")).collect();
        let row = "1".repeat(inputs);
        let blif =
            format!(".model w\n.inputs{names}\n.outputs y\n.names{names} y\n{row} 1\n.end\n");
        assert_eq!(pins(&parsed(&blif), model, "y"), vec![expected; inputs]);
    }
}

#[test]
fn cells_of_a_table_have_their_own_delays_and_loads() {
    let model = harbour("harbour.yaml");
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/cells/harbour.lib");
    let library = Source {
        name: "harbour.lib".to_owned(),
        bytes: std::fs::read(path).expect("the fixture is there"),
    };
    let Ok(library) = cells::read(&library) else {
        panic!("the library reads");
    };
    let netlist = parsed(
        ".model two\n.inputs a0 b0 a1 b1 c0\n.outputs s0 s1 co\n\
         .gate sum_cell A=a0 B=b0 CI=c0 S=s0 CO=c1\n\
         .gate sum_cell A=a1 B=b1 CI=c1 S=s1 CO=co\n.end\n",
    );
    let bound = library.cells.bind(netlist, 1000);
    let netlist = bound.unwrap_or_else(|fault| panic!("{fault}")).netlist;
    // The carry between is read by the CI pin of a cell, by its two gates: each
    // loads 1.5, so 0.090 + 0.030 from A and B and 0.040 + 0.030 from CI.
    let mut carry = pins(&netlist, model, "c1");
    carry.sort_unstable();
    assert_eq!(carry, [70, 120, 120]);
    // Ports load 2: 0.070 + 0.020 from the carry to the sum, 0.120 + 0.020 else.
    let mut sum = pins(&netlist, model, "s1");
    sum.sort_unstable();
    assert_eq!(sum, [90, 140, 140]);
    assert_eq!(longest(&netlist, model), Time::thousandths(120 + 90));
}

/// Delay at a slew between two of the table and a load between two of the table.
#[test]
fn a_library_is_interpolated_at_a_fixed_slew() {
    let model = harbour("harbour.lib");
    assert_eq!((model.name(), model.unit_word()), ("library", "ns"));
    let table = model.as_table().expect("it is one");
    assert!(
        table.note.contains("fixed input slew of 0.1 ns"),
        "{}",
        table.note
    );
    let Ok(library) = cells::read(&source("harbour.lib")) else {
        panic!("the library reads");
    };
    let netlist = parsed(
        ".model two\n.inputs a b c\n.outputs y z\n.gate INV A=a Y=n\n\
         .gate NAND2 A=n B=b Y=y\n.gate NAND2 A=n B=c Y=z\n.end\n",
    );
    let bound = library.cells.bind(netlist, 1000);
    let netlist = bound.unwrap_or_else(|fault| panic!("{fault}")).netlist;
    // INV at slew 0.10 drives two pins of 0.003: between 0.020 at 0.001 and 0.038
    // at 0.010, 5/9 of the way: 0.030.
    assert_eq!(pins(&netlist, model, "n"), [30]);
    // NAND2 at slew 0.10, half way between its own 0.05 and 0.15: 0.035 at 0.001
    // and 0.060 at 0.010; the port loads as the least pin, 0.002, 1/9 of the way:
    // 0.0378.
    assert_eq!(pins(&netlist, model, "y"), [38, 38]);
    assert_eq!(longest(&netlist, model), Time::thousandths(68));
}

/// Gates that are no cell of the library cost what its fastest cell of as many
/// inputs does; wider ones a tree of the widest.
#[test]
fn gates_that_are_no_cell_have_a_price_under_a_library() {
    let model = harbour("harbour.lib");
    let netlist = parsed(
        ".model t\n.inputs a b c\n.outputs w x y\n.names a b w\n11 1\n.names a b x\n01 1\n10 1\n\
         .names a b c y\n111 1\n.end\n",
    );
    assert_eq!(pins(&netlist, model, "w"), [38, 38]);
    assert_eq!(pins(&netlist, model, "x"), [90, 90]);
    // The inner NAND2 drives a pin of 0.003, 2/9 of the way: 0.0406.
    assert_eq!(pins(&netlist, model, "y"), [38 + 41; 3]);
}

#[test]
fn faults_of_a_table_are_told_where_they_are() {
    for (text, place, said) in [
        ("unit: ns\n", "delays.yaml:1", "`gates`"),
        (
            "gates:\n  - {inputs: 2, dealy: 0.1}\n",
            "delays.yaml:2:17",
            "did you mean `delay`?",
        ),
        ("gtes: []\n", "delays.yaml:1:1", "did you mean `gates`?"),
        (
            "gates: [{inputs: 2, slope: 1}]\n",
            "delays.yaml:1",
            "expected `delay`",
        ),
        (
            "gates: [{inputs: 2, delay: -1}]\n",
            "delays.yaml:1:28",
            "a number from 0",
        ),
        (
            "gates: [{inputs: 2, delay: fast}]\n",
            "delays.yaml:1:28",
            "`fast`",
        ),
        (
            "gates: [{inputs: 2, delay: .nan}]\n",
            "delays.yaml:1:28",
            "a number from 0",
        ),
        (
            "gates: [{inputs: 2, delay: 1}, {inputs: 2, delay: 1}]\n",
            "delays.yaml:1:41",
            "entries ascend",
        ),
        ("gates: 3\n", "delays.yaml:1:8", "a list of entries"),
        ("gates: []\n", "delays.yaml:1", "found none"),
        ("- 1\n", "delays.yaml:1", "one of `unit`"),
        (
            "unit: 7\ngates: [{inputs: 2, delay: 1}]\n",
            "delays.yaml:1:7",
            "`unit`, a word",
        ),
        (
            "gates: [{inputs: 2, delay: 1}]\ncells: {X: {delays: {Y: {A: {}}}}}\n",
            "delays.yaml:2",
            "expected `delay`",
        ),
        (
            "gates: [{inputs: 2, delay: 1}]\ncells: {X: {load: {A: 1}}}\n",
            "delays.yaml:2:13",
            "did you mean `loads`?",
        ),
    ] {
        let fault = table(text).expect_err(text);
        assert!(fault.contains(place), "{text}: {fault}");
        assert!(fault.contains(said), "{text}: {fault}");
    }
    assert!(table("gates: [{inputs: 2, delay: 1}]\n").is_ok());
}

#[test]
fn faults_of_a_library_are_told_at_their_line() {
    let head = "library (x) {\n lu_table_template (t) { variable_1 : input_net_transition;\n  \
                variable_2 : total_output_net_capacitance; index_1 (\"1, 2\"); index_2 (\"1, 2\"); }\n";
    let cell = |table: &str| {
        format!(
            "{head} cell (A) {{ pin (I) {{ direction : input; }}\n pin (O) {{ direction : output; \
             function : \"I\"; timing () {{ related_pin : \"I\";\n {table} }} }} }}\n}}\n"
        )
    };
    for (text, place, said) in [
        (
            cell("cell_rise (t) { values (\"1, 2, 3\"); }"),
            ":6",
            "expected 4 values, found 3",
        ),
        (
            cell("cell_rise (t) { values (\"1, 2, x, 4\"); }"),
            ":6",
            "expected a number",
        ),
        (
            cell("cell_rise (u) { values (\"1, 2\"); }"),
            ":6",
            "`lu_table_template`",
        ),
        (
            cell("cell_rise (t) { index_1 (\"2, 1\"); values (\"1, 2, 3, 4\"); }"),
            ":6",
            "an axis that ascends",
        ),
        (cell(""), ":1", "expected a cell of one output"),
        (
            "library (x) {\n cell (A) {\n".to_owned(),
            ":3",
            "expected `}`",
        ),
    ] {
        let source = Source {
            name: "x.lib".to_owned(),
            bytes: text.clone().into_bytes(),
        };
        let fault = delays::read(&source).expect_err(&text);
        let fault = fault.render(&source, false);
        assert!(fault.contains(&format!("x.lib{place}")), "{text}: {fault}");
        assert!(fault.contains(said), "{text}: {fault}");
    }
}

#[test]
fn the_command_line_takes_files_of_delays() {
    let run = |delay: &str, form: &str| {
        let netlist = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/tide_logger.blif");
        assert_cmd::Command::cargo_bin("carrywise")
            .expect("it is built")
            .args([
                "audit",
                &netlist.to_string_lossy(),
                "--delay",
                delay,
                "--as",
                form,
            ])
            .output()
            .expect("it runs")
    };
    for name in ["harbour.yaml", "harbour.lib"] {
        let path = fixture(name);
        for form in ["table", "markdown", "yaml", "json"] {
            let output = run(&path.to_string_lossy(), form);
            let text = String::from_utf8_lossy(&output.stdout).into_owned();
            assert_eq!(output.status.code(), Some(0), "{name} {form}");
            assert!(text.contains("ns"), "{name} {form}: {text}");
            assert!(text.contains("harbour"), "{name} {form}: {text}");
        }
    }
    let missing = run("./nowhere.yaml", "table");
    assert_eq!(missing.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&missing.stderr).contains("nowhere.yaml"));
    let near = run("logical-efort", "table");
    assert_eq!(near.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&near.stderr).contains("did you mean `logical-effort`?"));
}
