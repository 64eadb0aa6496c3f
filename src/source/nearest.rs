//! The word that was probably meant, for the hints of messages.

/// Levenshtein's distance, 1965: insertions, deletions and substitutions.
pub fn distance(left: &str, right: &str) -> usize {
    let right: Vec<char> = right.chars().collect();
    let mut row: Vec<usize> = (0..=right.len()).collect();
    for (i, l) in left.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, &r) in right.iter().enumerate() {
            let cost = diagonal + usize::from(l != r);
            diagonal = row[j + 1];
            row[j + 1] = cost.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row[right.len()]
}

/// The nearest of `words` to `word`, when it is near enough to be meant: at most
/// half of its letters differ, and one always may. Of equals the first.
pub fn nearest<'w>(word: &str, words: &[&'w str]) -> Option<&'w str> {
    // The words are short; a long one is near none of them.
    if word.len() > 64 {
        return None;
    }
    words
        .iter()
        .map(|&each| (distance(word, each), each))
        .min_by_key(|&(distance, _)| distance)
        .filter(|&(distance, each)| distance <= (each.len() / 2).max(1))
        .map(|(_, each)| each)
}
