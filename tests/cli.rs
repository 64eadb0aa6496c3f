//! The command as a user meets it: exit status, what goes where, report files.
//!
//! Sources outside the project: the design's own table of exit statuses; POSIX
//! habit that standard output holds the result and standard error the messages;
//! <https://no-color.org> for `NO_COLOR`.

use assert_cmd::Command;
use predicates::prelude::*;
use predicates::str::{contains, is_empty, starts_with};
use std::fs;
use std::path::Path;

const GOOD: &str = ".model gauge\n.inputs a b\n.outputs y\n.names a b y\n11 1\n.end\n";
const BAD: &str = ".model gauge\n.inputs a b\n.outputs y\n.names a b y\n1 1\n.end\n";

/// Runs where the package lies and names its files from there, so that where a
/// table wraps does not depend on where somebody unpacked it.
fn carrywise() -> Command {
    let mut command = Command::cargo_bin("carrywise").expect("the binary is built");
    command
        .env_remove("NO_COLOR")
        .current_dir(env!("CARGO_MANIFEST_DIR"));
    command
}

fn fixture(name: &str) -> String {
    format!("fixtures/{name}")
}

/// A folder with `good.blif` and `bad.blif`.
fn folder() -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    fs::write(folder.path().join("good.blif"), GOOD).expect("written");
    fs::write(folder.path().join("bad.blif"), BAD).expect("written");
    folder
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .expect("listed")
        .map(|entry| {
            entry
                .expect("an entry")
                .file_name()
                .into_string()
                .expect("text")
        })
        .collect();
    names.sort();
    names
}

#[test]
fn audits_a_file_and_says_nothing_else() {
    carrywise()
        .args(["audit", &fixture("tide_logger.blif")])
        .assert()
        .code(0)
        .stdout(contains("gate delays").and(contains("Carry limits this block")))
        .stderr(is_empty());
}

#[test]
fn output_to_a_pipe_is_plain() {
    carrywise()
        .args(["audit", &fixture("tide_logger.blif")])
        .assert()
        .stdout(contains("\u{1b}").not());
}

#[test]
fn reads_standard_input_by_a_dash() {
    carrywise()
        .args(["audit", "-"])
        .write_stdin(GOOD)
        .assert()
        .code(0)
        .stdout(starts_with(
            "-: 2 inputs, 1 output, 1 gate, no registers; 1 gate delay",
        ));
    carrywise()
        .args(["audit", "-", "-"])
        .write_stdin(GOOD)
        .assert()
        .code(2)
        .stderr(contains("given twice"));
}

#[test]
fn a_file_that_fails_does_not_stop_the_others() {
    let folder = folder();
    carrywise()
        .current_dir(&folder)
        .args([
            "audit",
            "good.blif",
            "bad.blif",
            "missing.blif",
            "good.blif",
            "--as",
            "json",
        ])
        .assert()
        .code(2)
        .stdout(predicate::function(|out: &str| {
            out.lines().count() == 2 && out.lines().all(|line| line.starts_with("{\"schema\""))
        }))
        .stderr(contains("bad.blif:5").and(contains("missing.blif")));
}

#[test]
fn an_unusable_input_is_told_with_its_place() {
    let folder = folder();
    carrywise()
        .current_dir(&folder)
        .args(["audit", "bad.blif"])
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(contains("bad.blif:5:1").and(contains("help")));
    carrywise()
        .current_dir(&folder)
        .args(["audit", "."])
        .assert()
        .code(2)
        .stderr(contains("cannot read the file"));
}

#[test]
fn warnings_are_for_standard_error_and_can_be_silenced() {
    let text = GOOD.replace(".end", ".tide_mark 3\n.end");
    let run = |quiet: &[&str]| {
        let mut command = carrywise();
        command
            .args(["audit", "-"])
            .args(quiet)
            .write_stdin(text.clone());
        command.assert().code(0)
    };
    run(&[]).stderr(contains("warning").and(contains(".tide_mark")));
    run(&["--quiet"]).stderr(is_empty());
    run(&["-q"]).stderr(is_empty());
}

#[test]
fn each_form_goes_to_standard_output() {
    for (form, opening) in [
        ("table", "good.blif: 2 inputs"),
        ("markdown", "### good.blif"),
        ("yaml", "---\nschema: carrywise/audit/1\n"),
        ("json", "{\"schema\":\"carrywise/audit/1\""),
    ] {
        let folder = folder();
        carrywise()
            .current_dir(&folder)
            .args(["audit", "good.blif", "--as", form])
            .assert()
            .code(0)
            .stdout(starts_with(opening));
    }
}

