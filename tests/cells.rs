//! Cell libraries: what is read of them, and what instances become.
//!
//! Sources outside the project: the open Liberty description (groups, attributes,
//! operators and their order; from memory); the truth tables of full adder and
//! NAND (common practice, no source); BLIF as published for `.gate` and `.mlatch`.

#[path = "support/reading.rs"]
mod reading;

use carrywise::audit::record::{Audit, Limit};
use carrywise::audit::{self, Options, Origin};
use carrywise::format::cells::{self, Library};
use carrywise::netlist::cell::Unbound;
use carrywise::netlist::{Driver, Netlist, Trigger};
use carrywise::source::Source;
use reading::{VARIABLE, accept, told, values};
use std::fmt::Write;
use std::path::Path;

fn library_text(name: &str, bytes: Vec<u8>) -> Result<Library, String> {
    let name = name.to_owned();
    cells::read(&Source { name, bytes }).map_err(|errors| told(&errors))
}

fn library(name: &str) -> Library {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("fixtures/cells")
        .join(name);
    let bytes = std::fs::read(path).expect("the fixture is there");
    library_text(name, bytes).unwrap_or_else(|error| panic!("{error}"))
}

fn bound(blif: &str, library: &Library) -> Netlist {
    let netlist = accept("test.blif", blif).netlist;
    let bound = library.cells.bind(netlist, 1_000_000);
    bound.unwrap_or_else(|fault| panic!("{fault}")).netlist
}

fn audited(netlist: &Netlist) -> Audit {
    let origin = Origin {
        file: "test.blif".to_owned(),
        format: carrywise::format::Format::Blif,
        sha256: String::new(),
    };
    audit::audit(netlist, &origin, &Options::default()).expect("the defaults fit")
}

fn adder() -> String {
    let bus = |name: &str| (0..8).fold(String::new(), |t, i| format!("{t} {name}[{i}]"));
    let mut blif = format!(
        ".model adder8\n.inputs{}{} c0\n.outputs{} co\n",
        bus("a"),
        bus("b"),
        bus("s")
    );
    // From the top down: the carries are read before they are driven, so that a
    // guess of directions would be wrong.
    blif.push_str(".gate BUF2 A=c8 Z=co\n");
    for i in (0..8).rev() {
        let _ = writeln!(
            blif,
            ".gate sum_cell A=a[{i}] B=b[{i}] CI=c{i} S=s[{i}] CO=c{}",
            i + 1
        );
    }
    blif + ".end\n"
}

#[test]
fn cells_with_functions_make_an_adder_of_what_was_unknown() {
    let unknown = audited(&accept("test.blif", adder()).netlist);
    assert_eq!(unknown.verdict.limit, Limit::Unknown);
    for name in ["harbour.lib", "harbour.blif"] {
        let netlist = bound(&adder(), &library(name));
        assert!(netlist.boxes().is_empty());
        assert_eq!(netlist.gate_count(), 17, "{name}");
        let audit = audited(&netlist);
        assert_eq!(
            audit.verdict.limit,
            Limit::Carry,
            "{}",
            audit.verdict.sentence
        );
        assert_eq!(audit.seen.gates_without_function, 0);
        let chain = &audit.chains[0];
        assert_eq!((chain.kind.as_str(), chain.bits), ("adder", 8));
        assert_eq!(chain.formula(), "a[7:0] + b[7:0] + c0");
        // Eight carries and the buffer.
        assert_eq!(audit.depth.longest, 9);
        // Places are those of the instances.
        assert_eq!(
            (chain.place.line_first, chain.place.line_last),
            (Some(4), Some(12))
        );
    }
}

