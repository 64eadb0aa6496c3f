//! AIGER: the worked examples of the format report have their stated functions in
//! both forms, and every kind of object is read.
//!
//! Outside source: the examples and byte checks of the AIGER report 07/1
//! (version 20071012) and the section order of report 11/2. The text forms of the
//! examples were seen in stored copies; toggle-with-reset and the binary bytes are
//! from memory of the report and were checked by simulation against the text form.

#[path = "support/reading.rs"]
mod reading;

use carrywise::format::Format;
use carrywise::netlist::{Driver, Initial, NetId, PropertyKind};
use reading::{VARIABLE, accept, fixture, input_names, next, output_names, outputs, read, told};

const ONE: u64 = !0;

/// A worked example and its outputs on inputs `a`, `b`.
fn has_function(name: &str, expected: &[u64]) {
    for form in ["aag", "aig"] {
        let parsed = fixture(&format!("{name}.{form}"));
        let netlist = &parsed.netlist;
        let inputs = &VARIABLE[..netlist.inputs().len()];
        assert_eq!(outputs(netlist, inputs, &[]), expected, "{name}.{form}");
        assert!(netlist.has_inverted_edges());
        assert_eq!(parsed.warnings, []);
    }
}

#[test]
fn worked_examples_have_the_stated_functions() {
    let [a, b] = [VARIABLE[0], VARIABLE[1]];
    has_function("empty", &[]);
    has_function("false", &[0]);
    has_function("true", &[ONE]);
    has_function("buffer", &[a]);
    has_function("inverter", &[!a]);
    has_function("and", &[a & b]);
    has_function("or", &[a | b]);
    has_function("half_adder", &[a ^ b, a & b]);
}

#[test]
fn forms_are_told_apart_by_content() {
    assert_eq!(fixture("and.aag").format, Format::AigerAscii);
    assert_eq!(fixture("and.aig").format, Format::AigerBinary);
    let text = reading::fixture_bytes("and.aag");
    assert_eq!(accept("misnamed.blif", text).format, Format::AigerAscii);
    let words = [Format::Blif, Format::AigerAscii, Format::AigerBinary].map(Format::word);
    assert_eq!(words, ["blif", "aiger-ascii", "aiger-binary"]);
}

#[test]
fn toggle_starts_at_zero_and_inverts_itself() {
    for form in ["toggle.aag", "toggle.aig"] {
        let netlist = fixture(form).netlist;
        let q = VARIABLE[0];
        assert_eq!(next(&netlist, &[], &[q]), [!q], "{form}");
        assert_eq!(outputs(&netlist, &[], &[q]), [q, !q], "{form}");
        assert_eq!(netlist.registers()[0].initial, Initial::Zero);
        assert_eq!(netlist.net_name(netlist.registers()[0].output), "l0");
    }
}

#[test]
fn toggle_obeys_enable_and_active_low_reset() {
    let [enable, reset, q] = [VARIABLE[0], VARIABLE[1], VARIABLE[2]];
    for form in ["toggle_enable_reset.aag", "toggle_enable_reset.aig"] {
        let netlist = fixture(form).netlist;
        let after = reset & (q ^ enable);
        assert_eq!(next(&netlist, &[enable, reset], &[q]), [after], "{form}");
        assert_eq!(outputs(&netlist, &[enable, reset], &[q]), [q, !q], "{form}");
    }
}

#[test]
fn symbols_name_ports_and_the_rest_is_named_by_position() {
    for form in ["half_adder.aag", "half_adder.aig"] {
        let netlist = fixture(form).netlist;
        assert_eq!(input_names(&netlist), ["x", "y"]);
        assert_eq!(output_names(&netlist), ["s", "c"]);
    }
    let netlist = fixture("or.aig").netlist;
    assert_eq!(input_names(&netlist), ["i0", "i1"]);
    assert_eq!(output_names(&netlist), ["o0"]);
}

#[test]
fn properties_resets_and_their_symbols_are_kept() {
    for form in ["properties.aag", "properties.aig"] {
        let netlist = fixture(form).netlist;
        let told: Vec<_> = netlist
            .properties()
            .iter()
            .map(|property| {
                let name = property
                    .name
                    .map(|name| netlist.names().text(name).into_owned());
                let signal = netlist.signal_name(property.signal);
                (property.kind, signal, name.unwrap_or_default())
            })
            .collect();
        let expected = [
            (PropertyKind::Bad, "~v4", "overflow"),
            (PropertyKind::Constraint, "strobe", "calm"),
            (PropertyKind::Justice(0), "low_water", "ebb"),
            (PropertyKind::Justice(0), "high_water", "ebb"),
            (PropertyKind::Justice(1), "~high_water", "flood"),
            (PropertyKind::Fairness, "~low_water", "tide"),
        ];
        let expected = expected.map(|(kind, s, n)| (kind, s.to_owned(), n.to_owned()));
        assert_eq!(told, expected, "{form}");
        let initials: Vec<_> = netlist.registers().iter().map(|r| r.initial).collect();
        assert_eq!(initials, [Initial::One, Initial::Unknown], "{form}");
        assert_eq!(netlist.net_name(netlist.registers()[0].output), "low_water");
        assert_eq!(output_names(&netlist), ["alarm"]);
    }
}

