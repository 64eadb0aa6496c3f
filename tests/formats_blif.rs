//! BLIF: the document's example, every oddity met in real files and every one
//! written by hand, hierarchy, boxes and ports.
//!
//! Outside source: the BLIF document of 28 July 1992 (rules and the four-bit adder,
//! from memory) and the list of odd constructs in the README of the open circuits;
//! integer addition for the adder's function.

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::{self, Parsed, ReadOptions};
use carrywise::netlist::{Driver, Function, Initial, Netlist, Shape, Trigger};
use reading::{
    VARIABLE, accept, fixture, input_names, output_names, outputs, read, source, told, values,
};

/// The only output of a fixture, on variables `a`, `b`, ….
fn function_of(name: &str) -> u64 {
    let netlist = fixture(name).netlist;
    let inputs = &VARIABLE[..netlist.inputs().len()];
    let values = outputs(&netlist, inputs, &[]);
    assert_eq!(values.len(), 1);
    values[0]
}

fn warnings(parsed: &Parsed) -> Vec<String> {
    parsed.warnings.iter().map(ToString::to_string).collect()
}

fn net_named(netlist: &Netlist, name: &str) -> carrywise::netlist::NetId {
    let found = netlist.nets().find(|&net| netlist.net_name(net) == name);
    found.unwrap_or_else(|| panic!("no net {name}"))
}

#[test]
fn four_bit_adder_of_the_document_adds() {
    let parsed = fixture("adder_4bit.blif");
    let netlist = &parsed.netlist;
    assert_eq!(netlist.gate_count(), 12);
    let names = input_names(netlist);
    assert_eq!(names.join(" "), "A3 A2 A1 A0 B3 B2 B1 B0 CIN");
    assert_eq!(output_names(netlist).join(" "), "COUT S3 S2 S1 S0");
    // All 512 input vectors, 64 at a time.
    for batch in 0..8u64 {
        let vectors: Vec<u64> = (batch * 64..batch * 64 + 64).collect();
        let column = |bit: usize| {
            let bits = vectors.iter().enumerate();
            bits.fold(0u64, |word, (i, v)| word | (v >> bit & 1) << i)
        };
        let inputs: Vec<u64> = (0..9).map(column).collect();
        let found = outputs(netlist, &inputs, &[]);
        for (i, v) in vectors.iter().enumerate() {
            // Input k of the list is bit k of the vector; lists run from bit 3 down.
            let word = |first: usize| (0..4).fold(0, |w, k| w << 1 | v >> (first + k) & 1);
            let sum = word(0) + word(4) + (v >> 8 & 1);
            let shown = found.iter().fold(0, |w, column| w << 1 | column >> i & 1);
            assert_eq!(shown, sum, "vector {v}");
        }
    }
    let told = warnings(&parsed);
    assert_eq!(told.len(), 2, "{told:?}");
    assert!(told[0].contains("expected `.inputs`, found `.input` on 1 line"));
    assert!(told[1].contains("expected `.outputs`, found `.output` on 1 line"));
}

#[test]
fn instances_carry_model_and_ordinal_and_ports_go_by_outer_names() {
    let netlist = fixture("adder_4bit.blif").netlist;
    let names: Vec<_> = netlist.nets().map(|net| netlist.net_name(net)).collect();
    for name in ["fulladder_1/k", "fulladder_4/k", "CARRY1", "S0"] {
        assert!(names.iter().any(|n| n == name), "{name} of {names:?}");
    }
    assert_eq!(names.len(), 9 + 5 + 3 + 4);

    let netlist = fixture("hierarchy.blif").netlist;
    // Models used before they are defined, three levels deep.
    net_named(&netlist, "pair_2/hidden");
    let [raise, lower] = [VARIABLE[0], VARIABLE[1]];
    let found = outputs(&netlist, &[raise, lower], &[]);
    assert_eq!(found, [raise & lower, raise | lower]);
    let deepest = netlist
        .gates()
        .map(|g| netlist.scope_path(netlist.gate_scope(g)).len());
    assert_eq!(deepest.max(), Some(2));
    // Gates stand where their instance stands.
    let lines: Vec<_> = netlist.gates().map(|g| netlist.gate_line(g)).collect();
    assert_eq!(lines, [17, 26, 17, 26, 6, 8, 10]);
}

