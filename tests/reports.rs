//! Reports: every form of the same record, friendly and hostile.
//!
//! Sources outside the project: YAML 1.2 and JSON (RFC 8259), read back with
//! general-purpose libraries; the comment limit of 65,536 characters of the
//! tightest large forge (measured by its users in 2025), under which the bound
//! of 60,000 lies; CommonMark's rule that a backslash before ASCII punctuation
//! makes it literal.

mod samples;

use carrywise::audit::record::{Audit, Wire};
use carrywise::audit::words;
use carrywise::report::{Form, Page, number, write};
use carrywise::timing::Time;
use samples::{HOSTILE, hostile, tide_logger};

fn rendered(audit: &Audit, form: Form, page: Page) -> String {
    let mut out = Vec::new();
    write(audit, form, page, &mut out).expect("memory can be written");
    String::from_utf8(out).expect("a report is text")
}

fn shown(audit: &Audit, form: Form) -> String {
    rendered(audit, form, Page::default())
}

#[test]
fn table_reads_as_reviewed() {
    insta::assert_snapshot!(shown(&tide_logger(), Form::Table));
}

#[test]
fn markdown_reads_as_reviewed() {
    insta::assert_snapshot!(shown(&tide_logger(), Form::Markdown));
}

#[test]
fn hostile_names_in_the_table_read_as_reviewed() {
    insta::assert_snapshot!(shown(&hostile(), Form::Table));
}

#[test]
fn hostile_names_in_markdown_read_as_reviewed() {
    insta::assert_snapshot!(shown(&hostile(), Form::Markdown));
}

#[test]
fn table_fits_the_width_it_is_given() {
    for audit in [tide_logger(), hostile()] {
        for width in [80, 100] {
            let page = Page {
                width,
                ..Page::default()
            };
            for line in rendered(&audit, Form::Table, page).lines() {
                let length = line.chars().count();
                assert!(length <= usize::from(width), "{length} characters: {line}");
            }
        }
    }
}

#[test]
fn table_is_plain_unless_colour_is_asked_for() {
    let plain = shown(&hostile(), Form::Table);
    assert!(
        plain.chars().all(|c| c == '\n' || !c.is_control()),
        "{plain:?}"
    );
    let coloured = Page {
        colour: true,
        ..Page::default()
    };
    let coloured = rendered(&hostile(), Form::Table, coloured);
    assert_ne!(coloured, plain);
    let stripped = coloured.replace("\u{1b}[1m", "").replace("\u{1b}[0m", "");
    assert_eq!(stripped, plain);
}

#[test]
fn people_read_only_ascii_and_our_own_signs() {
    for form in [Form::Table, Form::Markdown] {
        let text = shown(&hostile(), form);
        let stray = text
            .chars()
            .find(|&c| !(c == '\n' || matches!(c, ' '..='~') || "→–×⊕…".contains(c)));
        assert_eq!(stray, None, "{form:?}");
        assert!(
            text.contains(r"u{202e}"),
            "the direction mark is written out"
        );
    }
}

/// Takes away what Markdown reads as literal: a backslash with the punctuation
/// after it (CommonMark 0.31, section 2.4).
fn without_escapes(text: &str) -> String {
    let mut rest = String::new();
    let mut characters = text.chars();
    while let Some(c) = characters.next() {
        if c == '\\' {
            let next = characters.next().expect("a backslash escapes something");
            assert!(next.is_ascii_punctuation(), "\\{next} is no escape");
        } else {
            rest.push(c);
        }
    }
    rest
}

#[test]
fn no_name_starts_markup_in_markdown() {
    let text = shown(&hostile(), Form::Markdown);
    for line in text.lines() {
        let live = without_escapes(line);
        let live = live
            .replace("<!-- -->", "")
            .replace("<details><summary>", "")
            .replace("</summary>", "")
            .replace("</details>", "");
        // Our own: a heading, a verdict, a table's bars, the caution's mark.
        let live = live.trim_start_matches('#').trim_start_matches("> ");
        let live = live.trim_start_matches("**").trim_end_matches("**");
        let bars = live.starts_with('|');
        let stray = live.find(['`', '*', '_', '[', ']', '<', '>', '~', '&', '$', '#']);
        assert_eq!(stray, None, "{line}");
        assert!(bars || !live.contains('|'), "{line}");
    }
    // What forges look for after Markdown: mentions, bare addresses.
    assert!(text.contains("@<!-- -->team") && !text.contains("@team"));
    assert!(!text.contains("http://") && !text.contains("www.x"));
}

