//! Patterns over names: `*` stands for any run of characters, `?` for one.
//!
//! Brackets are plain characters, since buses are written with them: `a[*]` is
//! every bit of `a`. A backslash takes the next character as it is. Matching
//! goes back to the last `*` only, the published way that is never exponential,
//! and is linear for a pattern with one `*`.

/// A pattern over names.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Pattern {
    text: String,
    pieces: Vec<Piece>,
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Piece {
    Run,
    One,
    Exactly(char),
}

impl Pattern {
    /// The pattern written as `text`.
    pub fn new(text: &str) -> Self {
        let mut pieces = Vec::new();
        let mut letters = text.chars();
        while let Some(letter) = letters.next() {
            let piece = match letter {
                '*' => Piece::Run,
                '?' => Piece::One,
                '\\' => Piece::Exactly(letters.next().unwrap_or('\\')),
                other => Piece::Exactly(other),
            };
            // Two runs in a row are one.
            if piece != Piece::Run || pieces.last() != Some(&Piece::Run) {
                pieces.push(piece);
            }
        }
        Self {
            text: text.to_owned(),
            pieces,
        }
    }

    /// As it was written.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Whether it matches every name.
    pub fn is_everything(&self) -> bool {
        self.pieces == [Piece::Run]
    }

    /// Whether the whole of `name` matches.
    pub fn matches(&self, name: &str) -> bool {
        let mut rest = name.chars();
        let mut at = 0;
        // Where to go on when the pieces after the last run do not fit.
        let mut back: Option<(usize, std::str::Chars<'_>)> = None;
        loop {
            match self.pieces.get(at) {
                Some(Piece::Run) => {
                    at += 1;
                    back = Some((at, rest.clone()));
                    continue;
                }
                Some(&piece) => {
                    let mut next = rest.clone();
                    let fits = match (next.next(), piece) {
                        (Some(_), Piece::One) => true,
                        (Some(letter), Piece::Exactly(wanted)) => letter == wanted,
                        _ => false,
                    };
                    if fits {
                        rest = next;
                        at += 1;
                        continue;
                    }
                }
                None if rest.as_str().is_empty() => return true,
                // A run at the end takes what is left.
                None if self.pieces.last() == Some(&Piece::Run) => return true,
                None => {}
            }
            let Some((piece, from)) = &mut back else {
                return false;
            };
            if from.next().is_none() {
                return false;
            }
            at = *piece;
            rest = from.clone();
        }
    }
}