#[test]
fn oddities_of_real_files_are_read() {
    let [a, b, c, d] = [VARIABLE[0], VARIABLE[1], VARIABLE[2], VARIABLE[3]];
    assert_eq!(function_of("no_end.blif"), a & b);
    assert_eq!(function_of("row_continued.blif"), a | b | c & d);
    assert_eq!(function_of("blank_between_rows.blif"), a | b);
    assert_eq!(function_of("comments_around.blif"), !a);
    assert_eq!(
        function_of("odd_names.blif"),
        a & b & c & d & VARIABLE[4] & VARIABLE[5]
    );
    for name in [
        "no_end",
        "row_continued",
        "blank_between_rows",
        "comments_around",
        "odd_names",
    ] {
        assert_eq!(
            warnings(&fixture(&format!("{name}.blif"))),
            [""; 0],
            "{name}"
        );
    }
}

#[test]
fn lists_of_ports_go_on_over_several_lines() {
    let netlist = fixture("many_inputs_lines.blif").netlist;
    assert_eq!(input_names(&netlist), ["float_a", "float_b", "float_c"]);
    let [a, b, c] = [VARIABLE[0], VARIABLE[1], VARIABLE[2]];
    assert_eq!(outputs(&netlist, &[a, b, c], &[]), [a | b | c, a & b & c]);
}

#[test]
fn dont_cares_leave_the_logic_alone() {
    let parsed = fixture("dont_cares.blif");
    assert_eq!(parsed.netlist.gate_count(), 1);
    assert_eq!(parsed.netlist.inputs().len(), 2);
    let [a, b] = [VARIABLE[0], VARIABLE[1]];
    assert_eq!(outputs(&parsed.netlist, &[a, b], &[]), [a & !b]);
    assert_eq!(
        warnings(&parsed),
        [
            "dont_cares.blif:6: warning: 1 section of don't-cares (`.exdc`) skipped; the logic is \
          read as its covers state it"
        ]
    );
}

#[test]
fn constants_are_gates_without_inputs() {
    let netlist = fixture("constants.blif").netlist;
    assert_eq!(outputs(&netlist, &[0], &[]), [0, !0, 0]);
    assert_eq!(input_names(&netlist), ["unused"]);
    let shapes: Vec<_> = netlist
        .gates()
        .map(|g| netlist.function(g).shape())
        .collect();
    let constant = Shape::Constant;
    assert_eq!(shapes, [constant(false), constant(true), constant(false)]);
}

#[test]
fn undriven_nets_and_outputs_are_kept() {
    let netlist = fixture("undriven_net.blif").netlist;
    let interlock = net_named(&netlist, "interlock");
    assert_eq!(netlist.driver(interlock), Driver::None);
    assert_eq!(input_names(&netlist), ["open"]);

    let netlist = fixture("undriven_outputs.blif").netlist;
    let undriven = netlist.outputs().iter();
    let undriven = undriven.filter(|o| netlist.driver(o.signal.net) == Driver::None);
    assert_eq!(undriven.count(), 2);
}

#[test]
fn repeated_fan_ins_are_pins_of_their_own() {
    let netlist = fixture("repeated_fan_in.blif").netlist;
    assert!(netlist.gates().all(|gate| netlist.fan_ins(gate).len() == 2));
    // `10` on one net twice can never hold.
    assert_eq!(outputs(&netlist, &VARIABLE[..2], &[]), [VARIABLE[0], 0]);
    let own_input = accept(
        "own.blif",
        ".inputs a\n.outputs y\n.names a a y\n1- 1\n.end\n",
    );
    assert_eq!(
        own_input
            .netlist
            .fan_ins(own_input.netlist.gates().next().unwrap())
            .len(),
        2
    );
}

#[test]
fn other_dot_words_are_told_once_each_with_their_count() {
    assert_eq!(
        warnings(&fixture("unknown_word.blif")),
        [
            "unknown_word.blif:4: warning: `.mooring_hint` is not a word that is read here: 2 \
             lines skipped; the rest of the file is read as if the lines were not there",
            "unknown_word.blif:5: warning: `.paint` is not a word that is read here: 1 \
             line skipped; the rest of the file is read as if the lines were not there",
        ]
    );
}

#[test]
fn other_dot_words_before_the_first_model_begin_none() {
    let text = ".default_input_drive 1 1\n.model m\n.inputs a\n.outputs a\n.end\n";
    let parsed = accept("early.blif", text);
    let name = parsed.netlist.model().expect("a name");
    assert_eq!(parsed.netlist.names().text(name), "m");
    assert_eq!(parsed.netlist.inputs().len(), 1);
}