#[test]
fn report_files_hold_every_netlist_in_the_form_of_their_extension() {
    let folder = folder();
    carrywise()
        .current_dir(&folder)
        .args(["audit", "good.blif", "bad.blif", "good.blif"])
        .args([
            "--report", "r.md", "--report", "r.yaml", "--report", "r.json",
        ])
        .assert()
        .code(2)
        .stdout(contains("good.blif: 2 inputs"));
    let read = |name: &str| fs::read_to_string(folder.path().join(name)).expect(name);
    assert_eq!(read("r.md").matches("### good.blif").count(), 2);
    assert_eq!(read("r.yaml").matches("---\nschema:").count(), 2);
    assert_eq!(read("r.json").lines().count(), 2);
    // Nothing half-written is left beside them.
    assert_eq!(
        names(folder.path()),
        ["bad.blif", "good.blif", "r.json", "r.md", "r.yaml"]
    );
}

#[test]
fn an_old_report_stays_when_there_is_nothing_new() {
    let folder = folder();
    fs::write(folder.path().join("r.md"), "as it was").expect("written");
    carrywise()
        .current_dir(&folder)
        .args(["audit", "bad.blif", "--report", "r.md"])
        .assert()
        .code(2);
    let report = fs::read_to_string(folder.path().join("r.md")).expect("read");
    assert_eq!(report, "as it was");
    assert_eq!(names(folder.path()), ["bad.blif", "good.blif", "r.md"]);
}

#[test]
fn report_paths_are_checked_before_any_work() {
    let folder = folder();
    fs::create_dir(folder.path().join("d.md")).expect("made");
    for (paths, message) in [
        (&["r.txt"][..], ".md, .yaml or .json"),
        (&["r"], ".md, .yaml or .json"),
        (&["nowhere/r.md"], "cannot write nowhere/r.md"),
        (&["d.md"], "folder"),
        (&["r.md", "r.md"], "given twice"),
    ] {
        let mut command = carrywise();
        command.current_dir(&folder).args(["audit", "good.blif"]);
        for path in paths {
            command.args(["--report", path]);
        }
        command
            .assert()
            .code(2)
            .stdout(is_empty())
            .stderr(contains(message));
    }
    fs::write(folder.path().join("good.json"), GOOD).expect("written");
    carrywise()
        .current_dir(&folder)
        .args(["audit", "good.json", "--report", "good.json"])
        .assert()
        .code(2)
        .stderr(contains("overwrite an input"));
    assert_eq!(
        fs::read_to_string(folder.path().join("good.json")).expect("read"),
        GOOD
    );
}

#[test]
fn options_reach_the_record() {
    carrywise()
        .args(["audit", &fixture("tide_logger.blif"), "--as", "yaml"])
        .args([
            "--delay",
            "pairs",
            "--gate-inputs",
            "3",
            "--new-gates",
            "cover",
        ])
        .args(["--min-bits", "8", "--effort", "777"])
        .assert()
        .code(0)
        .stdout(
            contains("name: pairs")
                .and(contains("gate_inputs: 3"))
                .and(contains("new_gates: cover"))
                .and(contains("min_bits: 8"))
                .and(contains("effort: 777"))
                .and(contains("bits: 6\n").not()),
        );
    carrywise()
        .args(["audit", &fixture("tide_logger.blif"), "--max-gates", "100"])
        .assert()
        .code(2)
        .stderr(contains("100"));
    let two = format!("{GOOD}{}", GOOD.replace("gauge", "logger"));
    carrywise()
        .args(["audit", "-", "--top", "logger", "--as", "json"])
        .write_stdin(two)
        .assert()
        .code(0)
        .stdout(contains("\"model\":\"logger\""));
}

#[test]
fn limits_that_do_not_fit_the_format_are_a_usage_error() {
    carrywise()
        .args(["audit", &fixture("tide_logger.aig"), "--gate-inputs", "3"])
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(contains("AIGER").and(contains("tide_logger.aig")));
}

#[test]
fn a_wrong_command_line_is_exit_status_two() {
    for arguments in [
        &[][..],
        &["audit"],
        &["audit", "--as", "poem", "x.blif"],
        &["audit", "--gate-inputs", "1", "x.blif"],
        &["audit", "--min-bits", "none", "x.blif"],
        &["sound", "x.blif"],
    ] {
        carrywise()
            .args(arguments)
            .assert()
            .code(2)
            .stdout(is_empty());
    }
}

