//! The record an audit makes: verdict, findings, chains as they are told.
//!
//! Sources outside the project: depths counted by hand on netlists built for the
//! purpose, the arithmetic beside each; the EPFL suite's description of its
//! adder (Amarù, Gaillardon, De Micheli, IWLS 2015).

mod samples;
mod support;

use carrywise::audit::findings;
use carrywise::audit::record::{Audit, Limit};
use carrywise::report::{Form, Page, write};
use samples::{audited, fixture};

fn rendered(audit: &Audit, form: Form) -> String {
    let mut out = Vec::new();
    write(audit, form, Page::default(), &mut out).expect("memory can be written");
    String::from_utf8(out).expect("a report is text")
}

#[test]
fn every_rule_is_told_in_full() {
    for rule in findings::RULES {
        for text in [
            rule.what,
            rule.why,
            rule.advice,
            rule.leaves_alone,
            rule.example,
        ] {
            assert!(text.len() > 10, "{} is told too briefly", rule.slug);
        }
        assert_eq!(findings::find(rule.slug).map(|r| r.slug), Some(rule.slug));
    }
    let slugs: Vec<&str> = findings::RULES.iter().map(|rule| rule.slug).collect();
    assert!(slugs.is_sorted(), "the registry is in alphabetical order");
    let near = |word| findings::nearest(word).map(|rule| rule.slug);
    assert_eq!(near("net-drivn-twice"), Some("net-driven-twice"));
    assert_eq!(near("ripple"), Some("ripple-on-longest-path"));
    assert_eq!(near("harbour"), None);
}

/// A ripple adder of `bits` one-level full adders whose carry-in passes `before`
/// ANDs, and beside it a chain of `beside` ANDs.
fn adder(bits: usize, before: usize, beside: usize) -> String {
    use std::fmt::Write;
    let mut text = String::from(".model total\n.inputs cin z");
    for i in 0..bits {
        let _ = write!(text, " a[{i}] b[{i}]");
    }
    for i in 0..before.max(beside) {
        let _ = write!(text, " en{i}");
    }
    text.push_str("\n.outputs y carry");
    for i in 0..bits {
        let _ = write!(text, " s[{i}]");
    }
    text.push('\n');
    let mut ands = |from: &str, to: &str, n: usize| {
        let mut last = from.to_owned();
        for i in 0..n {
            let next = if i + 1 == n {
                to.to_owned()
            } else {
                format!("{to}_via{i}x")
            };
            let _ = write!(text, ".names {last} en{i} {next}\n11 1\n");
            last = next;
        }
    };
    ands("z", "y", beside);
    ands("cin", "c[0]", before);
    for i in 0..bits {
        let next = if i + 1 == bits {
            "carry".to_owned()
        } else {
            format!("c[{}]", i + 1)
        };
        let _ = write!(
            text,
            ".names a[{i}] b[{i}] c[{i}] s[{i}]\n100 1\n010 1\n001 1\n111 1\n\
             .names a[{i}] b[{i}] c[{i}] {next}\n11- 1\n1-1 1\n-11 1\n"
        );
    }
    text + ".end\n"
}

#[test]
fn carry_is_the_limit_where_free_carries_shorten_the_block() {
    // By hand: 2 ANDs, then a carry a bit; free, the top sum is one level
    // behind the carry-in.
    let audit = audited("total.blif", adder(8, 2, 5).as_bytes());
    assert_eq!(audit.depth.longest, 10);
    assert_eq!(audit.verdict.limit, Limit::Carry);
    assert_eq!(audit.verdict.chain.as_deref(), Some("C1"));
    let kind = &audit.verdict.by_path_kind[0];
    assert_eq!(kind.path_kind, "input→output");
    assert_eq!(kind.levels_in_carries, 8);
    // The ANDs beside, not the chain, are what is left.
    assert_eq!(kind.depth_if_carry_were_free, 5);
    let chain = &audit.chains[0];
    assert_eq!((chain.kind.as_str(), chain.bits), ("adder", 8));
    assert_eq!(chain.formula(), "a[7:0] + b[7:0] + c[0]");
    assert!(
        audit
            .verdict
            .sentence
            .contains("takes 8 of the 10 gate delays")
    );
    assert!(
        audit
            .findings
            .iter()
            .any(|f| f.rule == "ripple-on-longest-path")
    );
}

#[test]
fn carry_is_not_the_limit_where_another_path_is_as_long() {
    for beside in [10, 12] {
        let audit = audited("total.blif", adder(8, 2, beside).as_bytes());
        assert_eq!(audit.verdict.limit, Limit::Elsewhere, "{beside}");
        assert_eq!(
            audit.verdict.by_path_kind[0].depth_if_carry_were_free,
            beside as i64
        );
        assert!(
            audit
                .verdict
                .sentence
                .starts_with("No proven carry chain limits this block")
        );
    }
    let ripple = |audit: &Audit| {
        audit
            .findings
            .iter()
            .any(|f| f.rule == "ripple-on-longest-path")
    };
    assert!(!ripple(&audited("total.blif", adder(8, 2, 12).as_bytes())));
}

