//! `tradeoff`: what it measures, where the sweet spot lies, and what it prints.
//!
//! Sources. Delays: the gate-delay convention of V. C. Hamacher, Z. G. Vranesic
//! and S. G. Zaky, "Computer Organization" (from memory where marked). Terms of
//! the two-level form: the prime implicants of the carry, generated here by
//! consensus of whole cubes up to three positions; wider figures are the closed
//! form 2^(n+1) - 1.

use assert_cmd::Command;
use carrywise::audit::tradeoff::{TradeoffRecord, record};
use carrywise::netlist::Function;
use carrywise::network::Price;
use carrywise::plan::tradeoff::{Point, Question, Tradeoff, terms_of_two_gates, tradeoff};
use carrywise::report::{Page, TradeoffForm, write_tradeoff};
use carrywise::timing::DelayModel;
use std::rc::Rc;

fn question(bits: usize, price: Price) -> Question {
    Question {
        a: vec![0; bits],
        b: vec![0; bits],
        carry_in: None,
        gate_inputs: None,
        covers: false,
        price,
    }
}

fn model(model: DelayModel) -> Price {
    Rc::new(move |function| model.pin_delays(function))
}

/// A gate of k inputs costs k: the growth of a stack of series devices (linear
/// in logical effort; D. Harris and others 1999).
fn dear() -> Price {
    Rc::new(|function: &Function| {
        let inputs = function.inputs();
        vec![inputs as i32; inputs]
    })
}

fn spot(answer: &Tradeoff) -> &Point {
    answer.sweet_spot.as_ref().expect("something was measured")
}

/// Unlimited fan-in at one price whatever its width: flat lookahead, three
/// delays to the carry and four to the sum, with a gate as wide as the word. As
/// fan-in gets dearer the sweet spot moves to narrow gates.
#[test]
fn the_sweet_spot_moves_as_fan_in_gets_dearer() {
    let unit = tradeoff(&question(16, model(DelayModel::Unit)));
    let pairs = tradeoff(&question(16, model(DelayModel::Pairs)));
    let dear = tradeoff(&question(16, dear()));
    let (unit, pairs, dear) = (spot(&unit), spot(&pairs), spot(&dear));
    assert_eq!(unit.scheme, "flat-lookahead");
    assert_eq!((unit.carry_out, unit.sum, unit.largest_fan_in), (3, 4, 16));
    assert!(pairs.largest_fan_in <= 4, "{pairs:?}");
    assert!(dear.largest_fan_in <= 3, "{dear:?}");
    assert_ne!(pairs.scheme, "flat-lookahead");
    assert_ne!(dear.scheme, "flat-lookahead");
}

/// Under each limit no scheme is later than under a smaller one, and no gate is
/// wider than the limit.
#[test]
fn wider_gates_never_make_it_later() {
    for covers in [false, true] {
        let mut asked = question(24, model(DelayModel::Unit));
        asked.covers = covers;
        asked.carry_in = Some(2);
        let answer = tradeoff(&asked);
        assert_eq!(
            answer.schemes.len(),
            carrywise::network::schemes::all().len()
        );
        for (scheme, row) in &answer.schemes {
            let points: Vec<&Point> = row.iter().flatten().collect();
            // And-or paths are made of two-input gates, never of covers.
            assert!(
                !points.is_empty() || covers && *scheme == "and-or-path",
                "{scheme}"
            );
            for pair in points.windows(2) {
                assert!(pair[1].delay <= pair[0].delay, "{scheme}");
            }
            for (point, &limit) in row.iter().zip(&answer.limits) {
                let widest = point.as_ref().map_or(0, |point| point.largest_fan_in);
                assert!(widest <= limit, "{scheme} under {limit}");
            }
        }
    }
}

/// A bit that comes late is added late: nothing is ready before one gate after
/// it, and the sweet spot is no later than that and an XOR where nothing else is
/// late (worked by hand: half sum, then the XOR with the carry).
#[test]
fn arrivals_count() {
    let mut asked = question(8, model(DelayModel::Unit));
    asked.a[7] = 40;
    let answer = tradeoff(&asked);
    assert_eq!(spot(&answer).sum, 42);
}

/// All prime implicants of the carry out of `n` positions.
fn primes(n: usize, has_carry_in: bool) -> usize {
    let inputs = 2 * n + usize::from(has_carry_in);
    let carry = |row: u32| {
        let a = row & ((1 << n) - 1);
        let b = row >> n & ((1 << n) - 1);
        (a + b + (row >> (2 * n))) >> n & 1 == 1
    };
    // A cube is a mask of the inputs it fixes and their values.
    let implies = |mask: u32, value: u32| {
        (0..1u32 << inputs)
            .filter(|row| row & mask == value)
            .all(carry)
    };
    let mut count = 0;
    for mask in 0..1u32 << inputs {
        for value in (0..1u32 << inputs).filter(|value| value & !mask == 0) {
            if implies(mask, value) {
                let fixed = (0..inputs).filter(|i| mask >> i & 1 == 1);
                let larger = |i: usize| implies(mask & !(1 << i), value & !(1 << i));
                count += usize::from(!fixed.into_iter().any(larger));
            }
        }
    }
    count
}

