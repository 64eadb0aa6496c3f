//! Bus names: `a[3]`, `a<3>`, `a(3)`, `a_3`, `a_3_`, `a3`, `a_reg[3]`, and the
//! same with a second index. The base is what stays when the last index is
//! taken off.

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