#[test]
fn warnings_stay_few_however_many_words_are_unknown() {
    let mut text = String::from(".model m\n.inputs a\n.outputs a\n");
    for i in 0..5000 {
        text.push_str(&format!(".word_{i} x\n"));
    }
    let parsed = accept("words.blif", text);
    assert_eq!(parsed.warnings.len(), 101);
    let last = parsed.warnings[100].to_string();
    assert!(
        last.contains("words.blif:104: warning: 4900 more warnings"),
        "{last}"
    );
}

#[test]
fn latches_are_read_by_their_number_of_words() {
    let netlist = fixture("latches.blif").netlist;
    let clk = net_named(&netlist, "clk");
    let found: Vec<_> = netlist
        .registers()
        .iter()
        .map(|r| (r.trigger, r.control, r.initial, r.line))
        .collect();
    let expected = [
        (Trigger::Unstated, None, Initial::Unknown, 4),
        (Trigger::Unstated, None, Initial::Any, 5),
        (Trigger::RisingEdge, Some(clk), Initial::Unknown, 6),
        (Trigger::FallingEdge, Some(clk), Initial::Zero, 7),
        (Trigger::ActiveHigh, Some(clk), Initial::One, 8),
        (Trigger::ActiveLow, Some(clk), Initial::Unknown, 9),
        (Trigger::Asynchronous, None, Initial::Any, 10),
    ];
    assert_eq!(found, expected);
    let blanks = fixture("latch_blanks.blif").netlist;
    assert_eq!(blanks.registers()[0].initial, Initial::Zero);
    assert_eq!(blanks.net_name(blanks.registers()[0].output), "held");
}

#[test]
fn a_port_may_be_input_and_output() {
    let netlist = fixture("output_is_input.blif").netlist;
    assert_eq!(netlist.inputs()[1], netlist.outputs()[0].signal.net);
    assert_eq!(netlist.contended().len(), 0);
}

#[test]
fn line_ends_tabs_and_comments_do_not_matter() {
    let [a, b] = [VARIABLE[0], VARIABLE[1]];
    assert_eq!(function_of("crlf.blif"), a & b);
    assert_eq!(input_names(&fixture("crlf.blif").netlist), ["a", "b"]);
    assert_eq!(function_of("tabs.blif"), !(a ^ b));
    assert_eq!(function_of("trailing_comments.blif"), a & b);
    for name in ["crlf.blif", "tabs.blif", "trailing_comments.blif"] {
        assert_eq!(warnings(&fixture(name)), [""; 0], "{name}");
    }
    let marked = b"\xef\xbb\xbf.model m\n.inputs a\n.outputs y\n.names a y\n1 1\n.end\n";
    assert_eq!(accept("marked.blif", marked).netlist.gate_count(), 1);
}

#[test]
fn a_continued_line_is_joined_without_a_blank() {
    let joined = accept(
        "joined.blif",
        ".inputs le\\\nvel\n.outputs y\n.names level y\n1 1\n",
    );
    assert_eq!(input_names(&joined.netlist), ["level"]);
}

#[test]
fn a_blank_after_a_backslash_is_refused() {
    let bytes = reading::fixture_bytes("blank_after_backslash.blif");
    let errors = read("blank_after_backslash.blif", bytes)
        .err()
        .expect("refused");
    assert_eq!(errors.len(), 1, "{}", told(&errors));
    assert_eq!((errors[0].line(), errors[0].column()), (Some(2), Some(11)));
    assert!(errors[0].message.contains("found blanks"));
}

#[test]
fn a_comment_glued_to_a_word_is_warned_about() {
    let parsed = accept(
        "glued.blif",
        ".inputs net#3\n.outputs y\n.names net y\n1 1\n.end#\n",
    );
    assert_eq!(input_names(&parsed.netlist), ["net"]);
    let told = warnings(&parsed);
    assert_eq!(told.len(), 1);
    assert!(told[0].starts_with("glued.blif:1: warning: a comment begins right after"));
    assert!(told[0].contains("on 2 lines"));
}

#[test]
fn names_are_bytes() {
    let parsed = fixture("not_utf8.blif");
    let netlist = &parsed.netlist;
    let name = netlist.local_name(netlist.inputs()[0]).expect("a name");
    assert_eq!(netlist.names().bytes(name), b"h\xf6he");
    let name = netlist.local_name(netlist.inputs()[1]).expect("a name");
    assert_eq!(netlist.names().bytes(name), b"\xff\xfe");
}

