//! Bad input: for every case the whole message with its place is pinned, and no
//! bytes at all make a reader panic.
//!
//! Outside source: the rules of the BLIF document of 28 July 1992 and of the AIGER
//! reports 07/1 and 11/2 that each case breaks (the list a strict reader must
//! reject). The wording is our own; the snapshots under `tests/snapshots/` hold
//! input and message side by side.

#[path = "support/malformed.rs"]
mod malformed;
#[path = "support/reading.rs"]
mod reading;

use carrywise::format::aiger::{self, Form};
use carrywise::source::{Diagnostic, Place, escape};
use proptest::prelude::*;
use reading::{fixture_bytes, read, source, told};

/// Every case with what is said about it; panics when one is accepted.
fn dump(name: &str, cases: &[&[u8]]) -> String {
    let mut text = String::new();
    for case in cases {
        let shown = escape(case).replace("\\u{a}", " / ");
        let shown = if shown.len() > 160 {
            format!("{}...", shown.chars().take(160).collect::<String>())
        } else {
            shown
        };
        match read(name, case) {
            Ok(_) => panic!("accepted: {shown}"),
            Err(errors) => {
                assert!(!errors.is_empty() && errors.iter().all(|e| !e.help.is_empty()));
                text.push_str(&format!("{shown}\n{}\n\n", told(&errors)));
            }
        }
    }
    text
}

#[test]
fn blif_faults_are_told_where_they_are() {
    insta::assert_snapshot!(dump("bad.blif", malformed::BLIF));
}

#[test]
fn faults_of_the_rest_of_blif_are_told_where_they_are() {
    insta::assert_snapshot!(dump("bad.blif", malformed::BLIF_WHOLE));
}

#[test]
fn reading_stops_after_twenty_errors() {
    let text = ".model m\n.names a b y\n".to_owned() + &"1 1\n".repeat(1000);
    let errors = read("bad.blif", text).err().expect("refused");
    assert_eq!(errors.len(), 20);
    assert_eq!(errors[19].line(), Some(22));
    assert_eq!(errors[19].column(), Some(1));
}

#[test]
fn aiger_text_faults_are_told_where_they_are() {
    insta::assert_snapshot!(dump("bad.aag", malformed::AIGER_TEXT));
}

#[test]
fn aiger_binary_faults_are_told_by_byte() {
    insta::assert_snapshot!(dump("bad.aig", malformed::AIGER_BINARY));
}

#[test]
fn excerpts_stay_short_and_printable() {
    let mut long = b".model m\n.names ".to_vec();
    for i in 0..100_000 {
        long.extend_from_slice(format!("n{i} ").as_bytes());
    }
    long.extend_from_slice(b"\n.subckt \x1b[2J\xff=\xe2\x80\xae a bb\n.latch d\n");
    let input = source("odd\x1b[0m.blif", long);
    let errors = carrywise::format::read(&input, &Default::default())
        .err()
        .expect("refused");
    let mut text = String::new();
    for error in &errors {
        text.push_str(&error.render(&input, false));
        text.push_str("\n\n");
    }
    let far = Diagnostic::warning(
        &input.name,
        Place::Line {
            line: 2,
            column: Some(300_000),
            length: 5,
        },
        "a place far inside a line of megabytes",
        "",
    );
    text.push_str(&far.and(1, "and a second place").render(&input, false));
    assert!(text.lines().all(|line| line.len() < 200));
    assert!(text.chars().all(|c| c == '\n' || !c.is_control()));
    insta::assert_snapshot!(text);
    assert!(errors[0].render(&input, true).contains("\u{1b}["));
}

#[test]
fn no_excerpt_is_taken_from_another_input() {
    let input = source("main.blif", b".model m\nsecret\n");
    let message = Diagnostic::error("other.blif", Place::line(2), "a fault", "do");
    let text = message.render(&input, false);
    assert!(
        text.contains("other.blif:2") && !text.contains("secret"),
        "{text}"
    );
}

#[test]
fn every_place_can_be_rendered() {
    let input = source("short.blif", b"a\xff\n\nlast");
    for line in [0, 1, 2, 3, 4, u32::MAX] {
        for column in [None, Some(0), Some(1), Some(2), Some(99), Some(u32::MAX)] {
            let place = Place::Line {
                line,
                column,
                length: u32::MAX,
            };
            let message = Diagnostic::error("short.blif", place, "a fault", "do");
            assert!(message.render(&input, false).contains("a fault"));
        }
    }
    for place in [Place::File, Place::Byte(u64::MAX)] {
        let message = Diagnostic::error("short.blif", place, "a fault", "do");
        assert!(message.render(&input, true).contains("a fault"));
    }
}

