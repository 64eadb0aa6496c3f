//! Truth tables of up to six inputs in one word: bit `m` is the value where
//! input `i` is bit `i` of `m`; and a sum of products for one.

/// One product: per input the literal, or nothing.
pub type Cube = Vec<Option<bool>>;

/// The words of the six inputs themselves.
pub const INPUTS: [u64; 6] = [
    0xAAAA_AAAA_AAAA_AAAA,
    0xCCCC_CCCC_CCCC_CCCC,
    0xF0F0_F0F0_F0F0_F0F0,
    0xFF00_FF00_FF00_FF00,
    0xFFFF_0000_FFFF_0000,
    0xFFFF_FFFF_0000_0000,
];

/// The table repeated so that it fills the word.
pub fn filled(ones: u64, inputs: usize) -> u64 {
    let mut word = ones & ones_below(1 << inputs);
    for i in inputs..6 {
        word |= word << (1 << i);
    }
    word
}

fn ones_below(bits: u32) -> u64 {
    if bits >= 64 { !0 } else { (1 << bits) - 1 }
}

/// The halves of a table where input `i` is 0 and where it is 1, each made
/// independent of the input.
pub fn halves(table: u64, i: usize) -> (u64, u64) {
    let (low, high) = (table & !INPUTS[i], table & INPUTS[i]);
    (low | low << (1 << i), high | high >> (1 << i))
}

/// An irredundant sum of products by the recursion of Minato and Morreale
/// (Minato, "Fast generation of irredundant sum-of-products forms", 1992); the
/// recursion is at most six deep.
pub fn cubes(ones: u64, inputs: usize) -> Vec<Cube> {
    let table = filled(ones, inputs);
    let mut found = Vec::new();
    let mut path = vec![None; inputs];
    let covered = cover(table, table, inputs, &mut path, &mut found);
    assert_eq!(covered, table, "a cover equals its table");
    found
}

/// Covers at least `must` and at most `may`; returns what the cubes cover.
fn cover(must: u64, may: u64, inputs: usize, path: &mut Cube, found: &mut Vec<Cube>) -> u64 {
    if must == 0 {
        return 0;
    }
    let Some(i) = (0..inputs)
        .rev()
        .find(|&i| halves(must, i).0 != halves(must, i).1 || halves(may, i).0 != halves(may, i).1)
    else {
        found.push(path.clone());
        return !0;
    };
    let ((must0, must1), (may0, may1)) = (halves(must, i), halves(may, i));
    path[i] = Some(false);
    let only0 = cover(must0 & !may1, may0, i, path, found);
    path[i] = Some(true);
    let only1 = cover(must1 & !may0, may1, i, path, found);
    path[i] = None;
    let rest = must0 & !only0 | must1 & !only1;
    let both = cover(rest, may0 & may1, i, path, found);
    only0 & !INPUTS[i] | only1 & INPUTS[i] | both
}