#[test]
fn text_files_may_list_variables_in_any_order_and_with_gaps() {
    let parsed = fixture("any_order.aag");
    let netlist = &parsed.netlist;
    let [strobe, q] = [VARIABLE[0], VARIABLE[1]];
    // 8 = strobe AND q, 18 = 8 AND NOT q, the output is NOT 18.
    assert_eq!(outputs(netlist, &[strobe], &[q]), [!(strobe & q & !q)]);
    assert_eq!(netlist.registers()[0].initial, Initial::One);
    // The literals 4, 8, 12, 18 are variables 2, 4, 6, 9: nothing stands for the gaps.
    assert_eq!(netlist.net_count(), 5);
    let names: Vec<_> = netlist.nets().map(|net| netlist.net_name(net)).collect();
    assert_eq!(names, ["0", "l0", "v4", "i0", "v9"]);
    let lines: Vec<_> = netlist.gates().map(|g| netlist.gate_line(g)).collect();
    assert_eq!(lines, [5, 6]);
    assert!(
        netlist
            .nets()
            .all(|net| netlist.driver(net) != Driver::None)
    );
}

#[test]
fn without_gaps_a_net_has_the_number_of_its_variable() {
    for form in ["and.aag", "and.aig"] {
        let netlist = fixture(form).netlist;
        assert_eq!(netlist.driver(NetId::new(0)), Driver::Constant(false));
        assert_eq!(netlist.inputs(), [NetId::new(1), NetId::new(2)]);
        assert_eq!(netlist.outputs()[0].signal.net, NetId::new(3));
        assert_eq!(netlist.net_name(NetId::new(3)), "v3");
    }
}

/// Differences as the report's code table writes them.
#[test]
fn differences_of_every_length_are_decoded() {
    // One AND whose left side is 2(I + 1): its first operand is that less the
    // difference, its second operand 0.
    let table: [(u32, &[u8]); 6] = [
        (1, b"\x01"),
        (127, b"\x7f"),
        (128, b"\x80\x01"),
        (130, b"\x82\x01"),
        (16383, b"\xff\x7f"),
        (16384, b"\x80\x80\x01"),
    ];
    for (difference, code) in table {
        let inputs = 10_000u32;
        let lhs = 2 * (inputs + 1);
        let first = lhs - difference;
        let mut file = format!("aig {} {inputs} 0 1 1\n{lhs}\n", inputs + 1).into_bytes();
        file.extend_from_slice(code);
        file.extend_from_slice(&encode(first));
        let netlist = accept("difference.aig", &file).netlist;
        let gate = netlist.gates().next().expect("one AND");
        let operands: Vec<_> = netlist.fan_ins(gate).iter().map(|n| n.index()).collect();
        assert_eq!(operands, [first as usize / 2, 0], "difference {difference}");
    }
}

/// Seven bits a byte, least significant group first (report 07/1).
fn encode(mut value: u32) -> Vec<u8> {
    let mut bytes = Vec::new();
    while value >= 0x80 {
        bytes.push(value as u8 | 0x80);
        value >>= 7;
    }
    bytes.push(value as u8);
    bytes
}

#[test]
fn a_top_model_for_an_aiger_file_is_warned_about() {
    let options = carrywise::format::ReadOptions {
        top: Some("logger".to_owned()),
        ..Default::default()
    };
    let source = reading::source("and.aag", reading::fixture_bytes("and.aag"));
    let parsed = carrywise::format::read(&source, &options).expect("readable");
    assert_eq!(parsed.warnings.len(), 1);
}

#[test]
fn headers_that_announce_too_much_cost_nothing() {
    let files = [
        "aag 268435455 268435455 0 0 0\n2\n",
        "aag 2147483647 0 0 0 2147483647\n",
        "aig 2147483647 2147483647 0 0 0\n",
        "aig 268435455 0 268435455 0 0\n2\n",
        "aig 268435455 0 0 0 268435455\n\u{1}",
        "aag 1 1 0 0 0 0 0 4294967295 0\n2\n4294967295\n",
    ];
    for file in files {
        let errors = read("announced.aig", file).err().expect("refused");
        assert_eq!(errors.len(), 1, "{file:?}: {}", told(&errors));
    }
}

#[test]
fn a_file_beyond_the_limit_on_gates_is_refused() {
    let options = carrywise::format::ReadOptions {
        max_gates: 2,
        ..Default::default()
    };
    let source = reading::source("half_adder.aag", reading::fixture_bytes("half_adder.aag"));
    let errors = carrywise::format::read(&source, &options)
        .err()
        .expect("refused");
    let told = told(&errors);
    assert!(
        told.contains("at most 2 gates, found a header that announces 3"),
        "{told}"
    );
}
