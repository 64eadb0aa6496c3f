//! Paths with a set in front as a recipe: the ways to make each in time.

use super::times::PathTimes;
use crate::network::carry_network::CarryNetwork;
use crate::network::demand::{Asked, Recipe, Way};
use crate::network::fulfil::{Emit, LeafSignal};
use crate::network::signals::SignalId;
use crate::network::sum_end::Carries;

/// `T(x, a, b)` of [`PathTimes`].
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(crate) struct Path {
    pub(crate) x: u32,
    pub(crate) a: u32,
    pub(crate) b: u32,
}

/// See the head of the module.
pub(crate) struct Paths<'a> {
    pub(crate) times: &'a PathTimes,
}

/// The family of paths without a set.
const PURE: u8 = 0;

impl Recipe for Paths<'_> {
    type Term = Path;

    fn rank(&self, path: Path) -> u32 {
        (path.b - path.a) * self.times.inputs() as u32 + (path.a - path.x) / 2
    }

    fn is_given(&self, path: Path) -> bool {
        path.x == path.b
    }

    fn earliest(&self, path: Path) -> i32 {
        self.times
            .earliest(path.x as usize, path.a as usize, path.b as usize)
    }

    fn ways(&self, path: Path, by: i32, found: &mut Vec<Way<Path>>) {
        let Path { x, a, b } = path;
        let (wide_x, wide_a, wide_b) = (x as usize, a as usize, b as usize);
        let mut offer = |left, right, cost| {
            let parts = [Some((left, cost)), Some((right, cost)), None];
            found.push(Way { parts, gates: 1 });
        };
        for c in a..b {
            if self.times.split(wide_x, wide_a, wide_b, c as usize) > by {
                continue;
            }
            let left = Path { b: c, ..path };
            if (c - a).is_multiple_of(2) {
                let right = Path {
                    x: a + 1,
                    a: c + 1,
                    b,
                };
                offer(left, right, self.times.cost(wide_a));
            } else {
                let right = Path { a: c + 1, ..path };
                offer(left, right, self.times.cost(wide_a + 1));
            }
        }
        for y in (x..a).step_by(2) {
            if self.times.divide(wide_x, wide_a, wide_b, y as usize) <= by {
                let right = Path { x: y + 2, ..path };
                offer(Path { x, a: y, b: y }, right, self.times.cost(wide_a));
            }
        }
    }

    fn estimate(&self, path: Path, asked: &Asked) -> f32 {
        let Path { x, a, b } = path;
        if a == b {
            asked.gates(sets_of(x), a / 2, x / 2)
        } else if x == a {
            asked.gates(PURE, b, a)
        } else {
            let set = asked.gates(sets_of(x), a / 2, x / 2);
            1.0 + set + asked.gates(PURE, b, a + 1)
        }
    }

    fn remember(&self, path: Path, asked: &mut Asked) {
        let Path { x, a, b } = path;
        if a == b {
            asked.remember(sets_of(x), a / 2, x / 2);
        } else if x == a {
            asked.remember(PURE, b, a);
        }
    }
}

/// The family of sets at even places, or at odd ones.
fn sets_of(place: u32) -> u8 {
    1 + (place % 2) as u8
}

impl Carries for Paths<'_> {
    fn items(&self) -> usize {
        self.times.inputs().div_ceil(2)
    }

    fn carry(&self, high: usize, low: usize) -> Path {
        let top = self.items() - 1;
        let a = 2 * (top - high) as u32;
        let b = 2 * (top - low) as u32;
        Path { x: a, a, b }
    }

    fn carry_if_one(&self, high: usize, low: usize) -> Path {
        let carry = self.carry(high, low);
        Path {
            b: carry.b + 1,
            ..carry
        }
    }
}

impl Emit for Paths<'_> {
    fn leaf(&self, path: Path) -> LeafSignal {
        let item = self.items() - 1 - path.b as usize / 2;
        if path.b.is_multiple_of(2) {
            LeafSignal::Generate(item)
        } else {
            LeafSignal::Propagate(item)
        }
    }

    fn emit(
        &self,
        path: Path,
        parts: &[(Path, &[SignalId])],
        network: &mut CarryNetwork,
    ) -> Vec<SignalId> {
        let signals = parts.iter().flat_map(|&(_, signals)| signals);
        let signals: Vec<SignalId> = signals.copied().collect();
        // The place whose operator joins the parts, as in the splits.
        let odd = (parts[0].0.b + path.a) % 2;
        if (path.a + odd).is_multiple_of(2) {
            vec![network.or(&signals)]
        } else {
            vec![network.and(&signals)]
        }
    }
}