#[test]
fn every_row_of_a_markdown_table_has_the_cells_of_its_head() {
    for audit in [tide_logger(), hostile()] {
        let text = shown(&audit, Form::Markdown);
        let mut head = None;
        for line in text.lines() {
            let live = without_escapes(line);
            if !live.starts_with('|') {
                head = None;
                continue;
            }
            let bars = live.matches('|').count();
            assert_eq!(*head.get_or_insert(bars), bars, "{line}");
        }
    }
}

#[test]
fn yaml_and_json_read_back_as_the_record() {
    for audit in [tide_logger(), hostile()] {
        let yaml = shown(&audit, Form::Yaml);
        assert!(yaml.starts_with("---\n"));
        let back: Audit = serde_yaml::from_str(&yaml).expect("YAML");
        assert_eq!(back, audit);
        let json = shown(&audit, Form::Json);
        assert_eq!(json.matches('\n').count(), 1, "one line");
        let back: Audit = serde_json::from_str(&json).expect("JSON");
        assert_eq!(back, audit);
    }
}

#[test]
fn several_records_are_several_documents() {
    use serde::Deserialize;
    let both = [tide_logger(), hostile()];
    let yaml: String = both.iter().map(|a| shown(a, Form::Yaml)).collect();
    let documents: Vec<Audit> = serde_yaml::Deserializer::from_str(&yaml)
        .map(|document| Audit::deserialize(document).expect("YAML"))
        .collect();
    assert_eq!(documents, both);
    let json: String = both.iter().map(|a| shown(a, Form::Json)).collect();
    let lines: Vec<Audit> = json
        .lines()
        .map(|line| serde_json::from_str(line).expect("JSON"))
        .collect();
    assert_eq!(lines, both);
}

#[test]
fn fields_keep_the_names_and_the_order_of_the_schema() {
    let json = shown(&tide_logger(), Form::Json);
    // Each name is looked for behind the one before it.
    let mut at = 0;
    for name in [
        "schema",
        "tool",
        "netlist",
        "file",
        "format",
        "model",
        "sha256",
        "inputs",
        "outputs",
        "registers",
        "gates",
        "black_boxes",
        "settings",
        "delay_model",
        "new_gates",
        "gate_inputs",
        "min_bits",
        "effort",
        "patterns_seed",
        "assumptions_sha256",
        "seen",
        "gates_with_function",
        "gates_without_function",
        "nets_cut",
        "chains_proven",
        "chains_witnessed",
        "chains_unproven",
        "verdict",
        "limit",
        "chain",
        "sentence",
        "by_path_kind",
        "path_kind",
        "longest",
        "levels_in_carries",
        "depth_if_carry_were_free",
        "ends_at_longest",
        "next_below",
        "depth",
        "longest",
        "unit",
        "longest_free_buffers",
        "histogram",
        "longest_path",
        "ports",
        "bus",
        "deepest_in",
        "deepest_out",
        "deepest_through",
        "fan_in",
        "fan_out",
        "chains",
        "id",
        "fingerprint",
        "array",
        "kind",
        "bits",
        "operands",
        "carry_in",
        "carry_form",
        "carry_out",
        "carry_taps",
        "sums",
        "result",
        "mode",
        "feedback",
        "duplicates",
        "built_as",
        "proven",
        "place",
        "instance",
        "line_first",
        "line_last",
        "depth",
        "arrives",
        "leaves",
        "carries",
        "exercised",
        "on_longest_path",
        "slack",
        "not_planned",
        "proposals",
        "scheme",
        "group",
        "levels",
        "valency",
        "select_end",
        "on_front",
        "recommended",
        "reason",
        "holds_under",
        "chain_depth",
        "block_depth",
        "takes_over",
        "gates_added",
        "gates_removed",
        "gate_equivalents_added",
        "largest_fan_in",
        "largest_fan_out",
        "wire_tracks",
        "above_bound",
        "carries",
        "network",
        "recommended_set",
        "arrays",
        "recurrences_not_listed",
        "unproven",
        "findings",
        "assumed",
        "caution",
    ] {
        let key = format!("\"{name}\":");
        let found = json[at..].find(&key);
        at += found.unwrap_or_else(|| panic!("{name} is missing or out of order")) + key.len();
    }
}

