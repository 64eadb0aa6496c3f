//! carrywise reads a gate-level netlist (BLIF, AIGER), finds the carry chains in
//! it, proves what it found, and estimates what a lookahead rebuild would gain.
//!
//! One direction of flow; a room uses only rooms below it:
//!
//! ```text
//! cli                      files, terminal, environment, exit status
//! report                   renders the record, computes nothing
//! audit                    the record and the findings
//! plan                     proposals: schemes fitted to a chain and dry-run
//! chain                    recognition, proof, built-as, names
//! network                  carry networks: structure, schemes, builder to gates
//! prove                    SAT: equalities with effort and counterexamples
//! subject                  AND/XOR subject graph, cuts, linear signatures
//! timing                   delay models, arrival, longest paths
//! format/{blif,aiger}      text and bytes to netlist
//! netlist                  the model, its builder, health, histograms
//! source                   bytes, positions, diagnostics
//! ```
//!
//! `format`, `subject`, `timing` and `network` stand side by side on `netlist`
//! and do not know each other; `prove` stands on `subject`; `chain` joins
//! `subject` and `prove`; `plan` joins `chain`, `network` and `timing`.

pub mod audit;
pub mod chain;
pub mod cli;
pub mod format;
pub mod netlist;
pub mod network;
pub mod plan;
pub mod prove;
pub mod report;
pub mod source;
pub mod subject;
pub mod timing;