#[test]
fn unlisted_ports_are_inferred_only_when_neither_list_is_there() {
    let netlist = fixture("no_ports.blif").netlist;
    assert_eq!(input_names(&netlist), ["a", "b", "c"]);
    assert_eq!(output_names(&netlist), ["y"]);

    let netlist = accept("listed.blif", ".inputs a\n.names a b y\n11 1\n").netlist;
    assert_eq!(input_names(&netlist), ["a"]);
    assert_eq!(output_names(&netlist), [""; 0]);

    let below = ".model top\n.inputs p q\n.outputs r\n.subckt bare a=p b=q y=r\n.end\n\
                 .model bare\n.names a b y\n10 1\n.end\n";
    let netlist = accept("below.blif", below).netlist;
    assert_eq!(
        outputs(&netlist, &VARIABLE[..2], &[]),
        [VARIABLE[0] & !VARIABLE[1]]
    );
}

#[test]
fn without_model_the_file_gives_the_name() {
    let parsed = accept(
        "old/harbour.tide.blif",
        reading::fixture_bytes("no_model.blif"),
    );
    let name = parsed.netlist.model().expect("a name");
    assert_eq!(parsed.netlist.names().text(name), "harbour.tide");
}

#[test]
fn clocks_are_input_ports() {
    let netlist = fixture("clocked.blif").netlist;
    assert_eq!(input_names(&netlist), ["d", "clk"]);
    let control = netlist.registers()[0].control.expect("a control");
    assert!(matches!(netlist.driver(control), Driver::Input(1)));
}

#[test]
fn top_chooses_the_design() {
    let bytes = reading::fixture_bytes("hierarchy.blif");
    let source = source("hierarchy.blif", bytes);
    let mut options = ReadOptions::default();
    let first = format::read(&source, &options).expect("readable").netlist;
    assert_eq!(first.inputs().len(), 2);
    assert_eq!(first.names().text(first.model().expect("a name")), "logger");
    options.top = Some("invert".to_owned());
    let inner = format::read(&source, &options).expect("readable").netlist;
    assert_eq!(inner.gate_count(), 1);
    options.top = Some("harbour".to_owned());
    let errors = format::read(&source, &options).err().expect("refused");
    assert_eq!(
        told(&errors),
        "hierarchy.blif: error: expected a model `harbour` as the top, found `logger`, `pair`, \
         `invert`; name one of the models of the file"
    );
}

#[test]
fn unbound_ports_are_undriven_or_unread() {
    let netlist = fixture("unbound.blif").netlist;
    let b = net_named(&netlist, "inner_1/b");
    assert_eq!(netlist.driver(b), Driver::None);
    let z = net_named(&netlist, "inner_1/z");
    assert!(matches!(netlist.driver(z), Driver::Gate(_)));
    assert_eq!(outputs(&netlist, &[VARIABLE[0]], &[]), [VARIABLE[0]]);
}

#[test]
fn two_instances_on_one_net_contend() {
    let netlist = fixture("twice_driven.blif").netlist;
    assert_eq!(netlist.contended().len(), 1);
    let contention = &netlist.contended()[0];
    assert_eq!(netlist.net_name(contention.net), "y");
    let lines: Vec<_> = contention.drivers.iter().map(|d| d.1).collect();
    assert_eq!(lines, [10, 10]);
}

#[test]
fn what_is_not_in_the_file_becomes_a_black_box() {
    let parsed = fixture("boxes.blif");
    let netlist = &parsed.netlist;
    let told: Vec<_> = netlist
        .boxes()
        .iter()
        .map(|b| {
            let names = |nets: &[carrywise::netlist::NetId]| -> Vec<String> {
                nets.iter().map(|&net| netlist.net_name(net)).collect()
            };
            let model = netlist.names().text(b.model).into_owned();
            (
                model,
                names(&b.inputs).join(" "),
                names(&b.outputs).join(" "),
                b.line,
            )
        })
        .collect();
    let expected = [
        ("memory", "addr", "word", 4),
        ("nand2", "word strobe", "q", 5),
        ("dlatch", "q strobe", "kept", 6),
    ];
    let expected = expected.map(|(m, i, o, l)| (m.to_owned(), i.to_owned(), o.to_owned(), l));
    assert_eq!(told, expected);
    let told = warnings(&parsed);
    assert_eq!(told.len(), 3);
    assert!(told[0].contains("model `memory` is not in the file: 1 instance kept as a black box"));
    assert!(told[1].contains("cell `nand2` is not in the file"));
    assert!(
        netlist
            .nets()
            .all(|net| netlist.driver(net) != Driver::None)
    );
}

#[test]
fn state_tables_and_text_after_the_end_are_told() {
    let parsed = fixture("state_table.blif");
    assert_eq!(parsed.netlist.gate_count(), 1);
    assert!(warnings(&parsed)[0].contains("state_table.blif:4: warning: 1 state table"));
    let parsed = fixture("after_end.blif");
    assert!(warnings(&parsed)[0].contains("after_end.blif:7: warning: expected `.model` after"));
    assert_eq!(parsed.netlist.gate_count(), 1);
}

