//! Input patterns: seeded random words mixed with directed ones.
//!
//! Uniform random words never reach the upper carries of a counter, which
//! toggle only when every lower bit is 1. So every other word is biased: its
//! bits are 1 with probability `1 - 2^-b` (or `2^-b`), `b` running from 1 to
//! 7 so that runs of up to a few hundred equal bits occur. Patterns are a
//! function of seed, word and input, so that a second pass sees the same ones
//! without anything being stored.

/// A reproducible sequence of 64-pattern words, one per input and word.
#[derive(Clone, Copy, Debug)]
pub struct Patterns {
    seed: u64,
    words: usize,
}

impl Patterns {
    /// `words` words of 64 patterns each.
    pub fn new(seed: u64, words: usize) -> Self {
        Self { seed, words }
    }

    /// Number of words.
    pub fn words(&self) -> usize {
        self.words
    }

    /// The values of all inputs in word `word`, input by input.
    pub fn word(&self, word: usize) -> impl FnMut() -> u64 + use<> {
        let mut random = fastrand::Rng::with_seed(
            self.seed ^ (word as u64 + 1).wrapping_mul(0x9E37_79B9_7F4A_7C15),
        );
        // Word 0 fixes every signal's normal polarity and stays uniform.
        let (bias, high) = match word % 4 {
            2 => (1 + word / 4 % 7, true),
            3 => (1 + word / 4 % 7, false),
            _ => (0, false),
        };
        move || {
            let mut value = random.u64(..);
            for _ in 0..bias {
                value &= random.u64(..);
            }
            if high { !value } else { value }
        }
    }
}
