//! A small seeded stream of words (the SplitMix64 step published by Steele, Lea
//! and Flood, OOPSLA 2014), so that generated files never change between runs,
//! machines or releases of a library.

/// The stream; equal seeds give equal words.
#[derive(Clone, Debug)]
pub struct Random(u64);

impl Random {
    /// A stream from a seed.
    pub fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// The next 64 bits.
    pub fn word(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// A number below `limit`, which is not zero.
    pub fn below(&mut self, limit: usize) -> usize {
        (self.word() % limit as u64) as usize
    }

    /// Permutes a slice.
    pub fn shuffle<T>(&mut self, items: &mut [T]) {
        for i in (1..items.len()).rev() {
            items.swap(i, self.below(i + 1));
        }
    }
}
