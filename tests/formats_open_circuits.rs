//! Every open circuit is read, with the sizes that its collection states.
//!
//! Outside source: `facts.tsv` beside the circuits (inputs and outputs of the
//! EPFL circuits from the suite's README, gates from the AIGER headers, ISCAS'85
//! gates from the original gate lists).

mod support;

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::{self, Parsed, ReadOptions};
use carrywise::netlist::Driver;
use carrywise::source;
use std::fs::File;
use std::path::Path;

fn read(path: &Path) -> Parsed {
    let file = File::open(path).expect("the circuit opens");
    let source = source::read(path.display().to_string(), file).expect("the circuit is readable");
    format::read(&source, &ReadOptions::default()).unwrap_or_else(|errors| {
        let told: Vec<_> = errors.iter().map(ToString::to_string).collect();
        panic!("{}", told.join("\n"))
    })
}

#[test]
fn sizes_equal_the_published_ones() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let facts = std::fs::read_to_string(folder.join("facts.tsv")).expect("facts.tsv is there");
    let mut rows = 0;
    for row in facts.lines().skip(1) {
        let fields: Vec<&str> = row.split('\t').collect();
        let parsed = read(&folder.join(fields[0]));
        let n = &parsed.netlist;
        let sizes = [n.inputs().len(), n.outputs().len(), n.gate_count()];
        let stated = [1, 2, 3].map(|i| fields[i].parse::<usize>().expect("a number"));
        assert_eq!(sizes, stated, "{}", fields[0]);
        let widest = n.gates().map(|g| n.fan_ins(g).len()).max();
        assert_eq!(widest, fields[5].parse().ok(), "{}", fields[0]);
        assert_eq!(parsed.warnings, [], "{}", fields[0]);
        rows += 1;
    }
    assert_eq!(rows, 21);
}

#[test]
fn every_file_of_every_collection_is_read() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let mut count = 0;
    for collection in ["epfl", "iscas85", "mcnc"] {
        let entries = std::fs::read_dir(folder.join(collection)).expect("the collection is there");
        for entry in entries {
            let path = entry.expect("a folder entry").path();
            let extension = path.extension().unwrap_or_default();
            if extension == "aig" || extension == "blif" {
                let parsed = read(&path);
                assert_eq!(parsed.netlist.contended().len(), 0, "{}", path.display());
                count += 1;
            }
        }
    }
    assert_eq!(count, 40);
}

/// What the README beside the circuits says of single files.
#[test]
fn oddities_listed_for_single_files_are_found() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let mcnc = |name: &str| read(&folder.join("mcnc").join(name));
    let undriven = |parsed: &Parsed| {
        let n = &parsed.netlist;
        n.nets()
            .filter(|&net| n.driver(net) == Driver::None)
            .count()
    };
    assert_eq!(undriven(&mcnc("mult32b.blif")), 1);
    let s953 = mcnc("s953.blif");
    let n = &s953.netlist;
    let undriven_outputs = n.outputs().iter();
    let undriven_outputs = undriven_outputs.filter(|o| n.driver(o.signal.net) == Driver::None);
    assert_eq!((undriven_outputs.count(), undriven(&s953)), (23, 23));
    let told = |name: &str| -> Vec<String> {
        let warnings = mcnc(name).warnings;
        warnings.iter().map(|w| w.message.clone()).collect()
    };
    assert_eq!(
        told("dekoder.blif"),
        ["1 section of don't-cares (`.exdc`) skipped"]
    );
    let s27 = mcnc("s27.blif");
    assert_eq!(
        (s27.warnings, s27.constraints.wire_load_slope),
        (vec![], Some(0.0))
    );
    for quiet in ["i1", "i2", "i8", "k2", "clmb", "mm4a", "mult32b"] {
        assert_eq!(told(&format!("{quiet}.blif")), [""; 0], "{quiet}");
    }
    let adder = mcnc("my_adder.blif").netlist;
    assert_eq!((adder.inputs().len(), adder.outputs().len()), (33, 17));
}

/// The suite holds some circuits in both formats; read, they are one function.
#[test]
fn circuits_held_in_both_formats_agree() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let mut random = fastrand::Rng::with_seed(20);
    for name in ["adder", "bar", "ctrl", "max", "router"] {
        let [blif, aig] =
            ["blif", "aig"].map(|form| read(&folder.join(format!("epfl/{name}.{form}"))).netlist);
        assert_eq!(
            reading::input_names(&blif),
            reading::input_names(&aig),
            "{name}"
        );
        assert_eq!(
            reading::output_names(&blif),
            reading::output_names(&aig),
            "{name}"
        );
        for _ in 0..8 {
            let inputs: Vec<u64> = blif.inputs().iter().map(|_| random.u64(..)).collect();
            let [left, right] = [&blif, &aig].map(|n| reading::outputs(n, &inputs, &[]));
            assert!(left == right, "{name} differs");
        }
    }
}