/// Reads and renders; the outcome does not matter, that there is one does.
fn survives(name: &str, bytes: &[u8]) {
    let input = source(name, bytes);
    let options = carrywise::format::ReadOptions {
        max_gates: 100_000,
        ..Default::default()
    };
    match carrywise::format::read(&input, &options) {
        Ok(parsed) => {
            // Whatever was accepted can be ordered and named.
            let values = vec![0; parsed.netlist.registers().len()];
            let inputs = vec![0; parsed.netlist.inputs().len()];
            reading::outputs(&parsed.netlist, &inputs, &values);
            for warning in &parsed.warnings {
                warning.render(&input, false);
            }
            written_again(name, &parsed.netlist);
        }
        Err(errors) => {
            assert!(!errors.is_empty());
            for error in &errors {
                let text = error.render(&input, false);
                assert!(
                    text.chars().all(|c| c == '\n' || !c.is_control()),
                    "{text:?}"
                );
                assert!(error.line().is_none_or(|line| line >= 1));
            }
        }
    }
}

/// Whatever was accepted can be written, and what is written is accepted with the
/// same ports and registers.
fn written_again(name: &str, netlist: &carrywise::netlist::Netlist) {
    let sizes = |n: &carrywise::netlist::Netlist| (n.outputs().len(), n.registers().len());
    let mut text = Vec::new();
    carrywise::format::blif::write(netlist, &mut text).expect("memory");
    let again = reading::accept(name, &text).netlist;
    assert_eq!(sizes(&again), sizes(netlist));
    assert_eq!(again.inputs().len(), netlist.inputs().len());
    for form in [Form::Ascii, Form::Binary] {
        let mut bytes = Vec::new();
        if aiger::write(netlist, form, &mut bytes).is_ok() {
            let again = reading::accept(name, &bytes).netlist;
            assert_eq!(sizes(&again), sizes(netlist));
        }
    }
}

const SEEDS: [&str; 15] = [
    "constraints.blif",
    "constraints_odd.blif",
    "state_table_alone.blif",
    "adder_4bit.blif",
    "hierarchy.blif",
    "latches.blif",
    "boxes.blif",
    "row_continued.blif",
    "dont_cares.blif",
    "state_table.blif",
    "half_adder.aag",
    "half_adder.aig",
    "properties.aag",
    "properties.aig",
    "toggle_enable_reset.aig",
];

/// A change to a file: cut it, change a byte, or repeat a stretch.
#[derive(Clone, Debug)]
enum Change {
    Cut(usize),
    Set(usize, u8),
    Insert(usize, Vec<u8>),
    Repeat(usize, usize),
}

fn change() -> impl Strategy<Value = Change> {
    let piece = prop_oneof![
        Just(b".subckt fulladder ".to_vec()),
        Just(b"\\\n".to_vec()),
        Just(b"4294967295".to_vec()),
        Just(b"\n.model x\n".to_vec()),
        Just(b".end\n".to_vec()),
        proptest::collection::vec(any::<u8>(), 0..4),
    ];
    prop_oneof![
        any::<usize>().prop_map(Change::Cut),
        (any::<usize>(), any::<u8>()).prop_map(|(at, b)| Change::Set(at, b)),
        (any::<usize>(), piece).prop_map(|(at, p)| Change::Insert(at, p)),
        (any::<usize>(), any::<usize>()).prop_map(|(a, b)| Change::Repeat(a, b)),
    ]
}

fn apply(bytes: &mut Vec<u8>, change: &Change) {
    let size = bytes.len();
    match change {
        Change::Cut(at) => bytes.truncate(at % (size + 1)),
        Change::Set(at, value) => {
            if size > 0 {
                bytes[at % size] = *value;
            }
        }
        Change::Insert(at, piece) => {
            let at = at % (size + 1);
            bytes.splice(at..at, piece.iter().copied());
        }
        Change::Repeat(a, b) => {
            let (a, b) = (a % (size + 1), b % (size + 1));
            let stretch = bytes[a.min(b)..a.max(b)].to_vec();
            bytes.extend(stretch);
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 5000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn arbitrary_bytes_never_panic(
        bytes in proptest::collection::vec(any::<u8>(), 0..200),
        start in 0usize..5,
    ) {
        let starts: [&[u8]; 5] = [b"", b".model m\n", b"aag 2 1 0 1 1\n", b"aig 2 1 0 1 1\n", b"aig "];
        survives("noise", &[starts[start], &bytes].concat());
    }

    #[test]
    fn changed_files_never_panic(
        seed in 0..SEEDS.len(),
        changes in proptest::collection::vec(change(), 1..6),
    ) {
        let mut bytes = fixture_bytes(SEEDS[seed]);
        for change in &changes {
            apply(&mut bytes, change);
        }
        survives(SEEDS[seed], &bytes);
    }
}
