//! Delay against largest fan-in, scheme by scheme, without a netlist.
//!
//! Every scheme and variation is built gate by gate for one addition, under a
//! price for each function and one limit on gate inputs after another, and
//! measured: nothing here is a formula. Few wide gates against many narrow ones
//! has a sweet spot, and where it lies depends on what fan-in costs; it is the
//! least delay, then the fewest gate equivalents, then the smallest fan-in.
//!
//! For scale there is the carry-out as one sum of products, two gates whatever
//! the width: its terms double with every position (each carry term of the
//! position below extends one by `a` and one by `b`, and `a·b` is new).

use crate::network::schemes::{self, Fitted, Growth, Scheme, Settings, every_variation};
use crate::network::{
    Addends, Costs, CountingSink, Limits, Price, Profile, Propagate, XorForm, build,
};
use rustc_hash::FxHashSet;
use std::rc::Rc;

/// The limits on gate inputs that are tried, as far as they are asked for and
/// some scheme can make use of them.
const STEPS: [usize; 8] = [2, 3, 4, 5, 6, 8, 16, 32];

/// The widest addition that is tried in every variation.
const MOST_VARIED: usize = 64;

/// The widest addition for which schemes are fitted to arrivals.
const MOST_FITTED: usize = 64;

/// What is asked.
pub struct Question {
    /// When each bit of the first operand is ready, in ticks, least significant
    /// first; as many as positions, at least one.
    pub a: Vec<i32>,
    /// The same of the second operand.
    pub b: Vec<i32>,
    /// When the carry-in is ready, where there is one.
    pub carry_in: Option<i32>,
    /// Most inputs of a gate that are tried; `None` for as many as help.
    pub gate_inputs: Option<usize>,
    /// Whether a gate may have any function.
    pub covers: bool,
    /// What gates cost.
    pub price: Price,
}

/// One scheme in one variation under one limit, built and measured.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Point {
    /// The scheme.
    pub scheme: &'static str,
    /// Members of a group or block.
    pub group: Option<usize>,
    /// What else sets the variation apart.
    pub variant: Option<String>,
    /// Most spans one combine node joins.
    pub valency: usize,
    /// Whether some sum ends in a select.
    pub select_end: bool,
    /// The limit on gate inputs.
    pub gate_inputs: usize,
    /// When the last result is ready.
    pub delay: i32,
    /// When the last sum is ready.
    pub sum: i32,
    /// When the carry-out is ready.
    pub carry_out: i32,
    /// Gates.
    pub gates: usize,
    /// Gates, one of k inputs counted k - 1.
    pub gate_equivalents: usize,
    /// Inputs of the largest gate.
    pub largest_fan_in: usize,
    /// Most readers of one net.
    pub largest_fan_out: usize,
    /// Wiring tracks, of prefix networks.
    pub wire_tracks: Option<usize>,
}

impl Point {
    /// The order of "best".
    fn rank(&self) -> (i32, usize, usize) {
        (self.delay, self.gate_equivalents, self.largest_fan_in)
    }
}

/// The answer.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Tradeoff {
    /// The limits tried, ascending.
    pub limits: Vec<usize>,
    /// By scheme, in the order they are listed, the best point under each limit;
    /// `None` where the scheme is not tried at that width.
    pub schemes: Vec<(&'static str, Vec<Option<Point>>)>,
    /// The sweet spot.
    pub sweet_spot: Option<Point>,
    /// How many points were measured.
    pub measured: usize,
    /// What was left out, as a clause.
    pub left_out: Option<String>,
}

/// Measures every scheme.
///
/// Panics when the operands differ in length or are empty.
pub fn tradeoff(question: &Question) -> Tradeoff {
    let positions = question.a.len();
    assert!(positions > 0 && positions == question.b.len());
    let limits = steps(question);
    let mut answer = Tradeoff {
        limits: limits.clone(),
        schemes: Vec::new(),
        sweet_spot: None,
        measured: 0,
        left_out: schemes::left_out(positions),
    };
    for scheme in schemes::all() {
        let mut row: Vec<Option<Point>> = Vec::with_capacity(limits.len());
        // Variations whose gates the limit did not bind: wider ones change nothing.
        let mut settled: FxHashSet<Settings> = FxHashSet::default();
        for &limit in &limits {
            let mut best = row.last().cloned().flatten();
            let offered = is_offered(question, scheme, limit);
            let list = offered.then(|| variations(scheme, positions, limit));
            for settings in list.into_iter().flatten() {
                if settled.contains(&settings) {
                    continue;
                }
                let point = measure(question, scheme, settings, limit);
                answer.measured += 1;
                if point.largest_fan_in < limit && !question.covers {
                    settled.insert(settings);
                }
                if best.as_ref().is_none_or(|best| point.rank() < best.rank()) {
                    best = Some(point);
                }
            }
            row.push(best);
        }
        answer.schemes.push((scheme.name, row));
    }
    let points = answer.schemes.iter().flat_map(|(_, row)| row).flatten();
    answer.sweet_spot = points.min_by_key(|point| point.rank()).cloned();
    answer
}

