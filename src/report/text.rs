//! Names made safe to show, before any renderer lays them out.
//!
//! A netlist is somebody else's file, and its names are data: a control
//! character could repaint a terminal, a look-alike letter or a text-direction
//! mark could make one net pass for another. So everything outside printable
//! ASCII is written out as `\u{…}`, save the few signs our own sentences use,
//! which no one can mistake. Each renderer then escapes what its own form gives
//! a meaning to.

/// Signs of our own wording beyond ASCII.
const OWN_SIGNS: &[char] = &['→', '–', '×', '⊕', '…'];

/// The text with every character that could mislead the eye written out.
pub fn visible(text: &str) -> String {
    let mut shown = String::with_capacity(text.len());
    for c in text.chars() {
        if matches!(c, ' '..='~') || OWN_SIGNS.contains(&c) {
            shown.push(c);
        } else {
            shown.extend(c.escape_unicode());
        }
    }
    shown
}

/// [`visible`], and cut in the middle when longer than `most` characters: the
/// two ends of a long name tell it from its neighbours.
pub fn clipped(text: &str, most: usize) -> String {
    // A name can be megabytes long; look only at what can be shown.
    let shown = match (text.char_indices().nth(most), text.len()) {
        (Some((head, _)), _) => {
            let tail = text.char_indices().rev().nth(most).map_or(0, |(i, _)| i);
            if tail > head {
                format!("{}…{}", visible(&text[..head]), visible(&text[tail..]))
            } else {
                visible(text)
            }
        }
        (None, _) => visible(text),
    };
    let length = shown.chars().count();
    if length <= most {
        return shown;
    }
    let front = most.saturating_sub(1).div_ceil(2);
    let back = most.saturating_sub(1) / 2;
    let head: String = shown.chars().take(front).collect();
    let tail: String = shown.chars().skip(length - back).collect();
    format!("{head}…{tail}")
}
