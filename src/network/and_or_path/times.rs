//! The earliest times of alternating and-or paths with a symmetric set in front.
//!
//! A carry is the path `g + p·(g + p·(… g))`. Number its inputs `t0 t1 t2 …`, the
//! generates even and the propagates odd; the operator at an even place is OR, at
//! an odd one AND. `T(x, a, b)` joins the set `{x, x+2 … a-2}` by the operator of
//! `a` to the path `a … b`. With `∘` that operator and `∙` the other one:
//!
//! - `T(x, a, b) = T(x, a, c) ∘ T(a+1, c+1, b)` where `c - a` is even,
//! - `T(x, a, b) = T(x, a, c) ∙ T(x, c+1, b)` where `c - a` is odd,
//! - `T(x, a, b) = T(x, y, y) ∘ T(y+2, a, b)`, the set divided.
//!
//! The first two are the split of M. I. Grinchuk, "Sharpening an Upper Bound on the
//! Adder and Comparator Depths", Journal of Applied and Industrial Mathematics 3,
//! 2009 (attribution from memory), used with arrival times by U. Brenner and
//! A. Hermann, "Faster Carry Bit Computation for Adder Circuits with Prescribed
//! Arrival Times", ACM Transactions on Algorithms 15, 2019. Every prefix carry is
//! among these; the joined sets are what goes beyond.
//!
//! Exact within these splits, for two-input gates. Invariant: leaving inputs out
//! makes nothing later, so a time that meets the shorter path and the smaller set
//! is the best there is, which ends most searches at once.

/// See the head of the module.
pub struct PathTimes {
    inputs: usize,
    and: i32,
    or: i32,
    offsets: Vec<usize>,
    earliest: Vec<i32>,
}

impl PathTimes {
    /// Computes all `T` of a path whose inputs are ready at `inputs`, the most
    /// significant generate first, when an AND takes `and` ticks and an OR `or`.
    pub fn of(inputs: &[i32], and: i32, or: i32) -> Self {
        let m = inputs.len();
        let mut offsets = Vec::with_capacity(m);
        let mut cells = 0;
        for a in 0..m {
            offsets.push(cells);
            cells += (a / 2 + 1) * (m - a);
        }
        let mut times = Self {
            inputs: m,
            and,
            or,
            offsets,
            earliest: vec![0; cells],
        };
        for (a, &ready) in inputs.iter().enumerate() {
            let at = times.cell(a, a, a);
            times.earliest[at] = ready;
        }
        for length in 0..m {
            for a in 0..m - length {
                let b = a + length;
                let mut x = a;
                // The first split found for a smaller set is tried first.
                let mut hint = a;
                loop {
                    if length > 0 || x < a {
                        let time = times.best(x, a, b, &mut hint);
                        let at = times.cell(x, a, b);
                        times.earliest[at] = time;
                    }
                    if x < 2 {
                        break;
                    }
                    x -= 2;
                }
            }
        }
        times
    }

    /// Number of inputs.
    pub fn inputs(&self) -> usize {
        self.inputs
    }

    /// The earliest `T(x, a, b)`.
    pub fn earliest(&self, x: usize, a: usize, b: usize) -> i32 {
        self.earliest[self.cell(x, a, b)]
    }

    /// What the operator at a place costs.
    pub(crate) fn cost(&self, place: usize) -> i32 {
        if place.is_multiple_of(2) {
            self.or
        } else {
            self.and
        }
    }

    fn cell(&self, x: usize, a: usize, b: usize) -> usize {
        self.offsets[a] + (a - x) / 2 * (self.inputs - a) + (b - a)
    }

    /// When `T` is ready if split after `c`.
    pub(crate) fn split(&self, x: usize, a: usize, b: usize, c: usize) -> i32 {
        let left = self.earliest(x, a, c);
        if (c - a).is_multiple_of(2) {
            left.max(self.earliest(a + 1, c + 1, b)) + self.cost(a)
        } else {
            left.max(self.earliest(x, c + 1, b)) + self.cost(a + 1)
        }
    }

    /// When `T` is ready if its set is divided after `y`.
    pub(crate) fn divide(&self, x: usize, a: usize, b: usize, y: usize) -> i32 {
        self.earliest(x, y, y).max(self.earliest(y + 2, a, b)) + self.cost(a)
    }

    fn best(&self, x: usize, a: usize, b: usize, hint: &mut usize) -> i32 {
        let mut bound = i32::MIN;
        if b > a {
            bound = bound.max(self.earliest(x, a, b - 1));
        }
        if x < a {
            bound = bound.max(self.earliest(x + 2, a, b));
        }
        let mut best = i32::MAX;
        if *hint < b {
            best = self.split(x, a, b, *hint);
            if best <= bound {
                return best;
            }
        }
        for c in (a..b).rev() {
            let time = self.split(x, a, b, c);
            if time < best {
                best = time;
                *hint = c;
                if best <= bound {
                    return best;
                }
            }
        }
        for y in (x..a).step_by(2) {
            best = best.min(self.divide(x, a, b, y));
            if best <= bound {
                return best;
            }
        }
        best
    }
}
