//! `closeup`, `--plan-all` and chains that are faster than needed, through the
//! binary. Arrivals of ripple adders are counted by hand; that a carry of a ripple
//! chain is made from the one below and nothing else is what ripple means (common
//! practice, no source).

mod generators;

use assert_cmd::Command;
use carrywise::audit::record::{Audit, Closeup};
use generators::{Architecture, Cell, Circuit, Kind, Word};

fn carrywise() -> Command {
    let mut command = Command::cargo_bin("carrywise").unwrap();
    command.current_dir(env!("CARGO_MANIFEST_DIR"));
    command
}

fn printed(arguments: &[&str]) -> String {
    let output = carrywise().args(arguments).output().unwrap();
    assert!(output.status.success(), "{arguments:?}: {output:?}");
    String::from_utf8(output.stdout).unwrap()
}

const LOGGER: &str = "fixtures/tide_logger.blif";

#[test]
fn a_chain_is_found_by_id_fingerprint_and_net() {
    let by_id = printed(&["closeup", LOGGER, "C1", "--as", "json"]);
    let record: Closeup = serde_json::from_str(&by_id).unwrap();
    assert_eq!(record.chain.id, "C1");
    assert_eq!(record.bits.len() as u64, record.chain.bits);
    let by_print = printed(&["closeup", LOGGER, &record.chain.fingerprint, "--as", "json"]);
    assert_eq!(by_id, by_print);
    let net = &record.chain.sums[3];
    assert_eq!(by_id, printed(&["closeup", LOGGER, net, "--as", "json"]));
    let yaml = printed(&["closeup", LOGGER, "C1", "--as", "yaml"]);
    assert_eq!(serde_yaml::from_str::<Closeup>(&yaml).unwrap(), record);
}

#[test]
fn a_name_of_no_chain_says_what_there_is() {
    let output = carrywise()
        .args(["closeup", LOGGER, "C9"])
        .output()
        .unwrap();
    assert_eq!(output.status.code(), Some(2));
    let told = String::from_utf8(output.stderr).unwrap();
    assert!(told.contains("`C9`") && told.contains("C1"), "{told}");
    assert!(output.stdout.is_empty());
}

/// Every carry of a ripple chain is one or two gates after the one below it, is made
/// from that one alone, and the best of the schemes come best first.
#[test]
fn bits_tell_the_staircase_and_schemes_come_best_first() {
    let json = printed(&["closeup", LOGGER, "C1", "--as", "json"]);
    let record: Closeup = serde_json::from_str(&json).unwrap();
    assert_eq!(record.chain.built_as.name, "ripple");
    for pair in record.bits.windows(2) {
        if let (Some(_), Some(from)) = (&pair[1].carry, &pair[1].made_from) {
            assert_eq!(*from, [pair[0].bit as i64]);
            assert!(pair[1].carry_arrives > pair[0].carry_arrives);
        }
    }
    let order: Vec<_> = record
        .schemes
        .iter()
        .map(|best| (best.block_depth.after, best.chain_depth.after))
        .collect();
    assert!(order.len() > 5, "{order:?}");
    assert!(order.is_sorted_by_key(|&(block, _)| block), "{order:?}");
    // One of each, beside the recommended one.
    assert_eq!(record.schemes.iter().filter(|s| s.recommended).count(), 1);
    let others = record.schemes.iter().filter(|s| !s.recommended);
    let names: Vec<&str> = others.map(|s| s.scheme.as_str()).collect();
    let mut distinct = names.clone();
    distinct.sort_unstable();
    distinct.dedup();
    assert_eq!(names.len(), distinct.len());
}

#[test]
fn the_table_fits_eighty_columns() {
    for chain in ["C1", "C2", "C3"] {
        let text = printed(&["closeup", LOGGER, chain]);
        for line in text.lines() {
            assert!(line.chars().count() <= 80, "{line}");
        }
        assert!(text.contains("Bits") && text.contains("Best of every scheme"));
    }
    let markdown = printed(&["closeup", LOGGER, "C1", "--as", "markdown"]);
    assert!(markdown.starts_with("### ") && markdown.len() < 60_000);
}

#[test]
fn every_chain_is_planned_on_request() {
    let planned = |more: &[&str]| {
        let arguments = [&["audit", LOGGER, "--as", "json"], more].concat();
        let audit: Audit = serde_json::from_str(&printed(&arguments)).unwrap();
        let planned = audit.chains.iter().filter(|c| c.not_planned.is_none());
        (
            planned.count(),
            audit.chains.len(),
            audit.settings.plan_margin_percent,
        )
    };
    let (some, all, margin) = planned(&[]);
    assert!(some < all);
    assert_eq!(margin, Some(10));
    assert_eq!(planned(&["--plan-all"]), (all, all, None));
}

/// A Kogge–Stone adder of 16 bits has 16·4 - 15 = 49 combine nodes (Kogge and Stone
/// 1973); beside a path of 60 gates a ripple adder, of 15, serves as well.
#[test]
fn a_fast_adder_with_time_to_spare_is_told() {
    let mut c = Circuit::new("idle");
    let a = c.input_bus("a", 16);
    let b = c.input_bus("b", 16);
    let word = Word {
        architecture: Architecture::KoggeStone,
        ..Word::new(Kind::Adder, 16, Cell::PropagateXor)
    };
    let sums = word.place(&mut c, &a, &b, None).sums;
    c.output_bus(&sums, "s");
    let mut long = a[0];
    for k in 0..60 {
        let x = c.input(&format!("x{k}"));
        long = c.xor(long, x);
    }
    c.output(long, "long");
    c.drop_unread();
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("idle.blif");
    std::fs::write(&path, c.blif()).unwrap();
    let json = printed(&["audit", path.to_str().unwrap(), "--as", "json"]);
    let audit: Audit = serde_json::from_str(&json).unwrap();
    let chain = &audit.chains[0];
    let id = chain.cheaper.as_ref().expect("a cheaper build");
    let cheaper = chain.proposals.iter().find(|each| each.id == *id).unwrap();
    assert!(cheaper.gate_equivalents_added < 0);
    assert_eq!(cheaper.block_depth.before, cheaper.block_depth.after);
    let rules: Vec<&str> = audit.findings.iter().map(|f| f.rule.as_str()).collect();
    assert!(rules.contains(&"faster-than-needed"), "{rules:?}");
    let explained = printed(&["explain", "faster-than-needed"]);
    assert!(explained.contains("time to spare"));
}
