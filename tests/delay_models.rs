//! Delay models from the command line to every form of report.
//!
//! Sources: an inverter that drives four like it takes 5 τ (Sutherland, Sproull and
//! Harris, *Logical Effort*, 1999); figures of small netlists worked by hand from
//! the same table of values.

mod samples;

use carrywise::audit::record::Audit;
use carrywise::audit::{self, Options, Origin};
use carrywise::format::{Format, ReadOptions, read};
use carrywise::plan::Request;
use carrywise::report::{Form, Page, write};
use carrywise::source::Source;
use carrywise::timing::{DelayModel, Time};

fn audited(blif: &str, model: DelayModel) -> Audit {
    let source = Source {
        name: "test.blif".to_owned(),
        bytes: blif.as_bytes().to_vec(),
    };
    let netlist = read(&source, &ReadOptions::default())
        .expect("it parses")
        .netlist;
    let origin = Origin {
        file: source.name,
        format: Format::Blif,
        sha256: String::new(),
    };
    let options = Options {
        request: Request::new(model),
        ..Options::default()
    };
    audit::audit(&netlist, &origin, &options).expect("the defaults fit")
}

fn shown(audit: &Audit, form: Form) -> String {
    let mut text = Vec::new();
    write(audit, form, Page::default(), &mut text).expect("memory takes it");
    String::from_utf8(text).expect("reports are UTF-8")
}

/// An inverter that drives four: 1 + 4; each of them an output: 1 + 1. Seven in
/// all, and 7/5 of a fan-out-of-four inverter.
const FOUR: &str = ".model four\n.inputs a\n.outputs w x y z\n.names a n\n0 1\n\
    .names n w\n0 1\n.names n x\n0 1\n.names n y\n0 1\n.names n z\n0 1\n.end\n";

#[test]
fn an_inverter_that_drives_four_is_told_in_every_form() {
    let audit = audited(FOUR, DelayModel::LogicalEffort);
    assert_eq!(audit.depth.longest, 7);
    assert_eq!(audit.depth.longest_in_fo4, Some(Time::thousandths(1_400)));
    assert_eq!(audit.depth.unit, "τ");
    assert_eq!(audit.settings.delay_model.name, "logical-effort");
    assert_eq!(audit.settings.delay_model.misfit, None);
    for form in [Form::Table, Form::Markdown] {
        let text = shown(&audit, form);
        assert!(text.contains("7 τ deep"), "{text}");
        assert!(text.contains("1.40 inverters"), "{text}");
    }
    for form in [Form::Yaml, Form::Json] {
        let text = shown(&audit, form).replace('"', "").replace(": ", ":");
        assert!(text.contains("longest_in_fo4:1.4"), "{text}");
        assert!(text.contains("longest:7"), "{text}");
    }
}

/// Two NAND2 of which each loads the other's driver: a pin is 4/3, so 2 + 4/3 to
/// the second gate and 2 + 1 to the output, told to the digits that mean something.
#[test]
fn fractions_of_a_unit_are_told_in_every_form() {
    let blif = ".model two\n.inputs a b c\n.outputs y\n.names a b n\n11 0\n\
                .names n c y\n11 0\n.end\n";
    let audit = audited(blif, DelayModel::LogicalEffort);
    assert_eq!(audit.depth.longest, Time::thousandths(6_333));
    assert!(shown(&audit, Form::Table).contains("6.33 τ deep"));
    assert!(shown(&audit, Form::Markdown).contains("6.33 τ deep"));
    assert!(shown(&audit, Form::Yaml).contains("longest: 6.333\n"));
    let json = shown(&audit, Form::Json);
    let again: Audit = serde_json::from_str(&json).expect("it reads back");
    assert_eq!(again, audit);
    let again: Audit = serde_yaml::from_str(&shown(&audit, Form::Yaml)).expect("it reads back");
    assert_eq!(again, audit);
}

/// Six-input functions of many rows, as look-up tables hold them.
#[test]
fn look_up_tables_are_told_not_to_fit_logical_effort() {
    let mut blif = ".model tables\n.inputs a b c d e f\n.outputs y z\n".to_owned();
    for output in ["y", "z"] {
        blif.push_str(&format!(".names a b c d e f {output}\n"));
        blif.push_str("110010 1\n001101 1\n0101-1 1\n1-1000 1\n000000 1\n");
    }
    blif.push_str(".end\n");
    let audit = audited(&blif, DelayModel::LogicalEffort);
    let misfit = audit.settings.delay_model.misfit.as_deref();
    assert!(
        misfit.is_some_and(|why| why.contains("2 of 2 gates")),
        "{misfit:?}"
    );
    assert!(
        audit
            .findings
            .iter()
            .any(|f| f.rule == "delay-model-does-not-fit")
    );
    for form in [Form::Table, Form::Markdown, Form::Yaml, Form::Json] {
        assert!(shown(&audit, form).contains("look-up"), "{form:?}");
    }
    for model in [DelayModel::Unit, DelayModel::Pairs] {
        let audit = audited(&blif, model);
        assert_eq!(audit.settings.delay_model.misfit, None);
        assert!(
            audit
                .findings
                .iter()
                .all(|f| f.rule != "delay-model-does-not-fit")
        );
    }
    // A netlist of common cells with a handful of covers is left alone.
    let audit = samples::fixture("tide_logger.blif");
    assert_eq!(audit.settings.delay_model.misfit, None);
}