#[test]
fn a_constant_bit_stays_apart_from_a_net_of_that_name() {
    let wires = [
        Wire::Constant(1),
        Wire::Net("1".into()),
        Wire::Net("~0".into()),
    ];
    let yaml = serde_yaml::to_string(&wires).expect("YAML");
    let back: Vec<Wire> = serde_yaml::from_str(&yaml).expect("YAML");
    assert_eq!(back, wires);
    let json = serde_json::to_string(&wires).expect("JSON");
    assert_eq!(json, r#"[1,"1","~0"]"#);
}

/// A record far beyond what a comment holds, names and lists alike.
fn enormous() -> Audit {
    let mut audit = hostile();
    let long = HOSTILE.repeat(20_000);
    audit.netlist.file = long.clone();
    audit.verdict.sentence = format!("Carry limits this block: {long}.");
    let chain = audit.chains[0].clone();
    audit.chains = (1..=3000)
        .map(|i| {
            let mut chain = chain.clone();
            chain.id = format!("C{i}");
            for operand in &mut chain.operands {
                operand.name = HOSTILE.repeat(50);
            }
            chain
        })
        .collect();
    let finding = audit.findings[0].clone();
    audit.findings = vec![finding; 5000];
    audit.findings_left_out = 7;
    audit.unproven = vec![audit.unproven[0].clone(); 4000];
    audit.depth.ports = vec![audit.depth.ports[0].clone(); 4000];
    for step in &mut audit.depth.longest_path {
        step.chain = None;
        step.net = HOSTILE.repeat(50);
    }
    audit
}

#[test]
fn markdown_stays_under_its_bound_and_says_what_it_folded() {
    let text = shown(&enormous(), Form::Markdown);
    let length = text.chars().count();
    assert!(length < 60_000, "{length} characters");
    assert!(text.contains("more chains not shown here"));
    assert!(text.contains("more findings not shown here"));
    // Shown rows and the rest make up the whole.
    let shown_chains = text.matches("built as ripple").count();
    assert!(shown_chains > 0);
    let few = Page {
        characters: 20_000,
        ..Page::default()
    };
    let text = rendered(&enormous(), Form::Markdown, few);
    assert!(text.chars().count() < 20_000);
}

#[test]
fn table_of_an_enormous_record_stays_short() {
    let text = shown(&enormous(), Form::Table);
    assert!(text.lines().count() < 1000, "{}", text.lines().count());
}

#[test]
fn folded_bars_lose_nothing() {
    let values: Vec<(i64, u64)> = (0..1000).map(|v| (v * 3 + 1, v as u64 + 1)).collect();
    let total: u64 = values.iter().map(|&(_, count)| count).sum();
    for bars in [
        number::equal_bars(&values, 12),
        number::doubling_bars(&values, 12),
    ] {
        assert!(bars.len() <= 13, "{} bars", bars.len());
        assert_eq!(bars.iter().map(|(_, count)| count).sum::<u64>(), total);
    }
    let few = [(2, 5), (9, 1)];
    assert_eq!(
        number::equal_bars(&few, 12),
        [("2".to_owned(), 5), ("9".to_owned(), 1)]
    );
}

#[test]
fn counts_agree_with_their_nouns() {
    assert_eq!(words::counted(0, "gate", "gates"), "no gates");
    assert_eq!(words::counted(1, "gate", "gates"), "1 gate");
    assert_eq!(words::counted(1_020, "gate", "gates"), "1,020 gates");
    assert_eq!(words::grouped(1_000_000), "1,000,000");
    assert_eq!(
        words::depth_in(Time::whole(1), "gate delays"),
        "1 gate delay"
    );
}
