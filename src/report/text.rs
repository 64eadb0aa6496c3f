//! Names made safe to show, before any renderer lays them out.
//!
//! A netlist is somebody else's file, and its names are data: a control
//! character could repaint a terminal, a look-alike letter or a text-direction
//! mark could make one net pass for another. So everything outside printable
//! ASCII is written out as `\u{…}`, save the few signs our own sentences use,
//! which no one can mistake. Each renderer then escapes what its own form gives
//! a meaning to.

/// Signs of our own wording beyond ASCII.
const OWN_SIGNS: &[char] = &['→', '–', '×', '⊕', '…', 'τ'];

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
/// two ends of a long name tell it from its neighbours. No escape is cut.
pub fn clipped(text: &str, most: usize) -> String {
    // A name can be megabytes long; only what can be shown is looked at.
    if text.chars().nth(most).is_none() {
        let whole = visible(text);
        if whole.chars().count() <= most {
            return whole;
        }
    }
    let room = most.saturating_sub(1);
    let head = kept(text.chars(), room.div_ceil(2));
    let mut tail = kept(text.chars().rev(), room / 2);
    tail.reverse();
    format!("{}…{}", head.concat(), tail.concat())
}

/// The visible forms of as many leading characters as fit into `room`.
fn kept(characters: impl Iterator<Item = char>, mut room: usize) -> Vec<String> {
    let mut forms = Vec::new();
    for c in characters {
        let form = visible(c.encode_utf8(&mut [0; 4]));
        let Some(rest) = room.checked_sub(form.chars().count()) else {
            break;
        };
        room = rest;
        forms.push(form);
    }
    forms
}
