//! What a proven chain computes: kind, polarity, carry form, operand order.
//!
//! A theorem and its dual (operands, carries and carry-in inverted; sums too)
//! say the same thing. The one is told that reads inputs and register outputs
//! in positive form; then the one whose sums leave in positive form; then an
//! adder before a subtractor, except that a constant carry-in of 1 with an
//! operand free to be read inverted is a subtraction.

use super::label::Labels;
use super::model::Kind;
use super::verify::Theorem;
use crate::subject::{Literal, NodeId, NodeKind, Subject};

/// The dual of a theorem.
fn dual(theorem: &Theorem) -> Theorem {
    let mut dual = theorem.clone();
    dual.carry_in = !dual.carry_in;
    for bits in &mut dual.bits {
        (bits.sum, bits.a, bits.b) = (!bits.sum, !bits.a, !bits.b);
    }
    for literals in dual.sums.iter_mut().chain(&mut dual.carries) {
        for literal in literals {
            *literal = !*literal;
        }
    }
    dual
}

/// Whether a literal's polarity means something: its node is an input, a
/// register's output, or another free net.
fn is_fixed(subject: &Subject, literal: Literal) -> bool {
    matches!(subject.kind(literal.node()), NodeKind::Free(_))
}

struct Score {
    kind: Kind,
    against: usize,
}

/// How often a reading as `kind` would show a fixed operand inverted.
fn score(subject: &Subject, theorem: &Theorem, subtract: bool) -> usize {
    let mut against = 0;
    for bits in &theorem.bits {
        let fixed = [bits.a, bits.b].map(|l| is_fixed(subject, l).then(|| l.is_inverted()));
        let constant = [bits.a, bits.b].map(|l| l.node() == NodeId::FALSE);
        let inverted = fixed.iter().filter(|f| **f == Some(true)).count();
        let plain = fixed.iter().filter(|f| **f == Some(false)).count();
        against += if !subtract {
            inverted
        } else if constant[0] || constant[1] {
            // Alone, an operand may be the minuend or the inverted subtrahend.
            0
        } else {
            inverted.saturating_sub(1) + plain.saturating_sub(1)
        };
    }
    against
}

fn kind_of(subject: &Subject, theorem: &Theorem) -> Score {
    let constants = theorem
        .bits
        .iter()
        .all(|bits| bits.b.node() == NodeId::FALSE);
    let adder = score(subject, theorem, false);
    if constants {
        let ones = theorem
            .bits
            .iter()
            .filter(|bits| bits.b == Literal::TRUE)
            .count();
        let kind = match ones {
            0 => Kind::Incrementer,
            n if n == theorem.bits.len() => Kind::Decrementer,
            _ => Kind::Adder,
        };
        return Score {
            kind,
            against: adder,
        };
    }
    let subtractor = score(subject, theorem, true);
    let two = |bits: &&super::candidate::Bits| bits.b.node() != NodeId::FALSE;
    let free_operand = theorem
        .bits
        .iter()
        .filter(two)
        .all(|bits| !is_fixed(subject, bits.a) || !is_fixed(subject, bits.b));
    let subtracts = theorem.carry_in == Literal::TRUE && free_operand;
    if subtractor < adder || (subtractor == adder && subtracts) {
        Score {
            kind: Kind::Subtractor,
            against: subtractor,
        }
    } else {
        Score {
            kind: Kind::Adder,
            against: adder,
        }
    }
}

/// Chooses the reading; of a subtractor every `b` becomes the inverted
/// subtrahend.
pub(super) fn read(subject: &Subject, labels: &Labels<'_>, theorem: Theorem) -> (Kind, Theorem) {
    let sums_inverted = |theorem: &Theorem| {
        let shown = theorem.bits.iter().filter_map(|bits| {
            labels
                .port(bits.sum.node())
                .map(|port| port != bits.sum.is_inverted())
        });
        shown.filter(|&inverted| inverted).count()
    };
    let other = dual(&theorem);
    let rank = |theorem: &Theorem| {
        let score = kind_of(subject, theorem);
        // A counter down from nothing: prefer the plain words for it.
        let carry_in = match (score.kind, theorem.carry_in) {
            (Kind::Subtractor | Kind::Incrementer, Literal::FALSE) => 2,
            (Kind::Adder | Kind::Decrementer, Literal::TRUE) => 1,
            _ => 0,
        };
        (score.against, sums_inverted(theorem), carry_in, score.kind)
    };
    let (rank_own, rank_other) = (rank(&theorem), rank(&other));
    let (rank, mut theorem) = if rank_other < rank_own {
        (rank_other, other)
    } else {
        (rank_own, theorem)
    };
    let kind = rank.3;
    if kind == Kind::Subtractor {
        for bits in &mut theorem.bits {
            let plain_first = |l: Literal| {
                (
                    !is_fixed(subject, l) || !l.is_inverted(),
                    is_fixed(subject, l) && !l.is_inverted(),
                )
            };
            let swap = bits.b.node() != NodeId::FALSE && plain_first(bits.b) > plain_first(bits.a)
                || (is_fixed(subject, bits.a) && bits.a.is_inverted());
            if swap {
                std::mem::swap(&mut bits.a, &mut bits.b);
            }
        }
    }
    (kind, theorem)
}

