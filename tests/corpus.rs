//! A part of the recognition corpus, held to thresholds a little below what is
//! measured; `cargo bench --bench recognition` runs the whole of it. The truth
//! of every case is checked by integer arithmetic here and in the generators'
//! own tests, and every chain told by integer addition.

mod generators;
#[path = "support/judged.rs"]
mod judged;
#[path = "support/measured.rs"]
mod measured;
#[path = "support/mutants.rs"]
mod mutants;
#[path = "support/recognition.rs"]
mod recognition;

use generators::corpus::{cases, negative_cases};
use judged::Family;
use measured::Figures;
use mutants::Mutants;

const SEED: u64 = 20;

#[test]
fn finds_what_the_corpus_holds_and_nothing_false() {
    let mut figures = Figures::default();
    for case in cases(SEED, 9, 32) {
        if let Err(fault) = case.reference.check(2) {
            panic!("the corpus itself is wrong: {fault}");
        }
        figures.take(&case);
    }
    let report = figures.report();
    println!("{report}");
    assert!(figures.cases >= 200, "{report}");
    assert!(figures.false_chains.is_empty(), "{report}");
    let words = |group| figures.recall_of(Family::Sums, group).ratio();
    assert!(words("gate level") >= 0.96, "{report}");
    assert!(words("AND/inverters") >= 0.96, "{report}");
    assert!(words("mapped") >= 0.88, "{report}");
    assert!(figures.kind.ratio() >= 0.98, "{report}");
}

#[test]
fn tells_nothing_of_circuits_without_chains() {
    let mut figures = Figures::default();
    for case in negative_cases(SEED) {
        figures.take(&case);
    }
    let report = figures.report();
    assert!(figures.false_chains.is_empty(), "{report}");
    assert!(figures.on_negatives.is_empty(), "{report}");
}

#[test]
fn tells_no_changed_chain_as_it_was() {
    let mut mutants = Mutants::default();
    let mut figures = Figures::default();
    for (at, case) in cases(SEED, 29, 12).enumerate() {
        let (netlist, found, _) = figures.take(&case);
        mutants.take(&case, &netlist, &found, 2, at as u64);
    }
    println!("{mutants:?}");
    assert!(mutants.different >= 50, "{mutants:?}");
    assert!(mutants.kept.is_empty(), "{mutants:?}");
    assert!(mutants.false_chains.is_empty(), "{mutants:?}");
}
