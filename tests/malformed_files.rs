//! Refused files as a user meets them: for each the exit status and the first lines
//! on standard error, in one list to read.
//!
//! Outside source: the rules that `support/malformed.rs` names; the design's table
//! of exit statuses, by which an input that cannot be used is 2.

#[path = "support/malformed.rs"]
mod malformed;

use assert_cmd::Command;
use std::fs;

/// Runs the command on each case; status, place and message, one line a case.
fn listed(name: &str, cases: &[&[u8]]) -> String {
    let folder = tempfile::tempdir().expect("a folder");
    fs::write(folder.path().join("unused"), "").expect("written");
    let mut list = String::new();
    for case in cases {
        fs::write(folder.path().join(name), case).expect("written");
        let run = Command::cargo_bin("carrywise")
            .expect("the binary is built")
            .current_dir(&folder)
            .env_remove("NO_COLOR")
            .args(["audit", name])
            .output()
            .expect("it runs");
        assert!(run.stdout.is_empty());
        let told = String::from_utf8(run.stderr).expect("text");
        assert!(!told.contains("panicked"), "{told}");
        let mut lines = told.lines();
        let message = lines.next().unwrap_or_default();
        let place = lines.next().unwrap_or_default().trim_start();
        let place = place.trim_start_matches("--> ").trim_start_matches("::: ");
        let status = run.status.code().map_or(-1, |code| code);
        list.push_str(&format!("{status}  {place}  {message}\n"));
        assert_eq!(status, 2, "{told}");
    }
    list
}

#[test]
fn malformed_blif_ends_with_status_2_and_a_place() {
    let cases = [malformed::BLIF, malformed::BLIF_WHOLE].concat();
    assert!(cases.len() >= 130);
    insta::assert_snapshot!(listed("bad.blif", &cases));
}

#[test]
fn malformed_aiger_ends_with_status_2_and_a_place() {
    insta::assert_snapshot!(listed("bad.aag", malformed::AIGER_TEXT));
    insta::assert_snapshot!(listed("bad.aig", malformed::AIGER_BINARY));
}