#[test]
fn functions_mean_what_their_operators_mean() {
    let (a, b, c) = (VARIABLE[0], VARIABLE[1], VARIABLE[2]);
    for (text, expected) in [
        ("A B + C", (a & b) | c),
        ("A + B C", a | (b & c)),
        ("A B' + !C", (a & !b) | !c),
        ("A ^ B C", (a ^ b) & c),
        ("!(A | B) * C", !(a | b) & c),
        ("(A + B)' ^ C", !(a | b) ^ c),
        ("!A'", a),
        ("A & 1", a),
        ("A * 0 + C", c),
        ("A(B)C", a & b & c),
    ] {
        let lib = format!(
            "library (l) {{ cell (X) {{ pin (A) {{ direction : input; }} pin (B) {{ direction : \
             input; }} pin (C) {{ direction : input; }} pin (Z) {{ direction : output; function \
             : \"{text}\"; }} }} }}"
        );
        let library = library_text("l.lib", lib.into_bytes()).expect("it is read");
        let blif = ".model m\n.inputs a b c\n.outputs z\n.gate X A=a B=b C=c Z=z\n.end\n";
        let netlist = bound(blif, &library);
        let seen = values(&netlist, &[a, b, c], &[]);
        assert_eq!(
            seen[netlist.outputs()[0].signal.net.index()],
            expected,
            "{text}"
        );
    }
}

#[test]
fn wide_functions_become_covers() {
    let pins = "ABCDEFGHI";
    let mut blif = String::from(".model m\n.inputs");
    for pin in pins.chars() {
        let _ = write!(blif, " {pin}");
    }
    blif.push_str("\n.outputs z\n.gate NAND9");
    for pin in pins.chars() {
        let _ = write!(blif, " {pin}={pin}");
    }
    blif.push_str(" Z=z\n.end\n");
    let netlist = bound(&blif, &library("harbour.lib"));
    assert_eq!(
        netlist
            .fan_ins(netlist.gates().next().expect("a gate"))
            .len(),
        9
    );
    let z = netlist.outputs()[0].signal.net.index();
    let all = [!0u64; 9];
    assert_eq!(values(&netlist, &all, &[])[z], 0);
    for low in 0..9 {
        let mut inputs = all;
        inputs[low] = VARIABLE[0];
        assert_eq!(values(&netlist, &inputs, &[])[z], !VARIABLE[0]);
    }
}

#[test]
fn registers_of_cells_are_registers() {
    let blif = ".model m\n.inputs d ck rn g\n.outputs q qn h\n\
                .gate DFFR D=d CKN=ck RN=rn Q=q QN=qn\n.gate HOLD D=q G=g Q=h\n.end\n";
    let netlist = bound(blif, &library("harbour.lib"));
    assert!(netlist.boxes().is_empty());
    let kept: Vec<_> = netlist
        .registers()
        .iter()
        .map(|r| {
            (
                r.trigger,
                r.control.map(|net| netlist.net_name(net)),
                r.line,
            )
        })
        .collect();
    assert_eq!(
        kept,
        [
            (Trigger::FallingEdge, Some("ck".to_owned()), 4),
            (Trigger::ActiveHigh, Some("g".to_owned()), 5),
        ]
    );
    // Clearing happens inside the register: from d and rn it is no gate away.
    let origin = audited(&netlist);
    let kind = |word: &str| {
        let mut kinds = origin.verdict.by_path_kind.iter();
        kinds
            .find(|kind| kind.path_kind == word)
            .map(|kind| kind.longest)
    };
    assert_eq!(
        kind("input→register"),
        Some(carrywise::timing::Time::whole(0))
    );
    // What is stored: d unless cleared.
    let input = netlist.registers()[0].input.net.index();
    let (d, rn) = (VARIABLE[0], VARIABLE[1]);
    let seen = values(&netlist, &[d, 0, rn, 0], &[VARIABLE[2], 0]);
    assert_eq!(seen[input], d & rn);
    let net = |name: &str| {
        let mut nets = netlist.nets();
        nets.find(|&net| netlist.net_name(net) == name)
            .expect("there")
            .index()
    };
    assert_eq!(
        (seen[net("q")], seen[net("qn")]),
        (VARIABLE[2], !VARIABLE[2])
    );
}

#[test]
fn latch_cells_take_their_control_and_initial_value_from_the_netlist() {
    let blif = ".model m\n.inputs d clk\n.outputs q\n.mlatch DFF D=d Q=q clk 1\n.end\n";
    let netlist = bound(blif, &library("harbour.blif"));
    let register = netlist.registers()[0];
    assert_eq!(register.trigger, Trigger::RisingEdge);
    let control = register.control.map(|net| netlist.net_name(net));
    assert_eq!(control.as_deref(), Some("clk"));
    assert_eq!(register.initial, carrywise::netlist::Initial::One);
}

