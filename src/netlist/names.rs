//! Interned byte strings. Names are bytes, not text: real netlists hold names
//! that are not UTF-8, and they must come out as they went in.

use hashbrown::HashTable;
use rustc_hash::FxHasher;
use std::borrow::Cow;
use std::hash::Hasher;
use std::num::NonZeroU32;

/// One interned name. Equal ids mean equal bytes. An optional name takes four
/// bytes, too.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct NameId(NonZeroU32);

impl NameId {
    fn new(index: u32) -> Self {
        Self(NonZeroU32::MIN.saturating_add(index))
    }

    pub(crate) fn index(self) -> u32 {
        self.0.get() - 1
    }
}

/// The table of interned names: one byte arena and a hash index over it.
#[derive(Clone, Default)]
pub struct Names {
    bytes: Vec<u8>,
    ends: Vec<u64>,
    index: HashTable<u32>,
}

fn hash(name: &[u8]) -> u64 {
    let mut hasher = FxHasher::default();
    hasher.write(name);
    hasher.finish()
}

impl Names {
    /// An empty table.
    pub fn new() -> Self {
        Self::default()
    }

    fn slice(&self, id: u32) -> &[u8] {
        let id = id as usize;
        let start = if id == 0 { 0 } else { self.ends[id - 1] };
        &self.bytes[start as usize..self.ends[id] as usize]
    }

    /// The id of `name`, new or known. Panics past 2^32 - 1 distinct names.
    pub fn intern(&mut self, name: &[u8]) -> NameId {
        let hashed = hash(name);
        if let Some(&id) = self.index.find(hashed, |&id| self.slice(id) == name) {
            return NameId::new(id);
        }
        let id = u32::try_from(self.ends.len()).expect("fewer than 2^32 names");
        self.bytes.extend_from_slice(name);
        self.ends.push(self.bytes.len() as u64);
        let (bytes, ends) = (&self.bytes, &self.ends);
        self.index.insert_unique(hashed, id, |&id| {
            let id = id as usize;
            let start = if id == 0 { 0 } else { ends[id - 1] };
            hash(&bytes[start as usize..ends[id] as usize])
        });
        NameId::new(id)
    }

    /// The id of `name` when it has been interned. A finished netlist keeps no
    /// index: there, nothing is found.
    pub(crate) fn find(&self, name: &[u8]) -> Option<NameId> {
        self.index
            .find(hash(name), |&id| self.slice(id) == name)
            .map(|&id| NameId::new(id))
    }

    /// Whether any name begins with `prefix`.
    pub fn any_begins_with(&self, prefix: &[u8]) -> bool {
        (0..self.ends.len() as u32).any(|id| self.slice(id).starts_with(prefix))
    }

    /// The bytes of a name.
    pub fn bytes(&self, id: NameId) -> &[u8] {
        self.slice(id.index())
    }

    /// The name as text; bytes that are not UTF-8 become U+FFFD.
    pub fn text(&self, id: NameId) -> Cow<'_, str> {
        String::from_utf8_lossy(self.bytes(id))
    }

    /// Number of distinct names.
    pub fn len(&self) -> usize {
        self.ends.len()
    }

    /// Whether no name has been interned.
    pub fn is_empty(&self) -> bool {
        self.ends.is_empty()
    }

    /// Drops the hash index, which only interning needs.
    pub(crate) fn seal(&mut self) {
        self.index = HashTable::new();
        self.bytes.shrink_to_fit();
        self.ends.shrink_to_fit();
    }
}
