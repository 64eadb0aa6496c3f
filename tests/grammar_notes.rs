//! The clauses of `grammar-notes/` against the tests and fixtures they name.
//!
//! A clause holds because a test holds it, so every row has to name one that
//! exists; this file reads the notes and the tests as text. The questions that the
//! published BLIF text leaves open are those of a list made from circulating copies
//! of it before this project began (eleven points).

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// Names of all test functions, from the text of the tests.
fn tests() -> BTreeSet<String> {
    let mut names = BTreeSet::new();
    for entry in fs::read_dir(root().join("tests")).expect("tests are there") {
        let path = entry.expect("an entry").path();
        if path.extension().is_none_or(|extension| extension != "rs") {
            continue;
        }
        let text = fs::read_to_string(&path).expect("text");
        let mut is_test = false;
        for line in text.lines().map(str::trim) {
            if line == "#[test]" {
                is_test = true;
            } else if let Some(rest) = line.strip_prefix("fn ").filter(|_| is_test) {
                names.insert(rest.split('(').next().unwrap_or_default().to_owned());
                is_test = false;
            }
        }
    }
    names
}

fn in_backticks(cell: &str) -> impl Iterator<Item = &str> {
    cell.split('`').skip(1).step_by(2)
}

/// The rows of a note: the clause, its fixture when the note has a column for one,
/// and its tests.
fn clauses(text: &str) -> Vec<(String, Option<String>, String)> {
    let mut rows = Vec::new();
    for line in text.lines() {
        // A bar inside a cell is written `\|`.
        let line = line.replace("\\|", "\u{1}");
        let cells: Vec<&str> = line.trim_matches('|').split('|').map(str::trim).collect();
        let clause = cells[0];
        let numbered = clause.len() > 1
            && clause.starts_with(|c: char| c.is_ascii_uppercase())
            && clause[1..].bytes().all(|b| b.is_ascii_digit());
        if !numbered {
            continue;
        }
        let (fixture, test) = match cells.as_slice() {
            [_, _, test] => (None, *test),
            [_, _, fixture, test] => (Some((*fixture).to_owned()), *test),
            other => panic!("{} cells in {clause}", other.len()),
        };
        rows.push((clause.to_owned(), fixture, test.to_owned()));
    }
    rows
}

fn notes() -> BTreeMap<String, String> {
    let folder = fs::read_dir(root().join("grammar-notes")).expect("notes are there");
    let mut notes = BTreeMap::new();
    for entry in folder {
        let path = entry.expect("an entry").path();
        let name = path
            .file_name()
            .expect("a name")
            .to_string_lossy()
            .into_owned();
        notes.insert(name, fs::read_to_string(&path).expect("text"));
    }
    notes
}

#[test]
fn every_clause_names_a_test_that_exists() {
    let tests = tests();
    let exists = |name: &str| match name.strip_suffix('…') {
        Some(start) => tests.iter().any(|test| test.starts_with(start)),
        None => tests.contains(name),
    };
    let mut counted = 0;
    for (note, text) in notes() {
        // Words in asterisks stand for tests that the head of the note names.
        let head = text.split("\n| clause").next().expect("a head");
        let mut seen = BTreeSet::new();
        let mut before_named = false;
        for (clause, _, cell) in clauses(&text) {
            assert!(
                seen.insert(clause.clone()),
                "{note}: {clause} is there twice"
            );
            let named: Vec<&str> = in_backticks(&cell)
                .filter(|name| !name.contains('/') && !name.starts_with("--"))
                .collect();
            for name in &named {
                assert!(exists(name), "{note}: {clause} names the test {name}");
            }
            let by_word = ["*malformed*", "*faults*"].iter().any(|word| {
                let bare = word.trim_matches('*');
                cell.contains(word)
                    && (head.contains(&format!("called {word}"))
                        || head.contains(&format!("*{bare}* below")))
                    && in_backticks(head).any(|name| tests.contains(name))
            });
            let as_before =
                (cell.starts_with("same") || cell.starts_with("the same")) && before_named;
            let ok = !named.is_empty() || by_word || as_before;
            assert!(ok, "{note}: {clause} names no test: {cell}");
            before_named = ok;
            counted += 1;
        }
    }
    // BLIF, AIGER, cells and assumptions have well over a hundred clauses.
    assert!(counted > 100, "{counted}");
}

#[test]
fn every_fixture_that_a_clause_names_exists() {
    let folders = ["fixtures/formats", "fixtures/cells", "fixtures"];
    let exists = |name: &str| {
        folders.iter().any(|folder| {
            let path = root().join(folder).join(name);
            path.exists()
                || ["aag", "aig", "blif"]
                    .iter()
                    .any(|e| path.with_extension(e).exists())
        })
    };
    let mut counted = 0;
    for (note, text) in notes() {
        for (clause, fixture, _) in clauses(&text) {
            for name in fixture.iter().flat_map(|cell| in_backticks(cell)) {
                // `NAND9` and the like are cells of the fixture before.
                let is_cell = name
                    .bytes()
                    .all(|b| b.is_ascii_uppercase() || b.is_ascii_digit());
                assert!(
                    is_cell || exists(name),
                    "{note}: {clause} names the fixture {name}"
                );
                counted += 1;
            }
        }
    }
    assert!(counted > 50, "{counted}");
}

#[test]
fn every_silence_of_the_published_text_is_decided_by_a_clause() {
    let text = fs::read_to_string(Path::new(&root()).join("grammar-notes/blif.md")).expect("text");
    let known: BTreeSet<String> = clauses(&text)
        .into_iter()
        .map(|(clause, ..)| clause)
        .collect();
    let table = text
        .split("## Where the published text is silent")
        .nth(1)
        .and_then(|rest| rest.split("\n## ").next())
        .expect("the table is there");
    let mut questions = String::new();
    for row in table.lines().filter(|line| line.starts_with("| ")).skip(1) {
        let cells: Vec<&str> = row.trim_matches('|').split('|').map(str::trim).collect();
        questions.push_str(cells[0]);
        questions.push('\n');
        for clause in cells[1].split(", ") {
            assert!(
                known.contains(clause),
                "{} is decided by {clause}",
                cells[0]
            );
        }
    }
    for point in [
        "off-set rows",
        "mixed or repeated rows",
        "other output columns",
        "inputs without rows",
        "backslash",
        "`#` in a name",
        "CR LF",
        "tabs",
        "unbound formals",
        "bound twice",
        "two drivers",
        "both port lists",
        "twice in one",
        "without driver",
        "recursion",
        "after `.end`",
        "`.search`",
        "`.input`",
        "begin with a digit",
        "dot-words",
    ] {
        assert!(questions.contains(point), "no clause decides: {point}");
    }
}