#[test]
fn off_set_rows_are_complemented() {
    assert_eq!(function_of("off_set.blif"), VARIABLE[0] ^ VARIABLE[1]);
}

#[test]
fn a_port_listed_twice_counts_once() {
    let parsed = fixture("repeated_port.blif");
    assert_eq!(input_names(&parsed.netlist), ["a", "b"]);
    assert_eq!(output_names(&parsed.netlist), ["y"]);
    assert_eq!(parsed.netlist.contended().len(), 0);
    let told = warnings(&parsed);
    assert!(told[0].contains("repeated_port.blif:2:13: warning: expected each port once"));
    assert_eq!(told.len(), 2);
}

#[test]
fn a_cover_with_inputs_and_no_rows_is_zero_and_told() {
    let parsed = fixture("empty_cover.blif");
    let [a, b] = [VARIABLE[0], VARIABLE[1]];
    assert_eq!(outputs(&parsed.netlist, &[a, b], &[]), [0, a & b]);
    assert!(warnings(&parsed)[0].contains("empty_cover.blif:6: warning: expected rows"));
}

#[test]
fn covers_of_hundreds_of_inputs_stay_covers() {
    let netlist = fixture("wide_cover.blif").netlist;
    let gate = netlist.gates().next().expect("one gate");
    assert!(matches!(netlist.function(gate), Function::Cover(_)));
    assert_eq!(netlist.fan_ins(gate).len(), 300);
    let mut inputs = vec![0u64; 300];
    assert_eq!(outputs(&netlist, &inputs, &[]), [0]);
    inputs[299] = 0b10;
    assert_eq!(outputs(&netlist, &inputs, &[]), [0b10]);
}

/// A hierarchy that doubles at every level: 2^40 gates from forty models.
fn doubling(levels: usize) -> String {
    let mut text = String::new();
    for level in 0..levels {
        text.push_str(&format!(
            ".model level{level}\n.inputs a\n.outputs y\n.subckt level{0} a=a y=m\n\
             .subckt level{0} a=m y=y\n.end\n",
            level + 1
        ));
    }
    text.push_str(&format!(
        ".model level{levels}\n.inputs a\n.outputs y\n.names a y\n0 1\n.end\n"
    ));
    text
}

#[test]
fn hierarchies_are_counted_before_they_are_built() {
    let errors = read("doubling.blif", doubling(40)).err().expect("refused");
    assert_eq!(
        told(&errors),
        "doubling.blif:1: error: expected at most 100000000 gates, found a model `level0` that \
         expands to 1099511627776; raise the limit on gates if a netlist of this size is meant"
    );
    // Past 64 bits, and without a single gate.
    let errors = read("doubling.blif", doubling(200)).err().expect("refused");
    assert!(told(&errors).contains("or more"));
    let empty = doubling(200).replace(".names a y\n0 1\n", "");
    let errors = read("empty.blif", empty).err().expect("refused");
    assert!(
        told(&errors).contains("instances, found a model"),
        "{}",
        told(&errors)
    );
    assert_eq!(
        accept("doubling.blif", doubling(10)).netlist.gate_count(),
        1024
    );
}

#[test]
fn the_limit_on_gates_holds_exactly() {
    let source = source("doubling.blif", doubling(4));
    let with = |max_gates| {
        let options = ReadOptions {
            max_gates,
            ..Default::default()
        };
        format::read(&source, &options).map(|parsed| parsed.netlist.gate_count())
    };
    assert_eq!(with(16).ok(), Some(16));
    assert!(with(15).is_err());
}

#[test]
fn a_hundred_thousand_levels_of_hierarchy_do_not_overflow() {
    let levels = 100_000;
    let mut text = String::new();
    for level in 0..levels {
        text.push_str(&format!(
            ".model m{level}\n.inputs a\n.outputs y\n.subckt m{} a=a y=n\n.names n y\n0 1\n.end\n",
            level + 1
        ));
    }
    text.push_str(&format!(
        ".model m{levels}\n.inputs a\n.outputs y\n.names a y\n1 1\n.end\n"
    ));
    let netlist = accept("deep.blif", text).netlist;
    assert_eq!(netlist.gate_count(), levels + 1);
    let values = values(&netlist, &[VARIABLE[0]], &[]);
    let output = netlist.outputs()[0].signal.net;
    assert_eq!(values[output.index()], VARIABLE[0]);
}