/// 31 terms at four bits and 511 at eight with carry-in; 15 and 255 without.
#[test]
fn the_two_gate_form_has_the_tabulated_terms() {
    for n in 1..=3 {
        for has_carry_in in [false, true] {
            let terms = terms_of_two_gates(n, has_carry_in);
            assert_eq!(terms, Some(primes(n, has_carry_in) as u128), "{n}");
        }
    }
    let with = |n| terms_of_two_gates(n, true);
    assert_eq!(with(4), Some(31));
    assert_eq!(with(8), Some(511));
    assert_eq!(with(16), Some(131_071));
    assert_eq!(with(32), Some(8_589_934_591));
    let without = |n| terms_of_two_gates(n, false);
    assert_eq!([without(4), without(8)], [Some(15), Some(255)]);
    assert_eq!(with(127), Some(u128::MAX));
    assert_eq!(with(128), None);
}

fn printed(record: &TradeoffRecord, form: TradeoffForm) -> String {
    let mut bytes = Vec::new();
    write_tradeoff(record, form, Page::default(), &mut bytes).expect("a vector takes it");
    String::from_utf8(bytes).expect("text")
}

#[test]
fn the_table_fits_80_columns_and_the_record_reads_back() {
    for (bits, covers) in [(1, false), (4, true), (16, false), (40, false)] {
        let mut asked = question(bits, model(DelayModel::Unit));
        asked.covers = covers;
        let answer = tradeoff(&asked);
        let record = record(&asked, &answer, DelayModel::Unit, "single-operator");
        let table = printed(&record, TradeoffForm::Table);
        for line in table.lines() {
            assert!(line.chars().count() <= 80, "{bits}: {line}");
        }
        assert_eq!(table.matches('>').count(), 1, "one sweet spot is marked");
        let yaml = printed(&record, TradeoffForm::Yaml);
        let back: TradeoffRecord = serde_yaml::from_str(&yaml).expect("YAML");
        assert_eq!(back, record);
        let json = printed(&record, TradeoffForm::Json);
        let back: TradeoffRecord = serde_json::from_str(&json).expect("JSON");
        assert_eq!(back, record);
    }
}

fn carrywise() -> Command {
    Command::cargo_bin("carrywise").expect("the binary is built")
}

#[test]
fn the_command_prints_the_table() {
    let run = carrywise()
        .args([
            "tradeoff",
            "--bits",
            "8",
            "--carry-in",
            "--gate-inputs",
            "4",
        ])
        .assert()
        .success();
    let text = String::from_utf8_lossy(&run.get_output().stdout).into_owned();
    assert!(text.contains("511 terms (2^9 - 1)"), "{text}");
    assert!(text.contains("conditional-sum"), "{text}");
}

/// Clauses of `grammar-notes/arrivals.md`.
#[test]
fn the_arrivals_file_is_read_and_its_faults_are_told() {
    let folder = tempfile::tempdir().expect("a folder");
    let run = |text: &str, more: &[&str]| {
        let file = folder.path().join("late.yaml");
        std::fs::write(&file, text).expect("a file");
        let mut command = carrywise();
        command.args(["tradeoff", "--bits", "4", "--as", "json", "--arrivals"]);
        let output = command.arg(&file).args(more).output().expect("it runs");
        let told = String::from_utf8_lossy(&output.stderr).into_owned();
        (output.status.code(), told, output.stdout)
    };
    let (code, told, stdout) = run("a: [0, 1, 2, 30]\nb: 1\ncarry_in: 5\n", &[]);
    assert_eq!((code, told.as_str()), (Some(0), ""));
    let record: TradeoffRecord = serde_json::from_slice(&stdout).expect("JSON");
    assert!(record.carry_in);
    assert_eq!(record.sweet_spot.map(|spot| spot.sum == 32), Some(true));
    let (code, told, _) = run("a: 1.5\n", &["--delay", "logical-effort"]);
    assert_eq!((code, told.as_str()), (Some(0), ""));
    for (text, line, says) in [
        ("a: [0, 1]\n", 1, "expected 4 times, found 2"),
        ("b: 0\nc: 1\n", 2, "expected a key, found `c`"),
        ("carryin: 1\n", 1, "did you mean `carry_in`?"),
        ("a: 0\nb: [0, 0, x, 0]\n", 2, "found `x`"),
        ("a: -1\n", 1, "expected a time from 0"),
        ("a: 1.5\n", 1, "counts whole units"),
        ("a: 99999999999\n", 1, "expected a time from 0"),
        ("- 1\n", 1, "expected keys with values"),
        ("a: 0\na: 1\n", 1, ""),
        ("a: [\n", 2, "expected YAML"),
    ] {
        let (code, told, stdout) = run(text, &[]);
        assert_eq!(code, Some(2), "{text}: {told}");
        assert!(stdout.is_empty());
        assert!(told.contains(says), "{text}: {told}");
        assert!(
            told.contains(&format!("late.yaml:{line}")) || says.is_empty(),
            "{text}: {told}"
        );
    }
}