#[test]
fn the_verdict_is_unknown_where_a_cut_can_hide_a_longer_path() {
    let text = adder(8, 2, 5);
    for (extra, reason) in [
        (
            ".names y h2 h1\n11 1\n.names h1 h2\n1 1\n.names h2 tap\n1 1\n",
            "loop",
        ),
        (
            ".names y h1\n1 1\n.names z h1\n1 1\n.names h1 tap\n1 1\n",
            "several drivers",
        ),
        (
            ".subckt gauge_filter in=y out=h1\n.names h1 tap\n1 1\n",
            "without a known function",
        ),
    ] {
        let text = text
            .replace(".outputs y", ".outputs tap y")
            .replace(".end", &format!("{extra}.end"));
        let audit = audited("total.blif", text.as_bytes());
        assert_eq!(audit.verdict.limit, Limit::Unknown, "{reason}");
        assert!(audit.verdict.sentence.starts_with("Unknown, because"));
        assert!(
            audit.verdict.sentence.contains(reason),
            "{}",
            audit.verdict.sentence
        );
        // What is seen is still told.
        assert!(audit.verdict.sentence.contains("carry limits this block"));
    }
}

#[test]
fn structure_faults_are_findings_with_place_and_advice() {
    let text = ".model m\n.inputs a b\n.outputs y\n.names a m1\n1 1\n.names b m1\n1 1\n\
                .names m1 ghost y\n11 1\n.names a b spare\n11 1\n.end\n";
    let audit = audited("m.blif", text.as_bytes());
    let found = |rule: &str| {
        audit
            .findings
            .iter()
            .find(|f| f.rule == rule)
            .unwrap_or_else(|| panic!("no {rule}"))
    };
    assert_eq!(
        found("net-driven-twice").message,
        "m1 has 2 drivers, at lines 4 and 6"
    );
    assert_eq!(found("net-without-driver").line, Some(8));
    assert_eq!(found("net-without-driver").net.as_deref(), Some("ghost"));
    assert_eq!(found("net-without-reader").net.as_deref(), Some("spare"));
    // Worst first.
    assert!(audit.findings.is_sorted_by(|a, b| a.severity >= b.severity));
}

#[test]
fn ascii_and_binary_aiger_give_the_same_record() {
    let mut ascii = fixture("tide_logger.aag");
    let mut binary = fixture("tide_logger.aig");
    assert_eq!(ascii.chains.len(), 4);
    for audit in [&mut ascii, &mut binary] {
        audit.netlist.file.clear();
        audit.netlist.format.clear();
        audit.netlist.sha256.clear();
        // Binary files have no lines.
        for step in &mut audit.depth.longest_path {
            step.line = None;
        }
        for chain in &mut audit.chains {
            chain.place.line_first = None;
            chain.place.line_last = None;
        }
        for finding in &mut audit.findings {
            finding.line = None;
        }
    }
    assert_eq!(ascii, binary);
}

#[test]
fn an_audit_is_the_same_on_every_run() {
    let once = rendered(&fixture("tide_logger.blif"), Form::Yaml);
    assert_eq!(once, rendered(&fixture("tide_logger.blif"), Form::Yaml));
}

#[test]
fn fingerprints_survive_new_lines_and_new_internal_names() {
    let text = adder(8, 2, 5);
    let moved = format!("# one line more\n{}", text.replace("c[", "carry_of["));
    let print = |text: &str| {
        audited("t.blif", text.as_bytes()).chains[0]
            .fingerprint
            .clone()
    };
    assert_eq!(print(&text), print(&moved));
    assert_ne!(print(&text), print(&text.replace("a[", "level[")));
}

#[test]
fn the_open_adder_is_told_as_its_collection_describes_it() {
    let Some(folder) = support::datasets() else {
        return;
    };
    // EPFL suite README and the literature: a 128-bit ripple adder, 255 levels.
    let bytes = std::fs::read(folder.join("epfl/adder.aig")).expect("the data set is complete");
    let audit = audited("adder.aig", &bytes);
    assert_eq!(audit.verdict.limit, Limit::Carry);
    assert_eq!(audit.chains.len(), 1);
    let chain = &audit.chains[0];
    assert_eq!(chain.formula(), "a[127:0] + b[127:0]");
    assert_eq!(chain.built_as.name, "ripple");
    assert!(chain.on_longest_path);
    assert_eq!(audit.recommended_set.block_depth.before, 255);
    assert!(audit.recommended_set.block_depth.after <= 17);
    let table = rendered(&audit, Form::Table);
    assert!(
        table.contains("255  C1, bits 1–127"),
        "the carry stretch is one row:\n{table}"
    );
}