#[test]
fn cells_whose_function_is_not_given_stay_boxes_with_the_right_directions() {
    let library = library("harbour.lib");
    let told: Vec<String> = library.warnings.iter().map(ToString::to_string).collect();
    assert_eq!(told.len(), 2, "{told:?}");
    assert!(
        told[0].contains("`TBUF`") && told[1].contains("`RAM16`"),
        "{told:?}"
    );
    // The box stands before the cell that drives what it reads.
    let blif = ".model m\n.inputs a en\n.outputs z\n.gate TBUF A=n EN=en Z=z\n\
                .gate BUF2 A=a Z=n\n.end\n";
    let guessed = accept("test.blif", blif).netlist;
    assert_eq!(guessed.boxes()[0].outputs.len(), 2, "n and z by the guess");
    let netlist = bound(blif, &library);
    assert!(netlist.contended().is_empty());
    let left = &netlist.boxes()[0];
    let names = |nets: &[carrywise::netlist::NetId]| -> Vec<String> {
        nets.iter().map(|&net| netlist.net_name(net)).collect()
    };
    assert_eq!(names(&left.inputs), ["en", "n"]);
    assert_eq!(names(&left.outputs), ["z"]);
    let driver = netlist.driver(left.inputs[1]);
    assert!(matches!(driver, Driver::Gate(_)), "{driver:?}");
}

#[test]
fn instances_that_do_not_fit_their_cell_are_refused() {
    let library = library("harbour.lib");
    let bind = |blif: &str, most: u64| {
        let netlist = accept("test.blif", blif).netlist;
        library.cells.bind(netlist, most).err()
    };
    let no_pin = ".model m\n.inputs a\n.outputs z\n.gate BUF2 A=a Y=z\n.end\n";
    let fault = bind(no_pin, 100).expect("refused");
    assert_eq!(
        fault.to_string(),
        "expected a pin of the cell BUF2, found `Y`"
    );
    assert!(matches!(fault, Unbound::NoPin { line: 4, .. }));
    let fault = bind(&adder(), 10).expect("refused");
    assert!(
        matches!(fault, Unbound::TooLarge { limit: 10, .. }),
        "{fault}"
    );
    // An open pin has no driver, and that is a finding.
    let open = bound(
        ".model m\n.inputs a\n.outputs s\n.gate sum_cell A=a B=a S=s\n.end\n",
        &library,
    );
    let audit = audited(&open);
    assert!(
        audit
            .findings
            .iter()
            .any(|finding| finding.rule == "net-without-driver")
    );
}

#[test]
fn faults_of_a_library_are_told_where_they_are() {
    let cell = |inside: &str| format!("library (l) {{\n cell (X) {{\n{inside}\n }}\n}}\n");
    let pin = |function: &str| {
        cell(&format!(
            "pin (A) {{ direction : input; }}\npin (Z) {{ direction : output;\nfunction : \
             \"{function}\"; }}"
        ))
    };
    let all = [
        String::new(),
        "library (l) {".to_owned(),
        "library (l) { /* open".to_owned(),
        "library (l) { } }".to_owned(),
        "library (l) { cell (X) [ }".to_owned(),
        pin("A +"),
        pin("(A"),
        pin("A B"),
        pin("A ) A"),
        pin(&"(".repeat(100)),
        cell("pin (A) { direction : input; }"),
        format!("library (l) {{ {}", "x () { ".repeat(300)),
        ".model X\n.inputs a\n.outputs z\n.gate Y a=a z=z\n.end\n".to_owned(),
        ".model X\n.inputs a\n.outputs z\n.names a z\n1 1\n.end\n".repeat(2),
        "# cells\n\n.model X\n.inputs a\n.outputs z\n.names a z\n11 1\n.end\n".to_owned(),
    ];
    let mut said = String::new();
    for text in all {
        let shown: String = text.replace('\n', "\u{23ce}").chars().take(150).collect();
        let outcome = match library_text("cells", text.into_bytes()) {
            Ok(library) => format!("read, {} cells", library.cells.len()),
            Err(error) => error,
        };
        let _ = writeln!(said, "{shown}\n  {outcome}");
    }
    insta::assert_snapshot!(said);
}
