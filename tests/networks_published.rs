//! Carry networks against published figures: sizes, levels, fan-out and tracks,
//! delays against the textbooks.
//!
//! Sources. Exact cells and levels of prefix networks: the closed forms that
//! follow from the constructions cited in each scheme's file, tabulated from
//! independently built and span-checked networks. Gate delays of lookahead:
//! V. C. Hamacher, Z. G. Vranesic and S. G. Zaky, "Computer Organization", the
//! gate-delay convention (unlimited fan-in, XOR one delay); quoted from memory
//! where marked.

#[path = "support/adders.rs"]
mod adders;

use adders::{Adder, PAIRS, network, scheme};
use carrywise::network::schemes::{FanOuts, Settings};
use carrywise::network::{
    Addends, CarryNetwork, CountingSink, GateSink, Limits, Propagate, XorForm, build,
};

/// (scheme, cells at N = 8, 16, 32, 64, 128, levels as a function of L = log2 N).
type Published = (&'static str, [usize; 5], fn(usize) -> usize);

/// Prefix cells without a carry-in column, buffers not counted. Closed forms:
/// serial N-1; Brent-Kung 2N-2-L; Sklansky and Han-Carlson (N/2)L; Kogge-Stone
/// NL-N+1; Ladner-Fischer with one extra level (N/4)L+3N/4-1.
const PUBLISHED: [Published; 6] = [
    ("ripple", [7, 15, 31, 63, 127], |l| (1 << l) - 1),
    ("brent-kung", [11, 26, 57, 120, 247], |l| 2 * l - 2),
    ("sklansky", [12, 32, 80, 192, 448], |l| l),
    ("kogge-stone", [17, 49, 129, 321, 769], |l| l),
    ("han-carlson", [12, 32, 80, 192, 448], |l| l + 1),
    ("ladner-fischer", [11, 27, 63, 143, 319], |l| l + 1),
];

#[test]
fn prefix_networks_have_the_published_cells_and_levels() {
    for (name, cells, levels) in PUBLISHED {
        for (i, cells) in cells.into_iter().enumerate() {
            let l = i + 3;
            let network = network(name, 1 << l, false);
            assert_eq!(network.cells(), cells, "cells of {name} at N = 2^{l}");
            assert_eq!(network.levels(), levels(l), "levels of {name} at N = 2^{l}");
        }
    }
}

/// M. Snir, "Depth-Size Trade-Offs for Parallel Prefix Computation", Journal of
/// Algorithms 7, 1986: size + depth >= 2N - 2, for every N. Serial meets it.
#[test]
fn no_prefix_network_beats_snirs_bound() {
    for (name, _, _) in PUBLISHED {
        for n in 2..=130 {
            for extra_levels in 0..4 {
                let settings = Settings {
                    extra_levels,
                    ..Settings::default()
                };
                let network = scheme(name).network(n, false, settings);
                let (size, depth) = (network.cells(), network.levels());
                assert!(size + depth >= 2 * n - 2, "{name} at {n}: {size} + {depth}");
                if name == "ripple" {
                    assert_eq!(size + depth, 2 * n - 2);
                }
            }
        }
    }
}

/// The ends of the family in D. Harris, "A Taxonomy of Parallel Prefix
/// Networks", Asilomar 2003: L + l levels, l = 0 Sklansky, l = L - 1 Brent-Kung.
#[test]
fn ladner_fischer_runs_from_sklansky_to_brent_kung() {
    let (n, l) = (64, 6);
    let with = |extra_levels| {
        let settings = Settings {
            extra_levels,
            ..Settings::default()
        };
        scheme("ladner-fischer").network(n, false, settings)
    };
    for extra_levels in 0..l - 1 {
        assert_eq!(with(extra_levels).levels(), l + extra_levels);
    }
    assert_eq!(with(0), network("sklansky", n, false));
    assert_eq!(with(l - 1), network("brent-kung", n, false));
}

/// Harris 2003: Sklansky's fan-out is N/2 + 1 (f = L - 1).
#[test]
fn sklansky_has_the_published_fan_out() {
    for n in [8, 16, 32, 64, 128] {
        assert_eq!(network("sklansky", n, false).largest_fan_out(), n / 2 + 1);
    }
}

/// Joining r spans at once takes ⌈log_r n⌉ levels (common practice, no source).
#[test]
fn higher_valency_takes_fewer_levels() {
    for name in ["sklansky", "kogge-stone"] {
        for valency in 2..=6 {
            let settings = Settings {
                valency,
                ..Settings::default()
            };
            for n in 1..=100usize {
                let network = scheme(name).network(n, false, settings);
                let least = (0..).find(|&l| valency.pow(l) >= n).unwrap_or(0);
                assert_eq!(network.levels(), least as usize, "{name} {valency} {n}");
                assert!(network.largest_valency() <= valency);
            }
        }
    }
}

/// The carry-in as one more item: ⌈log2(n+1)⌉ levels, so that it costs one only
/// where n is a power of two (arithmetic).
#[test]
fn a_carry_in_costs_a_level_only_at_powers_of_two() {
    for name in ["sklansky", "kogge-stone"] {
        for n in 2..=130usize {
            let without = network(name, n, false).levels();
            let with = network(name, n, true).levels();
            let extra = usize::from(n.is_power_of_two());
            assert_eq!(with, without + extra, "{name} {n}");
        }
    }
}

/// c_n and s_{n-1} of lookahead in groups of four with carry-in: carry 1 + 2L,
/// sum 4L with L levels. The pair 7 and 12 at 64 bits stands in a public course
/// text; the others are from memory of the same textbook, and recomputed.
#[test]
fn group_lookahead_has_the_textbook_delays() {
    for (n, carry, sum) in [
        (4, 3, 4),
        (16, 5, 8),
        (32, 7, 10),
        (64, 7, 12),
        (256, 9, 16),
    ] {
        let adder = Adder::textbook(&network("group-lookahead", n, true));
        assert_eq!(adder.last_carry_delay(), carry, "carry at {n} bits");
        assert_eq!(adder.sum_delay(), sum, "sum at {n} bits");
        assert!(adder.largest_gate() <= 5, "largest gate at {n} bits");
    }
}

/// The 16-bit carry-lookahead adder of four four-bit groups: all group carries
/// after five gate delays, no gate over five inputs, the sum after eight.
#[test]
fn two_level_lookahead_at_16_bits_is_the_textbook_adder() {
    let adder = Adder::textbook(&network("group-lookahead", 16, true));
    for position in [7, 11, 15] {
        assert_eq!(adder.carry_delay(position), 5, "carry out of {position}");
    }
    // G0 + P0·c0: the AND is ready no later than G0, so one delay less.
    assert_eq!(adder.carry_delay(3), 4);
    assert_eq!(adder.largest_gate(), 5);
    assert_eq!(adder.sum_delay(), 8);
}

/// Without carry-in the first group's carry is its G alone (recomputed).
#[test]
fn without_carry_in_the_first_group_carry_comes_after_three() {
    let adder = Adder::textbook(&network("group-lookahead", 16, false));
    assert_eq!(adder.carry_delay(3), 3);
}

/// Flat lookahead: 1 delay for g and p, 2 for every carry, 1 for the sum; the
/// largest gates take all lower g and p (common practice).
#[test]
fn flat_lookahead_is_three_delays_whatever_the_width() {
    for (has_carry_in, largest) in [(true, 33), (false, 32)] {
        let adder = Adder::textbook(&network("flat-lookahead", 32, has_carry_in));
        assert_eq!(adder.last_carry_delay(), 3);
        assert_eq!(adder.sum_delay(), 4);
        assert_eq!(adder.largest_gate(), largest);
    }
}

/// Flat lookahead with carry-in: n(n+1)/2 AND terms and n ORs for the carries,
/// beside n of each for g and p (Hamacher, from memory; recomputed).
#[test]
fn flat_lookahead_has_the_textbook_gates() {
    for n in [4, 8, 16] {
        let adder = Adder::textbook(&network("flat-lookahead", n, true));
        let carries = n * (n + 1) / 2 + n;
        assert_eq!(adder.sink.gates(&adder.built.carries), 2 * n + carries);
    }
}

/// Two levels a bit after g and p: 2n + 1 with carry-in, 2n - 1 without (the
/// public 128-bit adder netlist is 255 levels deep).
#[test]
fn ripple_takes_two_delays_a_bit() {
    for n in [1, 2, 4, 16, 64, 128] {
        let with = Adder::textbook(&network("ripple", n, true));
        assert_eq!(with.last_carry_delay(), 2 * n as i32 + 1);
        let without = Adder::textbook(&network("ripple", n, false));
        assert_eq!(without.last_carry_delay(), 2 * n as i32 - 1);
    }
}

/// A 128-bit adder without carry-in as an AND/inverter graph, levels to the last
/// sum: 255 is the public netlist's depth; 17 was computed independently for both
/// prefix schemes. With p = a + b Kogge-Stone saves one of them: its lowest
/// spans are short, and an early P waits for nothing.
#[test]
fn and_inverter_depths_at_128_bits() {
    let depth = |name, propagate| {
        let network = network(name, 128, false);
        let adder = Adder::new(&network, PAIRS, propagate, XorForm::Ands);
        adder.sum_delay()
    };
    assert_eq!(depth("ripple", Propagate::Or), 255);
    assert_eq!(depth("sklansky", Propagate::Or), 17);
    assert_eq!(depth("kogge-stone", Propagate::Xor), 17);
    assert_eq!(depth("kogge-stone", Propagate::Or), 16);
}

/// A full adder is seven ANDs, a half adder three: two XORs of three ANDs each,
/// whose halves a·b and (a⊕b)·c the carry reads, and one OR (recomputed
/// independently).
#[test]
fn ripple_as_ands_is_seven_a_bit() {
    for (has_carry_in, gates) in [(true, 7 * 16), (false, 7 * 15 + 3)] {
        let network = network("ripple", 16, has_carry_in);
        let adder = Adder::new(&network, PAIRS, Propagate::Xor, XorForm::Ands);
        assert_eq!(adder.sink.gates(&adder.outputs()), gates);
    }
}

/// M. C. Golumbic, "Combinatorial Merging", 1976: merging the earliest first
/// reaches ⌈log2 Σ 2^t⌉. The carry of a counter is one wide AND.
#[test]
fn wide_gates_are_trees_by_arrival() {
    let mut random = fastrand::Rng::with_seed(76);
    for n in [3usize, 7, 16, 40] {
        for _ in 0..20 {
            let network = network("flat-lookahead", n, true);
            let mut sink = CountingSink::new(XorForm::Ands);
            let times: Vec<u32> = (0..=n).map(|_| random.u32(0..12)).collect();
            let zero = sink.constant(false);
            let addends = Addends {
                a: (0..n).map(|i| sink.input(times[i] as i32)).collect(),
                b: vec![zero; n],
                carry_in: Some(sink.input(times[n] as i32)),
            };
            let built = build(&network, &addends, PAIRS, Propagate::Or, &mut sink);
            let weight: u64 = times.iter().map(|&t| 1 << t).sum();
            let least = weight.next_power_of_two().trailing_zeros();
            assert_eq!(sink.arrival(built.carries[n - 1]), least as i32);
        }
    }
}

/// Three inputs a gate, arrivals 0, 0, 1, 1: the pair first, then all three at 1,
/// is ready at 2; a full gate first would end at 3 (worked by hand; the bound is
/// ⌈log3 Σ 3^t⌉ = 2, Parker 1979).
#[test]
fn the_first_merge_leaves_later_gates_full() {
    let network = network("flat-lookahead", 3, true);
    let mut sink = CountingSink::new(XorForm::Gate);
    let zero = sink.constant(false);
    let addends = Addends {
        a: [0, 0, 1].map(|at| sink.input(at)).to_vec(),
        b: vec![zero; 3],
        carry_in: Some(sink.input(1)),
    };
    let limits = Limits {
        gate_inputs: 3,
        covers: false,
    };
    let built = build(&network, &addends, limits, Propagate::Or, &mut sink);
    assert_eq!(sink.arrival(built.carries[2]), 2);
}

/// With six-input covers three spans join a level and both ends are absorbed: the
/// carry out of 27 positions takes three levels, and so does the sum above them.
/// No fewer can do: they read 54 and 56 operand bits, more than 6².
#[test]
fn six_input_covers_absorb_both_ends() {
    let limits = Limits {
        gate_inputs: 6,
        covers: true,
    };
    let settings = Settings {
        valency: 3,
        ..Settings::default()
    };
    let network = scheme("sklansky").network(28, false, settings);
    let adder = Adder::new(&network, limits, Propagate::Xor, XorForm::Gate);
    assert_eq!(adder.carry_delay(26), 3);
    assert_eq!(adder.sink.arrival(adder.built.sums[27]), 3);
}

/// A constant operand leaves a chain of ANDs: an incrementer as the trade builds
/// it, n half adders (common practice, no source).
#[test]
fn a_constant_operand_folds_away() {
    for covers in [false, true] {
        let network = network("ripple", 8, true);
        let mut sink = CountingSink::new(XorForm::Gate);
        let zero = sink.constant(false);
        let addends = Addends {
            a: (0..8).map(|_| sink.input(0)).collect(),
            b: vec![zero; 8],
            carry_in: Some(sink.input(0)),
        };
        let limits = Limits {
            gate_inputs: 4,
            covers,
        };
        let built = build(&network, &addends, limits, Propagate::Or, &mut sink);
        let outputs = [built.sums, built.carries].concat();
        assert_eq!(sink.gates(&outputs), 16, "covers: {covers}");
    }
}

/// Knowles 1999: every member has the fewest levels, and with two in the last
/// level as many cells as Kogge-Stone, NL-N+1 (from memory of the paper; cells
/// recomputed). For L levels there are as many members as Catalan's number C_L:
/// exponents that never fall, that of level j at most j (1, 2, 5, 14, 42, 132;
/// OEIS A000108, from memory).
#[test]
fn the_knowles_family_has_the_published_members() {
    for (levels, members) in [(1, 1), (2, 2), (3, 5), (4, 14), (5, 42), (6, 132)] {
        assert_eq!(FanOuts::every(levels).len(), members, "levels: {levels}");
    }
    // The five of eight positions, the last level first.
    let mut of_eight: Vec<Vec<usize>> = FanOuts::every(3).iter().map(|f| f.list(3)).collect();
    of_eight.sort();
    assert_eq!(
        of_eight,
        [[1, 1, 1], [2, 1, 1], [2, 2, 1], [4, 1, 1], [4, 2, 1]]
    );
    for l in 3..=7 {
        let n = 1usize << l;
        let network = with(&|s| s.fan_outs = FanOuts::new(&[2]), "knowles", n);
        assert_eq!(network.cells(), n * l - n + 1, "cells at {n}");
        assert_eq!(network.row_fan_out(), 3, "fan-out at {n}");
        assert_eq!(network.wire_tracks(), n / 4, "tracks at {n}");
    }
    for fan_outs in FanOuts::every(5) {
        let network = with(&|s| s.fan_outs = fan_outs, "knowles", 32);
        assert_eq!(network.levels(), 5);
        // It spares the cells whose span reached the lowest position earlier.
        assert!(network.cells() <= 129, "{:?}", fan_outs.list(5));
    }
}

fn with(set: &dyn Fn(&mut Settings), name: &str, positions: usize) -> CarryNetwork {
    let mut settings = Settings::default();
    set(&mut settings);
    scheme(name).network(positions, false, settings)
}

/// The ends of the Knowles family: all ones is Kogge-Stone, the most there can
/// be is Sklansky (Knowles 1999).
#[test]
fn the_knowles_family_runs_from_kogge_stone_to_sklansky() {
    for n in [8, 13, 16, 33, 64] {
        let ones = with(&|s| s.fan_outs = FanOuts::new(&[1]), "knowles", n);
        assert_eq!(spans(&ones), spans(&network("kogge-stone", n, false)));
        let most = with(&|s| s.fan_outs = FanOuts::with_tracks(7, 0), "knowles", n);
        assert_eq!(spans(&most), spans(&network("sklansky", n, false)), "{n}");
    }
}

/// The spans a network makes, as a set.
fn spans(network: &CarryNetwork) -> Vec<(i32, i32)> {
    let used = network.used();
    let used = network.nodes().filter(|node| used[node.index()]);
    let spans = used.map(|node| (network.span(node).high, network.span(node).low));
    let mut spans: Vec<(i32, i32)> = spans.collect();
    spans.sort_unstable();
    spans
}

/// Harris 2003: l + f + t = L - 1 gives L + l levels, a fan-out of at most
/// 2^f + 1 and at most 2^t tracks, the points inside (l, f, t > 0) included. A
/// folded network is l folds around a Knowles network of L - l levels. Levels are
/// rows of the taxonomy's drawings, with a buffer where a row has no cell.
#[test]
fn every_point_of_the_taxonomy_is_reached() {
    for levels in 3..=7usize {
        let n = 1 << levels;
        for l in 0..levels {
            for f in 0..levels - l {
                let t = levels - 1 - l - f;
                let inner = (levels - l) as u32;
                let fan_outs = FanOuts::with_tracks(inner, t as u32);
                let set = |s: &mut Settings| {
                    s.folds = l;
                    s.fan_outs = fan_outs;
                };
                let network = with(&set, "knowles", n);
                let point = format!("N = {n}, ({l}, {f}, {t})");
                assert_eq!(network.rows(), levels + l, "levels of {point}");
                let fan_out = network.row_fan_out();
                assert!(fan_out <= (1 << f) + 1, "{point}: {fan_out}");
                assert!(network.wire_tracks() <= 1 << t, "tracks of {point}");
            }
        }
    }
}

/// Weste and Harris, "CMOS VLSI Design", 4th edition, comparison of adders (from
/// memory): fan-out and tracks by N; recomputed.
#[test]
fn fan_out_and_tracks_are_the_published_ones() {
    for n in [8, 16, 32, 64, 128] {
        let of = |name| {
            let network = network(name, n, false);
            (network.row_fan_out(), network.wire_tracks())
        };
        assert_eq!(of("ripple").1, 1);
        assert_eq!(of("sklansky"), (n / 2 + 1, 1), "{n}");
        assert_eq!(of("kogge-stone"), (2, n / 2), "{n}");
        assert_eq!(of("han-carlson"), (2, n / 4), "{n}");
        assert_eq!(of("brent-kung"), (2, 1), "{n}");
        assert_eq!(of("ladner-fischer"), (n / 4 + 1, 1), "{n}");
        assert_eq!(of("knowles"), (3, n / 4), "{n}");
    }
}

/// Snir 1986, size + depth - (2N - 2) at N = 16, 32, 64: the excess of each
/// network over the bound, from independently built networks. Serial has none
/// ("zero deficiency").
#[test]
fn the_excess_over_snirs_bound_is_the_tabulated_one() {
    for (name, excess) in [
        ("ripple", [0, 0, 0]),
        ("brent-kung", [2, 3, 4]),
        ("sklansky", [6, 23, 72]),
        ("kogge-stone", [23, 72, 201]),
        ("han-carlson", [7, 24, 73]),
        ("ladner-fischer", [2, 7, 24]),
    ] {
        for (n, excess) in [16, 32, 64].into_iter().zip(excess) {
            let network = network(name, n, false);
            let over = network.cells() + network.levels() - (2 * n - 2);
            assert_eq!(over, excess, "{name} at {n}");
        }
    }
}

/// Carry-increment in blocks of four: N/4 + 2 levels (Weste and Harris, from
/// memory). Cells, counted by hand: a block of n has n - 1 of its own and n for
/// the carry, the first only the former: 2N - N/4 - 4.
#[test]
fn carry_increment_has_the_published_levels() {
    for n in [8, 16, 32, 64, 128] {
        let network = network("carry-increment", n, false);
        assert_eq!(network.levels(), n / 4 + 2, "levels at {n}");
        assert_eq!(network.cells(), 2 * n - n / 4 - 4, "cells at {n}");
    }
}

/// With blocks one longer each, d levels reach 1 + d(d+1)/2 positions, so about
/// √(2N) (Weste and Harris, from memory): 5, 8 and 11 levels at 16, 32 and 64,
/// where √(2N) is 5.7, 8 and 11.3.
#[test]
fn growing_blocks_take_about_the_root_of_twice_the_width() {
    for (n, levels) in [(16, 5), (32, 8), (64, 11), (128, 16)] {
        for name in ["carry-increment", "carry-select"] {
            let network = with(&|s| s.growing = true, name, n);
            assert_eq!(network.levels(), levels, "{name} at {n}");
            let root = (2.0 * n as f64).sqrt();
            assert!(
                (network.levels() as f64 - root).abs() < 1.0,
                "{name} at {n}"
            );
        }
    }
}

/// Carry-select in blocks of n: t_pg + [n + (k - 2)] t_AO + t_mux to the last
/// sum (Weste and Harris, from memory): with blocks of four at 16 bits the carry
/// into the last block is one level for g and p, three and two combinations, and
/// the select two delays more.
#[test]
fn carry_select_has_the_published_delay() {
    for (bits, blocks) in [(16, 4), (32, 8), (64, 16)] {
        let adder = Adder::textbook(&network("carry-select", bits, false));
        assert_eq!(
            adder.sum_delay(),
            1 + 2 * (3 + blocks - 2) + 2,
            "{bits} bits"
        );
    }
}

/// Conditional sum: ⌈log2 n⌉ levels of selection (Sklansky 1960). The carry out
/// of 64 positions is ready 1 + 2·6 delays after the operands.
#[test]
fn conditional_sum_halves_level_by_level() {
    for l in 2..=7 {
        let network = network("conditional-sum", 1 << l, false);
        assert_eq!(network.levels(), l);
        let adder = Adder::textbook(&network);
        assert_eq!(adder.last_carry_delay(), 1 + 2 * l as i32);
    }
    let with_carry_in = network("conditional-sum", 64, true);
    assert_eq!(with_carry_in.levels(), 7, "65 items");
}

/// At sparseness two with ripple inside, sparse prefix is Han-Carlson's network
/// (Han and Carlson 1987).
#[test]
fn sparseness_two_is_han_carlson() {
    for n in [8, 16, 33, 64] {
        let sparse = with(&|s| s.group = 2, "sparse-prefix", n);
        assert_eq!(
            spans(&sparse),
            spans(&network("han-carlson", n, false)),
            "{n}"
        );
    }
}