#[test]
fn explains_rules_and_knows_near_misses() {
    carrywise()
        .args(["explain", "net-driven-twice"])
        .assert()
        .code(0)
        .stdout(
            contains("Why it costs")
                .and(contains("What to do"))
                .and(contains("Example")),
        )
        .stderr(is_empty());
    carrywise()
        .args(["explain", "net-drivn-twice"])
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(contains("did you mean net-driven-twice?"));
    carrywise()
        .args(["explain", "harbour"])
        .assert()
        .code(2)
        .stderr(contains("lists them all"));
    carrywise()
        .arg("explain")
        .assert()
        .code(0)
        .stdout(contains("ripple-on-longest-path").and(contains("gate-too-wide")));
}

#[test]
fn every_finding_of_the_fixtures_can_be_explained() {
    for name in ["tide_logger.blif", "surge_filter.blif", "tide_delta.blif"] {
        let out = carrywise()
            .args(["audit", &fixture(name), "--as", "json"])
            .output()
            .expect("run");
        let record: serde_json::Value = serde_json::from_slice(&out.stdout).expect("JSON");
        for finding in record["findings"].as_array().expect("a list") {
            let rule = finding["rule"].as_str().expect("a slug");
            carrywise().args(["explain", rule]).assert().code(0);
        }
    }
}

#[test]
fn help_mentions_every_option_and_shows_an_example() {
    let help = carrywise()
        .args(["audit", "--help"])
        .assert()
        .code(0)
        .stderr(is_empty());
    let help = String::from_utf8(help.get_output().stdout.clone()).expect("text");
    for option in [
        "--as",
        "--report",
        "--delay",
        "--gate-inputs",
        "--new-gates",
        "--top",
        "--min-bits",
        "--max-gates",
        "--effort",
        "--quiet",
        "-q",
        "-h",
        "Examples:",
        "carrywise audit",
    ] {
        assert!(help.contains(option), "{option} is missing:\n{help}");
    }
    carrywise().arg("--help").assert().code(0).stdout(
        contains("audit")
            .and(contains("explain"))
            .and(contains("Exit status")),
    );
    carrywise()
        .arg("--version")
        .assert()
        .code(0)
        .stdout(starts_with("carrywise "));
}