/// Kinds of path, ends by depth and the path itself agree on the depth.
#[test]
fn the_kinds_of_path_add_up_under_every_model() {
    for model in DelayModel::ALL {
        let audit = audited(FOUR, model);
        let kinds = audit.verdict.by_path_kind.iter();
        assert_eq!(
            kinds.map(|kind| kind.longest).max(),
            Some(audit.depth.longest)
        );
        let ends: u64 = audit.depth.histogram.iter().map(|bar| bar.outputs).sum();
        assert_eq!(ends, 4);
        let last = audit.depth.longest_path.last().expect("a path");
        assert_eq!(last.arrival, audit.depth.longest);
    }
}

/// Whichever scheme another model would choose, the record
/// says of every model that needs no file whether the choice stays, as audits under
/// those models say too, and the forms for people repeat it.
#[test]
fn a_recommendation_says_which_models_it_holds_under() {
    for (name, model) in [
        ("tide_logger.blif", DelayModel::Unit),
        ("tide_logger.blif", DelayModel::LogicalEffort),
    ] {
        let path = format!("{}/fixtures/{name}", env!("CARGO_MANIFEST_DIR"));
        let text = std::fs::read_to_string(path).expect("the fixture is there");
        let audit = audited(&text, model);
        let proposals = audit.chains.iter().flat_map(|chain| &chain.proposals);
        let chosen: Vec<_> = proposals.filter(|p| p.recommended).collect();
        assert!(!chosen.is_empty());
        for proposal in chosen {
            let mut told: Vec<&str> = proposal
                .holds_under
                .iter()
                .chain(&proposal.flips_under)
                .map(String::as_str)
                .collect();
            assert_eq!(told.first(), Some(&model.name()));
            told.sort_unstable();
            assert_eq!(told, ["logical-effort", "pairs", "unit"]);
            // The same question asked from scratch under every other model.
            for other in DelayModel::ALL {
                let again = audited(&text, other);
                let again = again.chains[0].proposals.iter().find(|p| p.recommended);
                let same = again.is_some_and(|again| {
                    (&again.scheme, again.group) == (&proposal.scheme, proposal.group)
                });
                let holds = proposal
                    .holds_under
                    .iter()
                    .any(|known| known == other.name());
                assert_eq!(holds, same, "{}", other.name());
            }
        }
        // Where the table wraps does not matter.
        let table = shown(&audit, Form::Table);
        let words: Vec<&str> = table.split_whitespace().collect();
        assert!(
            words.join(" ").contains("the choice holds under"),
            "{table}"
        );
    }
}

/// Arrival times are asserted in whole units of the model, whatever its ticks are:
/// the same netlist is 7 τ deep, and 3 later when its input is ready at 3.
#[test]
fn asserted_times_count_in_the_unit_of_the_model() {
    let text = "arrival: [{ports: \"a\", at: 3, why: \"a slow float\"}]\n\
                required: [{ports: \"w\", at: 8, why: \"the siren samples early\"}]\n";
    let file = carrywise::format::assumptions::read(Source {
        name: "a.yaml".to_owned(),
        bytes: text.as_bytes().to_vec(),
    });
    let Ok(file) = file else { panic!("it reads") };
    let source = Source {
        name: "test.blif".to_owned(),
        bytes: FOUR.as_bytes().to_vec(),
    };
    let netlist = read(&source, &ReadOptions::default())
        .expect("it parses")
        .netlist;
    let origin = Origin {
        file: source.name,
        format: Format::Blif,
        sha256: String::new(),
    };
    for (model, longest, late) in [
        (DelayModel::Unit, 5, false),
        (DelayModel::LogicalEffort, 10, true),
    ] {
        let options = Options {
            request: Request::new(model),
            ..Options::default()
        };
        let asserting = audit::Asserting {
            assumptions: &file.assumptions,
            sha256: String::new(),
        };
        let audit = audit::audit_under(&netlist, &origin, &options, Some(&asserting));
        let audit = audit.expect("it fits");
        assert_eq!(audit.depth.longest, longest);
        assert_eq!(audit.findings.iter().any(|f| f.rule == "too-deep"), late);
        let effect = audit.assumed.iter().find_map(|each| each.effect.clone());
        assert!(effect.is_some_and(|effect| effect.contains(&format!("ready at {longest}"))));
    }
}
