//! Write, read again, equal: for every fixture and every open circuit, in the
//! format it came in and in the other one.
//!
//! Outside source: the open circuits, and the two formats' own documents, which the
//! readers follow; functions are compared by simulation of the whole netlist on
//! random vectors, inputs and registers alike.

mod support;

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::aiger::{self, Form, WriteError};
use carrywise::format::{self, Format, Parsed, ReadOptions, blif};
use carrywise::netlist::{BoxKind, Driver, Initial, Netlist, PropertyKind};
use carrywise::source::{self, Limits};
use reading::{accept, fixture, input_names, output_names};
use std::fs::File;
use std::path::{Path, PathBuf};

fn blif_text(netlist: &Netlist) -> Vec<u8> {
    let mut text = Vec::new();
    blif::write(netlist, &mut text).expect("memory takes everything");
    text
}

fn aiger_bytes(netlist: &Netlist, form: Form) -> Result<Vec<u8>, WriteError> {
    let mut bytes = Vec::new();
    aiger::write(netlist, form, &mut bytes)?;
    Ok(bytes)
}

fn load(path: &Path) -> Parsed {
    let file = File::open(path).expect("it opens");
    let name = path.display().to_string();
    let limits = Limits::for_gates(1_000_000);
    let source = source::read_unpacked(name, file, limits).expect("it is readable");
    format::read(&source, &ReadOptions::default())
        .unwrap_or_else(|errors| panic!("{}", reading::told(&errors)))
}

/// Files of the fixtures that are read; those made to be refused left out.
fn fixtures() -> Vec<PathBuf> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures");
    let mut paths = Vec::new();
    for folder in [root.join("formats"), root] {
        for entry in std::fs::read_dir(folder).expect("the fixtures are there") {
            let path = entry.expect("an entry").path();
            let extension = path.extension().unwrap_or_default();
            let refused = path.ends_with("blank_after_backslash.blif");
            if ["blif", "aag", "aig"].iter().any(|e| extension == *e) && !refused {
                paths.push(path);
            }
        }
    }
    paths.sort();
    paths
}

fn circuits() -> Vec<PathBuf> {
    let Some(folder) = support::datasets() else {
        return Vec::new();
    };
    let mut paths = Vec::new();
    for collection in ["epfl", "iscas85", "mcnc"] {
        for entry in std::fs::read_dir(folder.join(collection)).expect("it is there") {
            let path = entry.expect("an entry").path();
            let extension = path.extension().unwrap_or_default();
            if extension == "aig" || extension == "blif" {
                paths.push(path);
            }
        }
    }
    paths.sort();
    assert_eq!(paths.len(), 40);
    paths
}

/// A netlist in words: everything but lines and the numbers of nets. `inner` names
/// the nets that the format names; AIGER names none of its ANDs.
fn described(netlist: &Netlist, inner: bool) -> Vec<String> {
    let name = |net| match netlist.driver(net) {
        Driver::Gate(gate) if !inner => format!("gate {}", gate.index()),
        _ => netlist.net_name(net),
    };
    let names = |nets: &[carrywise::netlist::NetId]| -> Vec<String> {
        nets.iter().map(|&net| name(net)).collect()
    };
    let signal = |s: carrywise::netlist::Signal| (name(s.net), s.inverted);
    let mut text = vec![format!("{:?}", input_names(netlist))];
    for output in netlist.outputs() {
        let shown = (netlist.output_name(output), signal(output.signal));
        text.push(format!("output {shown:?}"));
    }
    for r in netlist.registers() {
        let control = r.control.map(name);
        let what = (
            signal(r.input),
            name(r.output),
            r.trigger,
            control,
            r.initial,
        );
        text.push(format!("register {what:?}"));
    }
    for gate in netlist.gates() {
        let pins = names(netlist.fan_ins(gate));
        let function = netlist.function(gate);
        let output = name(netlist.gate_output(gate));
        text.push(format!("gate {pins:?} {output} {function:?}"));
    }
    for each in netlist.boxes() {
        let pins: Vec<_> = each
            .pins
            .iter()
            .map(|&pin| netlist.names().text(pin))
            .collect();
        let model = netlist.names().text(each.model);
        let (inputs, outputs) = (names(&each.inputs), names(&each.outputs));
        // Written, a state table is a model that is not there.
        let kind = match each.kind {
            BoxKind::StateTable => BoxKind::Model,
            other => other,
        };
        text.push(format!(
            "box {model} {kind:?} {inputs:?} {outputs:?} {pins:?}"
        ));
    }
    for each in netlist.contended() {
        text.push(format!(
            "contended {} {}",
            name(each.net),
            each.drivers.len()
        ));
    }
    for p in netlist.properties() {
        let named = p.name.map(|name| netlist.names().text(name).into_owned());
        text.push(format!(
            "property {:?} {:?} {named:?}",
            p.kind,
            signal(p.signal)
        ));
    }
    text
}

