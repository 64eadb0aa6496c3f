//! What BLIF says beyond gates, latches and hierarchy: times, loads, state tables,
//! further files; and packed input.
//!
//! Outside source: the BLIF document of 28 July 1992 (from memory), RFC 1952 for
//! gzip and RFC 8878 for zstd; the packed fixtures were made with the ordinary
//! `gzip` and `zstd` programs.

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::constraints::*;
use carrywise::format::files::{FileAccess, Refusal};
use carrywise::format::{self, Parsed, ReadOptions, blif};
use carrywise::netlist::{BoxKind, Netlist};
use carrywise::source::{self, Limits, ReadError, Source};
use reading::{VARIABLE, accept, fixture, fixture_bytes, input_names, outputs, told};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::sync::Arc;

fn warnings(parsed: &Parsed) -> Vec<String> {
    parsed.warnings.iter().map(ToString::to_string).collect()
}

fn both(rise: f64, fall: f64) -> RiseFall {
    RiseFall { rise, fall }
}

/// The name of an edge, `r'clk`.
fn edge(netlist: &Netlist, edge: ClockEdge) -> String {
    let side = if edge.rising { "r" } else { "f" };
    format!("{side}'{}", netlist.names().text(edge.clock))
}

#[test]
fn times_loads_and_areas_are_kept_as_they_stand() {
    let parsed = fixture("constraints.blif");
    assert_eq!(warnings(&parsed), [""; 0]);
    let (n, c) = (&parsed.netlist, &parsed.constraints);
    let name = |net| n.net_name(net);
    let arrivals: Vec<_> = c
        .input_arrival
        .iter()
        .map(|a| {
            let from = a.reference.map(|r| (r.before, edge(n, r.edge)));
            (name(a.net), a.at, from, a.line)
        })
        .collect();
    assert_eq!(
        arrivals,
        [
            ("level".to_owned(), both(2.0, 2.5), None, 6),
            (
                "gate".to_owned(),
                both(1.0, 1.25),
                Some((false, "r'clk".to_owned())),
                7
            ),
        ]
    );
    let required = &c.output_required[0];
    assert_eq!(
        (name(required.net).as_str(), required.at),
        ("shown", both(9.5, 10.0))
    );
    let reference = required.reference.expect("an edge");
    assert!(reference.before);
    assert_eq!(edge(n, reference.edge), "f'clk");
    assert_eq!(c.default_input_arrival, Some(both(0.5, 0.75)));
    assert_eq!(c.default_output_required, Some(both(12.0, 12.5)));
    assert_eq!(c.input_drive[0].drive, both(0.1, 0.2));
    assert_eq!(c.default_input_drive, Some(both(0.3, 0.4)));
    assert_eq!(
        (c.max_input_load[0].load, c.default_max_input_load),
        (4.0, Some(8.0))
    );
    assert_eq!(
        (c.output_load[0].load, c.default_output_load),
        (1.5, Some(2.0))
    );
    assert_eq!(c.wire_load_slope, Some(0.25));
    assert_eq!(c.wire_loads, [0.5, 0.75, 1.0]);
    assert_eq!(c.cycle, Some(20.0));
    let events: Vec<_> = c
        .clock_events
        .iter()
        .map(|event| {
            let edges = event.edges.iter();
            let edges = edges.map(|each| (edge(n, each.edge), each.slack));
            (event.percent, edges.collect::<Vec<_>>())
        })
        .collect();
    let plain = |text: &str| (text.to_owned(), None);
    assert_eq!(
        events,
        [
            (0.0, vec![plain("r'clk")]),
            (
                50.0,
                vec![
                    ("f'clk".to_owned(), Some((0.5, 1.5))),
                    plain("f'spare"),
                    plain("r'third"),
                ]
            ),
        ]
    );
    let clocks: Vec<_> = c.clocks.iter().map(|&net| name(net)).collect();
    assert_eq!(clocks, ["clk"]);
    let cell = &c.models[0];
    assert_eq!(n.names().text(cell.model), "gauge_cell");
    assert_eq!((cell.area, cell.delays.len()), (Some(3.5), 2));
    let [level, gate] = [cell.delays[0], cell.delays[1]];
    assert_eq!(n.names().text(level.pin), "level");
    assert_eq!(
        (level.phase, gate.phase),
        (Phase::Inverting, Phase::NonInverting)
    );
    // Block and drive to rise come before those to fall.
    assert_eq!(
        (level.block, level.drive),
        (both(0.5, 0.6), both(0.05, 0.06))
    );
    assert_eq!((level.load, level.most_load), (1.0, 10.0));
    assert_eq!((gate.block, gate.drive), (both(0.7, 0.8), both(0.07, 0.08)));
    assert_eq!(n.gate_count(), 1);
}