/// Puts each position's operands in the order of their buses; where no bus
/// name decides, the lower net number comes first.
pub(super) fn order_operands(labels: &Labels<'_>, theorem: &mut Theorem) {
    let net = |literal: Literal| labels.net(literal.node()).map(|(net, _)| net);
    let mut below: Option<(Literal, Literal)> = None;
    for bits in &mut theorem.bits {
        let follow = |lower: Literal, upper: Literal| {
            if lower.node() == NodeId::FALSE || upper.node() == NodeId::FALSE {
                0
            } else {
                labels.follows(lower.node(), upper.node())
            }
        };
        let (kept, swapped) = below.map_or((0, 0), |(a, b)| {
            (
                follow(a, bits.a) + follow(b, bits.b),
                follow(a, bits.b) + follow(b, bits.a),
            )
        });
        let single = bits.b.node() == NodeId::FALSE;
        let swap = match kept.cmp(&swapped) {
            std::cmp::Ordering::Less => true,
            std::cmp::Ordering::Greater => false,
            std::cmp::Ordering::Equal => !single && net(bits.b) < net(bits.a),
        };
        if swap {
            std::mem::swap(&mut bits.a, &mut bits.b);
        }
        // A zero-extended operand keeps the place of its last real bit.
        let keep = |new: Literal, old: Option<Literal>| match old {
            Some(old) if new.node() == NodeId::FALSE => old,
            _ => new,
        };
        below = Some((
            keep(bits.a, below.map(|b| b.0)),
            keep(bits.b, below.map(|b| b.1)),
        ));
    }
    let lowest = theorem
        .bits
        .iter()
        .find(|b| b.a.node() != NodeId::FALSE && b.b.node() != NodeId::FALSE);
    if lowest.is_some_and(|bits| net(bits.b) < net(bits.a)) {
        for bits in &mut theorem.bits {
            std::mem::swap(&mut bits.a, &mut bits.b);
        }
    }
}

/// Positions whose second operand must be combined with one signal before that
/// signal counts as the mode of an adder-subtractor.
const MODE_POSITIONS: usize = 2;

/// An adder-subtractor's operands: `b` stands before its exclusive or with the
/// mode.
pub(super) struct Moded {
    pub(super) mode: Literal,
    pub(super) carry_in: Literal,
    /// `a` and the bare `b` of each position.
    pub(super) addends: Vec<(Literal, Literal)>,
}

/// The mode of a chain whose second operand is `b ⊕ mode` at every position. A
/// position without `b` reads the mode itself.
pub(super) fn mode_of(subject: &Subject, labels: &Labels<'_>, theorem: &Theorem) -> Option<Moded> {
    let parts = |literal: Literal| match subject.kind(literal.node()) {
        NodeKind::Xor(x, y) => Some([x, y]),
        _ => None,
    };
    let mut counts: Vec<(NodeId, usize)> = Vec::new();
    for bits in &theorem.bits {
        for node in [bits.a, bits.b].into_iter().filter_map(parts).flatten() {
            match counts.iter().position(|&(known, _)| known == node) {
                Some(at) => counts[at].1 += 1,
                None if counts.len() < MOST_MODES => counts.push((node, 1)),
                None => {}
            }
        }
    }
    let (mode, count) = counts.into_iter().max_by_key(|&(_, count)| count)?;
    if count < MODE_POSITIONS || labels.net(mode).is_none() {
        return None;
    }
    let bare = |literal: Literal| {
        if literal.node() == mode {
            return Some(Literal::constant(literal.is_inverted()));
        }
        let [x, y] = parts(literal)?;
        let other = match mode {
            _ if x == mode => y,
            _ if y == mode => x,
            _ => return None,
        };
        labels.net(other)?;
        Some(other.literal().xor(literal.is_inverted()))
    };
    // At the low end the mode, which is the carry-in too, may have been taken for
    // the operand and the operand for the carry-in: the three are alike there.
    let mut bits = theorem.bits.clone();
    let mut carry_in = theorem.carry_in;
    let is_combined = |l: Literal| parts(l).is_some_and(|parts| parts.contains(&mode));
    if is_combined(carry_in) {
        let first = &mut bits[0];
        for operand in [&mut first.a, &mut first.b] {
            if operand.node() == mode && is_combined(carry_in) {
                std::mem::swap(operand, &mut carry_in);
            }
        }
    }
    let operands = bits
        .iter()
        .map(|bits| match (bare(bits.a), bare(bits.b)) {
            (_, Some(b)) => Some((bits.a, b)),
            (Some(a), None) => Some((bits.b, a)),
            (None, None) => None,
        })
        .collect::<Option<Vec<_>>>()?;
    // The polarity in which the mode is read: that in which most `b` are plain.
    let inverted = operands
        .iter()
        .filter(|(_, b)| b.node() != NodeId::FALSE && is_fixed(subject, *b) && b.is_inverted());
    let flip = 2 * inverted.count() > operands.len();
    let addends = operands.into_iter().map(|(a, b)| (a, b.xor(flip)));
    Some(Moded {
        mode: mode.literal().xor(flip),
        carry_in,
        addends: addends.collect(),
    })
}

/// Signals counted as possible modes of one chain.
const MOST_MODES: usize = 64;