/// Outputs and next states agree on random vectors. Inputs of `left` that `right`
/// does not have, or the other way round, are none of the same function.
fn agree(left: &Netlist, right: &Netlist, what: &str) {
    assert_eq!(left.outputs().len(), right.outputs().len(), "{what}");
    assert_eq!(left.registers().len(), right.registers().len(), "{what}");
    let (left_names, right_names) = (input_names(left), input_names(right));
    let common = left_names.len().min(right_names.len());
    assert_eq!(left_names[..common], right_names[..common], "{what}");
    let mut random = fastrand::Rng::with_seed(7);
    for _ in 0..4 {
        // Nets without driver read 0; where they became inputs those are 0 too.
        let mut inputs: Vec<u64> = (0..common).map(|_| random.u64(..)).collect();
        inputs.resize(left.inputs().len().max(right.inputs().len()), 0);
        let states: Vec<u64> = left.registers().iter().map(|_| random.u64(..)).collect();
        let [l, r] = [left, right].map(|n| {
            let inputs = &inputs[..n.inputs().len()];
            let shown = reading::outputs(n, inputs, &states);
            (shown, reading::next(n, inputs, &states))
        });
        assert!(l == r, "{what}: the functions differ");
    }
}

/// Flat BLIF comes out as it was; a hierarchy comes out flat, and stays so.
fn blif_round(path: &Path) {
    let what = path.display().to_string();
    let parsed = load(path);
    if parsed.format != Format::Blif {
        return;
    }
    let again = accept(&what, blif_text(&parsed.netlist));
    // Whole names of nets are what is written, so paths compare as they stand.
    let before = described(&parsed.netlist, true);
    let after = described(&again.netlist, true);
    for (l, r) in before.iter().zip(&after) {
        assert_eq!(l, r, "{what}");
    }
    assert_eq!(before.len(), after.len(), "{what}");
    let twice = blif_text(&again.netlist);
    assert!(twice == blif_text(&parsed.netlist), "{what}");
}

fn aiger_round(path: &Path) {
    let what = path.display().to_string();
    let parsed = load(path);
    if parsed.format == Format::Blif {
        return;
    }
    let in_order = described(&parsed.netlist, false);
    for form in [Form::Ascii, Form::Binary] {
        let bytes = aiger_bytes(&parsed.netlist, form).expect("AIGER holds what it held");
        let again = accept(&what, &bytes);
        agree(&parsed.netlist, &again.netlist, &what);
        assert_eq!(again.netlist.gate_count(), parsed.netlist.gate_count());
        if parsed.format == Format::AigerBinary {
            assert!(described(&again.netlist, false) == in_order, "{what}");
            if form == Form::Binary {
                let read = std::fs::read(path).expect("read once already");
                let comment = read.windows(3).rposition(|w| w == b"\nc\n");
                let read = &read[..comment.map_or(read.len(), |at| at + 1)];
                assert!(bytes.starts_with(&read[..32.min(read.len())]), "{what}");
            }
        }
        // From now on nothing changes any more.
        let twice = aiger_bytes(&again.netlist, form).expect("it was just written");
        assert!(twice == bytes, "{what}");
    }
}