#[test]
fn odd_lines_about_times_are_told_and_the_last_counts() {
    let parsed = fixture("constraints_odd.blif");
    let c = &parsed.constraints;
    // The line before the first model is the first model's.
    assert_eq!(c.cycle, Some(9.0));
    assert_eq!(c.input_arrival.len(), 1);
    assert_eq!(
        (c.input_arrival[0].at, c.input_arrival[0].line),
        (both(3.0, 4.0), 7)
    );
    assert_eq!(c.output_required, []);
    assert_eq!(c.models.len(), 1);
    insta::assert_snapshot!(warnings(&parsed).join("\n"));
    assert!(fixture("hierarchy.blif").constraints.is_empty());
}

#[test]
fn a_state_table_without_logic_is_a_black_box() {
    let parsed = fixture("state_table_alone.blif");
    let n = &parsed.netlist;
    let each = &n.boxes()[0];
    assert_eq!(n.boxes().len(), 1);
    assert_eq!(each.kind, BoxKind::StateTable);
    assert_eq!(n.names().text(each.model), "sequencer");
    assert_eq!(n.net_name(each.inputs[0]), "level");
    assert_eq!(n.net_name(each.outputs[0]), "lamp");
    let pins: Vec<_> = each.pins.iter().map(|&pin| n.names().text(pin)).collect();
    assert_eq!(pins, ["go", "lit"]);
    let scope = n.scope_path(each.scope);
    assert_eq!(scope.len(), 1);
    assert_eq!(n.names().text(scope[0]), "sequencer_1");
    assert_eq!(
        warnings(&parsed),
        [
            "state_table_alone.blif:10: warning: the state table of model `sequencer` has no \
             logic: kept as a black box; put the gates and latches of the state machine after the \
             table to see inside"
        ]
    );
}

/// The clock is no input of the table; written, the box does not contain itself.
#[test]
fn a_state_table_may_be_the_design_itself() {
    let text = ".model quay\n.inputs go clk\n.outputs lit\n.clock clk\n.start_kiss\n.i 1\n.o 1\n\
                0 s s 1\n.end_kiss\n";
    let netlist = accept("quay.blif", text).netlist;
    assert_eq!(netlist.boxes().len(), 1);
    assert_eq!(netlist.boxes()[0].inputs.len(), 2);
    let mut written = Vec::new();
    blif::write(&netlist, &mut written).expect("written");
    let again = accept("quay.blif", written).netlist;
    assert_eq!(again.boxes().len(), 1);
    assert_eq!(again.names().text(again.boxes()[0].model), "quay_table");
}

#[test]
fn a_state_table_beside_logic_is_passed_over() {
    let parsed = fixture("state_table.blif");
    assert_eq!(
        (parsed.netlist.gate_count(), parsed.netlist.boxes().len()),
        (1, 0)
    );
    let told = warnings(&parsed);
    assert!(
        told[0].contains("skipped; the logic beside it is read"),
        "{told:?}"
    );
    assert!(told[1].starts_with("state_table.blif:7: warning: expected as many rows as `.p`"));
    assert_eq!(told.len(), 2);
}

#[test]
fn latch_cells_name_their_control_and_initial_value() {
    for line in [".mlatch dff d=a q=y NIL", ".mlatch dff d=a q=y NIL 0"] {
        let text = format!(".inputs a\n.outputs y\n{line}\n");
        let netlist = accept("cell.blif", text).netlist;
        assert_eq!(netlist.boxes()[0].inputs.len(), 1);
    }
}

