//! Proof by SAT: equalities over the subject graph, with an effort limit and,
//! when refuted, a counterexample. Decision diagrams are a second witness.
//!
//! A [`Prover`] trusts nobody's bookkeeping: it encodes the subject graph
//! itself. Cones are encoded on demand; nodes not yet encoded are free
//! variables, so a proof under them is a proof, and a refutation is one only
//! after the cone has grown down to the free nets.

mod diagram;
mod primes;
mod prover;
mod timed;

pub use diagram::{Claim, Witness, witness};
pub use prover::{Answer, Counterexample, Effort, Fact, Prover};
pub use timed::{Settles, Timed};