/// Into the other format and back.
fn across(path: &Path) -> bool {
    let what = path.display().to_string();
    let parsed = load(path);
    let netlist = &parsed.netlist;
    if parsed.format != Format::Blif {
        let text = accept(&what, blif_text(netlist)).netlist;
        assert_eq!(output_names(&text), output_names(netlist), "{what}");
        agree(netlist, &text, &what);
        return true;
    }
    for form in [Form::Ascii, Form::Binary] {
        let Ok(bytes) = aiger_bytes(netlist, form) else {
            return false;
        };
        let graph = accept(&what, &bytes).netlist;
        assert_eq!(output_names(&graph), output_names(netlist), "{what}");
        agree(netlist, &graph, &what);
        let text = accept(&what, blif_text(&graph)).netlist;
        agree(&graph, &text, &what);
    }
    true
}

#[test]
fn fixtures_come_out_as_they_were_read() {
    let paths = fixtures();
    assert!(paths.len() > 60, "{}", paths.len());
    for path in paths {
        blif_round(&path);
        aiger_round(&path);
    }
}

#[test]
fn open_circuits_come_out_as_they_were_read() {
    for path in circuits() {
        blif_round(&path);
        aiger_round(&path);
    }
}

#[test]
fn fixtures_keep_their_function_in_the_other_format() {
    let refused: Vec<_> = fixtures()
        .into_iter()
        .filter(|path| !across(path))
        .collect();
    let mut refused: Vec<_> = refused
        .iter()
        .filter_map(|path| path.file_name()?.to_str())
        .collect();
    refused.sort_unstable();
    // Black boxes, two drivers on a net, several clocks and kinds of latches.
    assert_eq!(
        refused,
        [
            "boxes.blif",
            "latches.blif",
            "state_table_alone.blif",
            "twice_driven.blif"
        ]
    );
}

#[test]
fn open_circuits_keep_their_function_in_the_other_format() {
    for path in circuits() {
        assert!(across(&path), "{} was refused", path.display());
    }
}

#[test]
fn what_aiger_cannot_hold_is_refused_by_name() {
    let refused = |text: &str| {
        let netlist = accept("x.blif", text).netlist;
        match aiger_bytes(&netlist, Form::Ascii) {
            Err(error) => error.to_string(),
            Ok(_) => panic!("written: {text}"),
        }
    };
    let ports = ".inputs a b clk\n.outputs y\n";
    let cases = [
        (
            ".subckt depot A=a Y=y\n",
            "AIGER cannot hold black box depot (line 3)",
        ),
        (
            ".names a y\n1 1\n.names b y\n1 1\n",
            "AIGER cannot hold net y (line 3), which has several drivers",
        ),
        (
            ".names a k y\n11 1\n.names y k\n0 1\n",
            "AIGER cannot hold the loop without register through net ",
        ),
        (
            ".latch a y ah clk 0\n",
            "AIGER cannot hold register y (line 3), which no clock edge sets",
        ),
        (
            ".latch a y re clk 0\n.latch a z re b 0\n",
            "AIGER cannot hold register z (line 4), which is on a second clock",
        ),
        (
            ".names a b g\n11 1\n.latch a y re g 0\n",
            "AIGER cannot hold register y (line 5), whose clock comes from logic",
        ),
    ];
    for (body, expected) in cases {
        let told = refused(&format!("{ports}{body}"));
        assert!(told.starts_with(expected), "{told}");
    }
}

#[test]
fn names_that_blif_cannot_hold_are_made_to_fit() {
    // Symbols of AIGER reach to the end of their line.
    let text =
        "aag 3 2 0 3 1\n2\n4\n6\n7\n6\n6 2 4\ni0 water level\ni1 #\no0 high\no1 high\no2 i1\n";
    let graph = accept("odd.aag", text).netlist;
    let netlist = accept("odd.blif", blif_text(&graph)).netlist;
    assert_eq!(input_names(&netlist), ["water_level", "_"]);
    assert_eq!(output_names(&netlist), ["high", "high_2", "i1"]);
    let [a, b] = [reading::VARIABLE[0], reading::VARIABLE[1]];
    let shown = reading::outputs(&netlist, &[a, b], &[]);
    assert_eq!(shown, [a & b, !(a & b), a & b]);
}