/// Files by name, in folders that are only names.
#[derive(Debug)]
struct Shelf(Vec<(&'static str, String)>);

impl FileAccess for Shelf {
    fn main(&self) -> PathBuf {
        PathBuf::from(self.0[0].0)
    }

    fn locate(&self, _: &Path, wanted: &[u8]) -> Result<PathBuf, Refusal> {
        let wanted = String::from_utf8_lossy(wanted);
        match self.0.iter().find(|(name, _)| *name == wanted) {
            Some((name, _)) => Ok(PathBuf::from(name)),
            None => Err(Refusal {
                found: "no such file".to_owned(),
                help: "look elsewhere".to_owned(),
            }),
        }
    }

    fn open(&self, path: &Path) -> Result<Arc<Source>, Refusal> {
        let found = self.0.iter().find(|(name, _)| Path::new(name) == path);
        let (name, text) = found.expect("it was located");
        Ok(Arc::new(reading::source(name, text)))
    }
}

fn shelf(files: &[(&'static str, &str)]) -> Result<Parsed, String> {
    let files: Vec<_> = files.iter().map(|&(n, t)| (n, t.to_owned())).collect();
    let source = reading::source(files[0].0, &files[0].1);
    let options = ReadOptions {
        files: Some(Arc::new(Shelf(files))),
        ..Default::default()
    };
    format::read(&source, &options).map_err(|errors| told(&errors))
}

const INNER: &str = ".model inner\n.inputs a\n.outputs y\n\n.names a y\n0 1\n.end\n";

#[test]
fn models_come_from_the_files_that_are_named() {
    let main = ".model main\n.inputs a\n.outputs y\n.search b\n.subckt inner a=a y=m\n\
                .names m y\n1 1\n.end\n.search c\n";
    let parsed = shelf(&[("main", main), ("b", ".search c\n"), ("c", INNER)]).expect("readable");
    let n = &parsed.netlist;
    assert_eq!(outputs(n, &[VARIABLE[0]], &[]), [!VARIABLE[0]]);
    // A gate of another file is told with the line that brought it in.
    let lines: Vec<_> = n.gates().map(|gate| n.gate_line(gate)).collect();
    assert_eq!(lines, [5, 6]);
    assert_eq!(parsed.warnings, []);
}

#[test]
fn without_access_a_named_file_is_told_and_not_read() {
    let parsed = accept(
        "alone.blif",
        ".search b\n.model m\n.inputs a\n.outputs a\n.end\n",
    );
    let told = warnings(&parsed);
    assert!(told[0].starts_with("alone.blif:1: warning: `.search` is not a word that is read"));
}

#[test]
fn faults_around_further_files_name_the_right_file() {
    let main = ".model main\n.inputs a\n.outputs y\n.search b\n.subckt inner a=a y=y\n.end\n";
    let cases: Vec<Vec<(&'static str, &str)>> = vec![
        vec![("main", main)],
        vec![("main", main), ("b", "")],
        vec![("main", main), ("b", "aag 0 0 0 0 0\n")],
        vec![("main", main), ("b", "not a netlist\n")],
        vec![
            ("main", main),
            ("b", ".model inner\n.inputs a\n.names a b y\n1 1\n.end\n"),
        ],
        vec![("main", main), ("b", ".model main\n.end\n")],
        vec![("main", main), ("b", ".search main\n")],
        vec![("main", main), ("b", ".search b\n")],
        vec![("main", main), ("b", ".search c\n"), ("c", ".search b\n")],
        vec![("main", main), ("b", ".search c d\n")],
        vec![("main", main), ("b", ".search nowhere\n")],
        vec![
            ("main", main),
            ("b", ".model inner\n.inputs a z\n.subckt main a=a\n.end\n"),
        ],
        vec![("main", main), ("b", ".model inner\n.inputs z\n.end\n")],
        vec![("main", main), ("b", ".model inner\n.inputs a \\")],
    ];
    let mut text = String::new();
    for files in cases {
        let shown: Vec<_> = files[1..]
            .iter()
            .map(|(name, text)| format!("{name}: {}", text.replace('\n', " / ")))
            .collect();
        let told = shelf(&files).err().expect("refused");
        text.push_str(&format!("{}\n{told}\n\n", shown.join("; ")));
    }
    insta::assert_snapshot!(text);
}

#[test]
fn a_thousand_files_are_enough() {
    let names: Vec<&'static str> = (0..1100)
        .map(|i| &*Box::leak(format!("f{i}").into_boxed_str()))
        .collect();
    let texts: Vec<String> = (1..=1100).map(|i| format!(".search f{i}\n")).collect();
    let mut files: Vec<_> = names
        .iter()
        .copied()
        .zip(texts.iter().map(String::as_str))
        .collect();
    files[1099].1 = INNER;
    let told = shelf(&files).err().expect("refused");
    assert!(
        told.contains("f999:1:9: error") && told.contains("more than 1000 files"),
        "{told}"
    );
}

fn unpack(name: &str, bytes: &[u8], limits: Limits) -> Result<Source, String> {
    source::read_unpacked(name, bytes, limits).map_err(|error| match error {
        ReadError::Packed(fault) => fault.to_string(),
        ReadError::Io(error) => panic!("{error}"),
    })
}

const LIMITS: Limits = Limits {
    most_bytes: 1 << 30,
};

#[test]
fn packed_files_are_unpacked_by_their_first_bytes() {
    let plain = fixture_bytes("adder_4bit.blif");
    for name in ["packed.blif.gz", "packed.blif.zst"] {
        let source = unpack(name, &fixture_bytes(name), LIMITS).expect("whole");
        assert!(source.bytes == plain, "{name}");
        assert_eq!(source.stem(), "packed");
        let parsed = format::read(&source, &ReadOptions::default()).expect("readable");
        assert_eq!(input_names(&parsed.netlist).len(), 9);
        // Lines count in the plain text.
        assert_eq!(parsed.warnings[0].line(), Some(5));
        // The same under a name that says nothing, and twice over in one stream.
        let twice = [fixture_bytes(name), fixture_bytes(name)].concat();
        let source = unpack("-", &twice, LIMITS).expect("two members");
        assert!(source.bytes == [&plain[..], &plain].concat(), "{name}");
    }
    assert!(unpack("plain", &plain, LIMITS).expect("plain").bytes == plain);
    for short in [&b""[..], b".", b"\x1f", b"\x28\xb5\x2f"] {
        assert!(unpack("short", short, LIMITS).expect("plain").bytes == short);
    }
}

#[test]
fn packed_files_that_are_damaged_are_told() {
    for name in ["packed.blif.gz", "packed.blif.zst"] {
        let whole = fixture_bytes(name);
        // Every way to cut it short, but for whole frames.
        for end in 5..whole.len() {
            let told = unpack(name, &whole[..end], LIMITS).expect_err("cut short");
            assert!(told.starts_with(&format!("{name}, byte ")), "{told}");
            assert!(
                told.contains("found the end of the file inside it"),
                "{end}: {told}"
            );
        }
        // Any one byte changed is found or does no harm to the reader.
        for at in 4..whole.len() {
            let mut bytes = whole.clone();
            bytes[at] ^= 0x55;
            if let Err(told) = unpack(name, &bytes, LIMITS) {
                assert!(told.contains("expected whole"), "{told}");
            }
        }
    }
}

/// Sixty-four million bytes pass whatever they were packed into; then it is two
/// hundred for each packed byte.
#[test]
fn what_unpacks_to_far_more_than_it_is_gets_refused() {
    let gzip = |size: usize| {
        let mut packer = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::best());
        let chunk = vec![b'\n'; 1 << 20];
        for _ in 0..size >> 20 {
            packer.write_all(&chunk).expect("memory");
        }
        packer.finish().expect("memory")
    };
    let zstd = |size: usize| zstd::encode_all(&vec![b'\n'; size][..], 1).expect("memory");
    for (word, packed) in [("gzip", gzip(80 << 20)), ("zstd", zstd(80 << 20))] {
        assert!(packed.len() < 200_000);
        let told = unpack("bomb", &packed, LIMITS).expect_err("refused");
        let expected = format!("expected {word} data that unpacks to at most 200 times its size");
        assert!(told.contains(&expected), "{told}");
    }
    let small = gzip(60 << 20);
    assert_eq!(
        unpack("small", &small, LIMITS)
            .expect("allowed")
            .bytes
            .len(),
        60 << 20
    );
    let limits = Limits {
        most_bytes: 1 << 20,
    };
    let told = unpack("small", &small, limits).expect_err("refused");
    assert!(
        told.contains("of at most 1048576 bytes once unpacked"),
        "{told}"
    );
}
