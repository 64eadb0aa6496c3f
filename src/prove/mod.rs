//! Proof by SAT: equalities over the subject graph, with an effort limit and,
//! when refuted, a counterexample.
//!
//! A [`Prover`] trusts nobody's bookkeeping: it encodes the subject graph
//! itself. Cones are encoded on demand; nodes not yet encoded are free
//! variables, so a proof under them is a proof, and a refutation is one only
//! after the cone has grown down to the free nets.

mod prover;

pub use prover::{Answer, Counterexample, Effort, Fact, Prover};
