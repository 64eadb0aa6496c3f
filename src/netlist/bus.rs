//! Bus names: `a[3]`, `a<3>`, `a(3)`, `a_3`, `a_3_`, `a3`, `a_reg[3]`, and the
//! same with a second index (common practice, no source). The base is what stays
//! when the last index is taken off. Where the index that counts is not the last
//! (`a[3]_q`, `row[3][0]` down a column, `u_bit3/s`), two names tell which it is:
//! it is the one number they differ in.

/// A name split into the base of its bus and the bit's index.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct BusBit<'a> {
    /// Everything before the index, the opening bracket or `_` left out.
    pub base: &'a str,
    /// Everything after the index, the closing bracket left out.
    pub tail: &'a str,
    /// The bit's index.
    pub index: u32,
}

/// Reads a bus bit out of a net name; `None` when the name ends in no index.
pub fn bus_bit(name: &str) -> Option<BusBit<'_>> {
    let (body, tail) = match name.as_bytes().last()? {
        b']' | b'>' | b')' => (&name[..name.len() - 1], ""),
        b'_' => (&name[..name.len() - 1], "_"),
        _ => (name, ""),
    };
    let digits = body.bytes().rev().take_while(u8::is_ascii_digit).count();
    let (base, number) = body.split_at(body.len() - digits);
    let index = number.parse().ok()?;
    let open = base.as_bytes().last().copied()?;
    let closed = name.as_bytes()[name.len() - 1];
    let stem = &base[..base.len() - 1];
    match (open, closed) {
        (b'[', b']') | (b'<', b'>') | (b'(', b')') => Some(BusBit {
            base: stem,
            tail: "",
            index,
        }),
        (_, b']' | b'>' | b')') => None,
        (b'_', b'_') => Some(BusBit {
            base: stem,
            tail,
            index,
        }),
        (b'_', _) => Some(BusBit {
            base: stem,
            tail: "",
            index,
        }),
        (_, b'_') => None,
        _ => Some(BusBit {
            base,
            tail: "",
            index,
        }),
    }
    .filter(|bit| !bit.base.is_empty())
}

/// A name whose bit is counted by a number that may stand anywhere in it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Counted<'a> {
    /// Everything before the number and its opening bracket or `_`.
    pub base: &'a str,
    /// Everything after the number and its closing bracket.
    pub tail: &'a str,
    /// The number.
    pub index: u32,
    /// Where the number begins, in bytes.
    at: usize,
}

/// The number in which two names differ, if they differ in one number only; as
/// read out of the first name.
pub fn difference<'a>(name: &'a str, other: &str) -> Option<Counted<'a>> {
    let same = name.bytes().zip(other.bytes()).take_while(|(x, y)| x == y);
    // Back to the first digit of the number.
    let mut at = same.count().min(name.len());
    while at > 0 && name.as_bytes()[at - 1].is_ascii_digit() {
        at -= 1;
    }
    let own = counted_at(name, at)?;
    let theirs = counted_at(other, at)?;
    (own.base == theirs.base && own.tail == theirs.tail && own.index != theirs.index).then_some(own)
}

impl Counted<'_> {
    /// The index in another name of the same bus.
    pub fn index_of(&self, name: &str) -> Option<u32> {
        let other = counted_at(name, self.at)?;
        (other.base == self.base && other.tail == self.tail).then_some(other.index)
    }
}

fn counted_at(name: &str, at: usize) -> Option<Counted<'_>> {
    let rest = name.get(at..)?;
    let digits = rest.bytes().take_while(u8::is_ascii_digit).count();
    let index = rest[..digits].parse().ok()?;
    let (base, tail) = (&name[..at], &rest[digits..]);
    let pair = (base.as_bytes().last(), tail.as_bytes().first());
    let is_pair = matches!(
        pair,
        (Some(b'['), Some(b']')) | (Some(b'<'), Some(b'>')) | (Some(b'('), Some(b')'))
    );
    let (base, tail) = match pair {
        _ if is_pair => (&base[..base.len() - 1], &tail[1..]),
        (Some(b'_'), Some(b'_')) => (&base[..base.len() - 1], &tail[1..]),
        (Some(b'_'), _) => (&base[..base.len() - 1], tail),
        _ => (base, tail),
    };
    (!base.is_empty() && !base.ends_with('/')).then_some(Counted {
        base,
        tail,
        index,
        at,
    })
}
