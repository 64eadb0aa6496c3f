//! Folding: join neighbours first, solve the shorter row, widen it again.
//!
//! Brent–Kung folds to the end; Ladner–Fischer and Han–Carlson fold a few times
//! around a scheme of few levels. Each fold spends a level and saves cells.
//! Invariant: no combine node has more than `valency` parts, unless the inner
//! scheme makes one.

use super::{CarryNetwork, NodeId, join};

/// The prefixes of `items`, lowest first, by at most `folds` folds around
/// `inner`.
pub(super) fn folded(
    network: &mut CarryNetwork,
    items: &[NodeId],
    valency: usize,
    folds: usize,
    inner: impl FnOnce(&mut CarryNetwork, &[NodeId], usize) -> Vec<NodeId>,
) -> Vec<NodeId> {
    let mut row = items.to_vec();
    let mut wider_rows = Vec::new();
    while row.len() > 1 && wider_rows.len() < folds {
        network.begin_row();
        let joined = row.chunks(valency);
        let shorter = joined.map(|chunk| join(network, chunk.iter().copied()));
        let shorter = shorter.collect();
        wider_rows.push(std::mem::replace(&mut row, shorter));
    }
    let mut prefixes = inner(network, &row, valency);
    while let Some(row) = wider_rows.pop() {
        network.begin_row();
        prefixes = widened(network, &row, valency, &prefixes);
    }
    prefixes
}

/// The prefixes of a row from those of its chunks.
fn widened(
    network: &mut CarryNetwork,
    row: &[NodeId],
    valency: usize,
    chunk_prefixes: &[NodeId],
) -> Vec<NodeId> {
    let mut prefixes = Vec::with_capacity(row.len());
    for (i, chunk) in row.chunks(valency).enumerate() {
        let below = i.checked_sub(1).map(|i| chunk_prefixes[i]);
        for end in 1..chunk.len() {
            let spans = below.into_iter().chain(chunk[..end].iter().copied());
            prefixes.push(join(network, spans));
        }
        prefixes.push(chunk_prefixes[i]);
    }
    prefixes
}