#[test]
fn constants_inverted_ports_and_registers_are_put_in_blif_words() {
    let text = "aag 2 1 1 3 0\n2\n4 3 1\n0\n1\n5\nl0 kept\no0 low\no1 high\no2 not_kept\n";
    let graph = accept("c.aag", text).netlist;
    let netlist = accept("c.blif", blif_text(&graph)).netlist;
    let a = reading::VARIABLE[0];
    assert_eq!(reading::outputs(&netlist, &[a], &[a]), [0, !0, !a]);
    assert_eq!(reading::next(&netlist, &[a], &[0]), [!a]);
    assert_eq!(netlist.registers()[0].initial, Initial::One);
    assert_eq!(netlist.net_name(netlist.registers()[0].output), "kept");
}

#[test]
fn properties_survive_in_aiger_and_are_named_in_blif() {
    let parsed = fixture("properties.aag");
    let count = parsed.netlist.properties().len();
    assert!(count > 4);
    let again = accept(
        "p.aig",
        aiger_bytes(&parsed.netlist, Form::Binary).expect("fits"),
    );
    let kinds =
        |n: &Netlist| -> Vec<PropertyKind> { n.properties().iter().map(|p| p.kind).collect() };
    assert_eq!(kinds(&parsed.netlist), kinds(&again.netlist));
    let text = String::from_utf8(blif_text(&parsed.netlist)).expect("ASCII");
    assert!(text.contains(&format!("# {count} verification properties")));
}

/// Every table of up to four inputs, through both writers.
#[test]
fn every_small_function_is_written_as_it_is() {
    for pins in 0..=3usize {
        for bits in 0..1u64 << (1 << pins) {
            function_survives(pins, bits);
        }
    }
    let mut random = fastrand::Rng::with_seed(41);
    for pins in 4..=6 {
        for _ in 0..300 {
            function_survives(pins, random.u64(..));
        }
    }
}

fn function_survives(pins: usize, bits: u64) {
    use carrywise::netlist::{Function, NetlistBuilder, ScopeId, Signal, TruthTable};
    let mut builder = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let net = |builder: &mut NetlistBuilder, name: &str| {
        let name = builder.name(name.as_bytes());
        builder.add_net(Some(name), top).expect("room")
    };
    let inputs: Vec<_> = (0..pins)
        .map(|i| net(&mut builder, &format!("a{i}")))
        .collect();
    let output = net(&mut builder, "y");
    for &input in &inputs {
        builder.add_input(input, 0);
    }
    let function = builder.function(Function::Table(TruthTable::new(pins, bits)));
    builder
        .add_gate(function, &inputs, output, top, 0)
        .expect("room");
    builder.add_output(Signal::plain(output), None, 0);
    let netlist = builder.finish();
    let expected = reading::outputs(&netlist, &reading::VARIABLE[..pins], &[]);
    let written = [
        accept("f.blif", blif_text(&netlist)),
        accept("f.aag", aiger_bytes(&netlist, Form::Ascii).expect("fits")),
        accept("f.aig", aiger_bytes(&netlist, Form::Binary).expect("fits")),
    ];
    for again in written {
        let found = reading::outputs(&again.netlist, &reading::VARIABLE[..pins], &[]);
        assert_eq!(found, expected, "{pins} pins, {bits:x}");
    }
    let gate = netlist.gates().next().expect("one gate");
    let again = accept("f.blif", blif_text(&netlist)).netlist;
    assert_eq!(again.function(gate), netlist.function(gate));
}

#[test]
fn boxes_keep_their_pins_and_kind() {
    let netlist = fixture("boxes.blif").netlist;
    let kinds: Vec<_> = netlist.boxes().iter().map(|each| each.kind).collect();
    let latch = BoxKind::LatchCell(Initial::One);
    assert_eq!(kinds, [BoxKind::Model, BoxKind::Cell, latch]);
    let pins: Vec<_> = netlist
        .boxes()
        .iter()
        .flat_map(|each| &each.pins)
        .map(|&pin| netlist.names().text(pin).into_owned())
        .collect();
    assert_eq!(pins, ["A", "Q", "A", "B", "O", "D", "", "Q"]);
    let text = String::from_utf8(blif_text(&netlist)).expect("ASCII");
    assert!(
        text.contains(".mlatch dlatch D=q Q=kept strobe 1\n"),
        "{text}"
    );
}