/// The limits tried: those up to what is asked for, and the widest gate any
/// scheme makes, flat lookahead's or a group's.
fn steps(question: &Question) -> Vec<usize> {
    let carry_in = usize::from(question.carry_in.is_some());
    let widest = (question.a.len() + carry_in).clamp(2, 65);
    let most_cover = if question.covers { 6 } else { usize::MAX };
    let asked = question.gate_inputs.unwrap_or(usize::MAX).max(2);
    let most = widest.min(most_cover).min(asked);
    let mut steps: Vec<usize> = STEPS.into_iter().filter(|&step| step < most).collect();
    steps.push(most);
    steps
}

/// Whether a scheme is tried: those that fit themselves to arrivals take long at
/// every limit anew, so they are tried up to [`MOST_FITTED`] positions.
fn is_offered(question: &Question, scheme: &Scheme, limit: usize) -> bool {
    let limits = Limits {
        gate_inputs: limit,
        covers: question.covers,
    };
    let fits_itself = matches!(scheme.growth, Growth::Quadratic | Growth::Quartic);
    let small = !fits_itself || question.a.len() <= MOST_FITTED;
    small && schemes::fits(scheme, &profile(question, limits))
}

fn variations(scheme: &Scheme, positions: usize, limit: usize) -> Vec<Settings> {
    if positions <= MOST_VARIED {
        every_variation(scheme, positions, limit)
    } else {
        schemes::variations(scheme, positions, limit)
    }
}

/// Builds one point, with the better of both propagates.
fn measure(question: &Question, scheme: &Scheme, settings: Settings, limit: usize) -> Point {
    let limits = Limits {
        gate_inputs: limit,
        covers: question.covers,
    };
    let fitted = Fitted::new(scheme, &profile(question, limits), settings);
    let either = point(question, &fitted, limits, Propagate::Or);
    let other = point(question, &fitted, limits, Propagate::Xor);
    if other.rank() < either.rank() {
        other
    } else {
        either
    }
}

fn profile(question: &Question, limits: Limits) -> Profile {
    let costs = Costs::of(limits, false, |function| (question.price)(function));
    let pairs = question.a.iter().zip(&question.b);
    let latest: Vec<i32> = pairs.map(|(&a, &b)| a.max(b)).collect();
    let after = |cost: i32| latest.iter().map(|&at| at + cost).collect::<Vec<i32>>();
    Profile {
        generate: after(costs.and(2)),
        propagate: after(costs.or(2)),
        half_sum: after(costs.xor),
        carry_in: question.carry_in,
        required: None,
        costs,
    }
}

fn point(question: &Question, fitted: &Fitted, limits: Limits, rule: Propagate) -> Point {
    let mut sink = CountingSink::priced(XorForm::Gate, Rc::clone(&question.price));
    let addends = Addends {
        a: question.a.iter().map(|&at| sink.input(at)).collect(),
        b: question.b.iter().map(|&at| sink.input(at)).collect(),
        carry_in: question.carry_in.map(|at| sink.input(at)),
    };
    let built = build(&fitted.network, &addends, limits, rule, &mut sink);
    let carry_out = &built.carries[built.carries.len() - 1..];
    let results = [&built.sums[..], carry_out].concat();
    let prefix = fitted.network.is_prefix();
    Point {
        scheme: fitted.scheme,
        group: fitted.group,
        variant: fitted.variant(),
        valency: fitted.valency,
        select_end: fitted.select_end,
        gate_inputs: limits.gate_inputs,
        delay: sink.depth(&results),
        sum: sink.depth(&built.sums),
        carry_out: sink.depth(carry_out),
        gates: sink.gates(&results),
        gate_equivalents: sink.gate_equivalents(&results),
        largest_fan_in: sink.largest_fan_in(&results),
        largest_fan_out: sink.largest_fan_out(&results),
        wire_tracks: prefix.then(|| fitted.network.wire_tracks()),
    }
}

/// The terms of the carry-out of so many positions as one sum of products, all of
/// its prime implicants: three for one position with carry-in, one without, and
/// twice as many and one more with every position. `None` past 128 bits.
pub fn terms_of_two_gates(positions: usize, has_carry_in: bool) -> Option<u128> {
    (0..positions).try_fold(u128::from(has_carry_in), |terms, _| {
        terms.checked_mul(2)?.checked_add(1)
    })
}