#[cfg(unix)]
#[test]
fn a_reader_that_goes_away_is_no_fault() {
    use std::process::{Command, Stdio};
    let mut child = Command::new(assert_cmd::cargo::cargo_bin("carrywise"))
        .args(["audit", &fixture("tide_logger.blif"), "--as", "yaml"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("started");
    // Closed before anything is written.
    drop(child.stdout.take());
    let out = child.wait_with_output().expect("ended");
    assert_eq!(out.status.code(), Some(0));
    assert!(
        out.stderr.is_empty(),
        "{}",
        String::from_utf8_lossy(&out.stderr)
    );
}

#[test]
fn assumptions_are_read_from_their_file_and_told() {
    let folder = folder();
    let yaml = folder.path().join("assume.yaml");
    fs::write(&yaml, "tied: {b: {value: 0, why: never used here}}\n").expect("written");
    let good = folder.path().join("good.blif");
    carrywise()
        .args(["audit", good.to_str().unwrap(), "--assume"])
        .arg(&yaml)
        .assert()
        .code(0)
        .stdout(contains("b is 0").and(contains("never used here")))
        .stderr(is_empty());
    fs::write(&yaml, "tied:\n  beta: {value: 0, why: never used here}\n").expect("written");
    carrywise()
        .args(["audit", good.to_str().unwrap(), "--assume"])
        .arg(&yaml)
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(contains("assume.yaml:2:3").and(contains("`beta`")));
    // A report never replaces the file it was made under.
    carrywise()
        .args(["audit", good.to_str().unwrap(), "--assume"])
        .arg(&yaml)
        .arg("--report")
        .arg(&yaml)
        .assert()
        .code(2);
    let kept = fs::read_to_string(&yaml).expect("kept");
    assert!(kept.starts_with("tied:"));
}

#[test]
fn fail_on_decides_by_the_worst_finding() {
    let twice = ".model m\n.inputs a b\n.outputs y\n.names a y\n1 1\n.names b y\n1 1\n.end\n";
    let boxed = ".model m\n.inputs a\n.outputs y\n.subckt filter in=a out=y\n.end\n";
    for (text, level, code) in [
        (twice, "never", 0),
        (twice, "error", 1),
        (twice, "warning", 1),
        (boxed, "error", 0),
        (boxed, "warning", 1),
        (GOOD, "warning", 0),
    ] {
        carrywise()
            .args(["audit", "-q", "-", "--fail-on", level])
            .write_stdin(text)
            .assert()
            .code(code)
            .stdout(contains("-: "));
    }
    carrywise()
        .args(["audit", "-"])
        .write_stdin(twice)
        .assert()
        .code(0);
}

fn format_fixture(name: &str) -> String {
    fixture(&format!("formats/{name}"))
}

#[test]
fn packed_files_are_read_as_they_are() {
    for name in ["packed.blif.gz", "packed.blif.zst"] {
        carrywise()
            .args(["audit", &format_fixture(name)])
            .assert()
            .code(0)
            .stdout(contains("9 inputs, 5 outputs, 12 gates"))
            .stderr(contains(format!("{name}:5")));
        let bytes = fs::read(format_fixture(name)).expect("the fixture is there");
        carrywise()
            .args(["audit", "-", "--quiet"])
            .write_stdin(bytes.clone())
            .assert()
            .code(0)
            .stdout(contains("9 inputs, 5 outputs, 12 gates"));
        carrywise()
            .args(["audit", "-"])
            .write_stdin(&bytes[..bytes.len() / 2])
            .assert()
            .code(2)
            .stderr(contains("the end of the file inside it").and(contains("help")));
    }
}

#[test]
fn further_files_are_read_from_below_the_folder_only() {
    carrywise()
        .args(["audit", &format_fixture("search/top.blif")])
        .assert()
        .code(0)
        .stdout(contains("2 inputs, 2 outputs, 2 gates"))
        .stderr(is_empty());
    let outside = format_fixture("search/outside.blif");
    carrywise()
        .args(["audit", &outside])
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(
            contains("outside.blif:4:9")
                .and(contains("a file outside the folders that may be read"))
                .and(contains("--search-dir")),
        );
    carrywise()
        .args([
            "audit",
            &outside,
            "--quiet",
            "--search-dir",
            &fixture("formats"),
        ])
        .assert()
        .code(0);
    carrywise()
        .args(["audit", &outside, "--search-dir", "no_such_folder"])
        .assert()
        .code(2)
        .stderr(contains("--search-dir no_such_folder"));
}

#[test]
fn a_circle_of_files_is_refused_where_it_closes() {
    carrywise()
        .current_dir(fixture("formats/search"))
        .args(["audit", "circle.blif"])
        .assert()
        .code(2)
        .stderr(
            contains("cells/further.blif:1:9")
                .and(contains(".search around.blif"))
                .and(contains(
                    "cells/around.blif -> cells/further.blif -> cells/around.blif",
                )),
        );
}

/// A netlist on standard input lies in no folder.
#[test]
fn standard_input_has_files_from_named_folders_only() {
    let text = ".search half.blif\n.model m\n.inputs a b\n.outputs s c\n\
                .subckt half x=a y=b s=s c=c\n.end\n";
    carrywise()
        .args(["audit", "-"])
        .write_stdin(text)
        .assert()
        .code(2)
        .stderr(contains("standard input"));
    carrywise()
        .args([
            "audit",
            "-",
            "--search-dir",
            &fixture("formats/search/cells"),
        ])
        .write_stdin(text)
        .assert()
        .code(0)
        .stdout(contains("2 inputs, 2 outputs, 2 gates"));
}

/// Links are followed before a place is judged, and a fault in a further file is
/// shown with its own text.
#[cfg(unix)]
#[test]
fn links_do_not_lead_out_of_the_folder() {
    use std::os::unix::fs::symlink;
    let top = ".search inner.blif\n.model m\n.inputs a\n.outputs y\n.subckt inner a=a y=y\n.end\n";
    let inner = ".model inner\n.inputs a\n.outputs y\n.names a y\n1 1\n.end\n";
    let (folder, other) = (folder(), folder());
    let at = |name: &str| folder.path().join(name);
    fs::write(at("top.blif"), top).expect("written");
    let audit = || {
        let mut command = carrywise();
        command.current_dir(&folder).args(["audit", "top.blif"]);
        command
    };
    audit().assert().code(2).stderr(contains("no such file"));
    fs::write(other.path().join("inner.blif"), inner).expect("written");
    symlink(other.path().join("inner.blif"), at("inner.blif")).expect("linked");
    let outside = contains("a file outside the folders that may be read");
    audit().assert().code(2).stderr(outside);
    let allowed = other.path().to_str().expect("text");
    audit().args(["--search-dir", allowed]).assert().code(0);
    fs::remove_file(at("inner.blif")).expect("removed");
    fs::create_dir(at("inner.blif")).expect("made");
    audit()
        .assert()
        .code(2)
        .stderr(contains("no ordinary file"));
    fs::remove_dir(at("inner.blif")).expect("removed");
    fs::write(at("inner.blif"), inner.replace("1 1", "11 1")).expect("written");
    let shown = contains("inner.blif:5:1").and(contains("11 1"));
    audit().assert().code(2).stderr(shown);
    fs::write(at("inner.blif"), inner).expect("written");
    audit().assert().code(0).stderr(is_empty());
}

#[test]
fn the_readme_shows_what_its_first_command_prints() {
    let readme = include_str!("../README.md");
    let (_, after) = readme.split_once("```text\n").expect("an output block");
    let (shown, _) = after.split_once("```").expect("its end");
    let output = carrywise()
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .args(["audit", "fixtures/tide_logger.blif"])
        .output()
        .expect("it runs");
    assert_eq!(String::from_utf8_lossy(&output.stdout), shown);
}

#[test]
fn cells_give_functions_to_instances() {
    let text =
        ".model m\n.inputs a b c\n.outputs s co\n.gate sum_cell A=a B=b CI=c S=s CO=co\n.end\n";
    let library = fixture("cells/harbour.lib");
    carrywise()
        .args(["audit", "-", "-q"])
        .write_stdin(text)
        .assert()
        .code(0)
        .stdout(contains("Unknown, because"));
    carrywise()
        .args(["audit", "-", "-q", "--cells", &library])
        .write_stdin(text)
        .assert()
        .code(0)
        .stdout(contains("2 gates, no registers; 1 gate delay").and(contains("Unknown").not()));
    carrywise()
        .args(["audit", "-", "-q", "--cells", &library])
        .write_stdin(text.replace("CI=c", "CX=c"))
        .assert()
        .code(2)
        .stdout(is_empty())
        .stderr(contains("-:4").and(contains("a pin of the cell sum_cell, found `CX`")));
    carrywise()
        .args(["audit", "-", "--cells", &fixture("README.md")])
        .write_stdin(text)
        .assert()
        .code(2)
        .stderr(contains("expected cells with functions"));
}

#[test]
fn what_is_odd_in_a_library_is_told() {
    let run = |extra: &[&str]| {
        carrywise()
            .args(["audit", &fixture("tide_delta.blif"), "--cells"])
            .arg(fixture("cells/harbour.lib"))
            .args(extra)
            .assert()
            .code(0)
    };
    let odd = contains("the function of the cell `TBUF` is not given").and(contains("`RAM16`"));
    run(&[]).stderr(odd);
    run(&["--quiet"]).stderr(is_empty());
    // Forty cells without a function: twenty are told, and the rest counted.
    let folder = folder();
    let path = folder.path().join("odd.lib");
    let mut text = String::from("library (odd) {\n");
    for i in 0..40 {
        text += &format!("cell (C{i}) {{ pin (A) {{ direction : inout; }} }}\n");
    }
    text += "cell (B) { pin (A) { direction : input; } pin (Z) { direction : output; \
             function : \"A\"; } }\n}\n";
    fs::write(&path, text).expect("written");
    carrywise()
        .args(["audit", &fixture("tide_delta.blif"), "--cells"])
        .arg(&path)
        .assert()
        .code(0)
        .stderr(
            contains("`C19`")
                .and(contains("20 more warnings"))
                .and(contains("`C20`").not()),
        );
}

#[test]
fn carry_cells_need_a_library_and_are_told() {
    let folder = folder();
    let (netlist, assume) = (
        folder.path().join("adder.blif"),
        folder.path().join("carry.yaml"),
    );
    let mut blif = String::from(".model adder\n.inputs c0");
    for bus in ["a", "b"] {
        blif.extend((0..8).map(|i| format!(" {bus}[{i}]")));
    }
    blif.push_str("\n.outputs c8");
    blif.extend((0..8).map(|i| format!(" s[{i}]")));
    blif.push('\n');
    for i in 0..8 {
        blif += &format!(
            ".gate sum_cell A=a[{i}] B=b[{i}] CI=c{i} S=s[{i}] CO=c{}\n",
            i + 1
        );
    }
    fs::write(&netlist, blif + ".end\n").expect("written");
    fs::write(
        &assume,
        "carry_cells:\n- cell: sum_cell\n  delays:\n  - {from: \"*\", to: \"*\", delay: 3}\n  \
         - {from: CI, to: CO, delay: 1}\n  why: data sheet\n",
    )
    .expect("written");
    let run = |extra: &[&str]| {
        carrywise()
            .arg("audit")
            .arg(&netlist)
            .arg("--assume")
            .arg(&assume)
            .args(extra)
            .assert()
    };
    run(&[]).code(2).stderr(contains("name one with --cells"));
    run(&["--quiet", "--cells", &fixture("cells/harbour.lib")])
        .code(0)
        .stdout(
            contains("carry-cell").and(contains("12").and(contains("sum_cell is a carry cell"))),
        );
}
