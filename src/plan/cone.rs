//! What a chain reads and what replacing it takes away.
//!
//! Operands are looked through buffers and inverters, whose polarity is free in
//! new gates; the nets to replace are those proven equal to a sum or carry and
//! driven by a gate; the sweep counts uses down from their gates. Every loop
//! here is linear in the chain's cone and fan-out.

use super::ground::Ground;
use super::overlay::{Literal, Overlay};
use super::site::Role;
use crate::chain::Chain;
use crate::netlist::{Bit, GateId, NetId, Shape, Signal};
use crate::network::{Addends, GateSink};
use rustc_hash::{FxHashMap, FxHashSet};

/// Buffers and inverters before an operand are looked through up to this many.
const MOST_BUFFERS: usize = 64;

/// The nets a chain adds.
pub(super) struct Operands {
    /// The bits as the chain gives them, with their positions.
    pub(super) given: Vec<(usize, Bit)>,
    /// The operands and the buffers and inverters before them.
    pub(super) on_the_way: FxHashSet<NetId>,
    /// The nets behind buffers and inverters, ascending.
    pub(super) roots: Vec<NetId>,
}

impl Operands {
    pub(super) fn of(ground: &Ground<'_>, chain: &Chain) -> Self {
        let bits = chain.positions.iter().enumerate();
        let given: Vec<(usize, Bit)> = bits
            .flat_map(|(i, position)| [(i, position.a), (i, position.b)])
            .chain([(0, chain.carry_in)])
            .chain(chain.mode.map(|mode| (0, Bit::Signal(mode))))
            .collect();
        let mut on_the_way = FxHashSet::default();
        let mut roots = Vec::new();
        for signal in given.iter().filter_map(|(_, bit)| bit.signal()) {
            roots.push(root(ground, signal, |net| {
                on_the_way.insert(net);
            }));
        }
        let mut roots: Vec<NetId> = roots.into_iter().map(|signal| signal.net).collect();
        roots.sort_unstable();
        roots.dedup();
        Self {
            given,
            on_the_way,
            roots,
        }
    }

    /// The addends as literals; see [`rooted`].
    pub(super) fn addends(
        &self,
        ground: &Ground<'_>,
        chain: &Chain,
        overlay: &mut Overlay,
    ) -> (Addends<Literal>, bool) {
        let rooted = Rooted::of(ground, chain);
        let addends = rooted.literals(overlay, |overlay, net| {
            overlay.net(net, ground.timing.arrivals.by_net[net.index()])
        });
        (addends, rooted.negated)
    }
}

/// What a chain adds, buffers and inverters looked through. A carry-in of
/// constant 1 is taken away by adding the complements: `a + b + 1 = ~(~a + ~b)`;
/// then the second result is true and every sum and carry comes out inverted.
pub(super) struct Rooted {
    addends: Addends<Bit>,
    /// What the second addend is combined with by XOR.
    mode: Option<Bit>,
    pub(super) negated: bool,
}

impl Rooted {
    pub(super) fn of(ground: &Ground<'_>, chain: &Chain) -> Self {
        let negated = chain.carry_in == Bit::Constant(true);
        let behind = |bit: Bit, negated: bool| match bit {
            Bit::Constant(value) => Bit::Constant(value != negated),
            Bit::Signal(signal) => {
                let root = root(ground, signal, |_| ());
                Bit::Signal(Signal {
                    inverted: root.inverted != negated,
                    ..root
                })
            }
        };
        let positions = || chain.positions.iter();
        let addends = Addends {
            a: positions().map(|each| behind(each.a, negated)).collect(),
            b: positions().map(|each| behind(each.b, negated)).collect(),
            carry_in: match chain.carry_in {
                Bit::Constant(_) => None,
                bit @ Bit::Signal(_) => Some(behind(bit, false)),
            },
        };
        let mode = chain.mode.map(|mode| behind(Bit::Signal(mode), false));
        Self {
            addends,
            mode,
            negated,
        }
    }

    /// The addends in an overlay, where `of_net` gives the literal of a net.
    pub(super) fn literals(
        &self,
        overlay: &mut Overlay,
        mut of_net: impl FnMut(&mut Overlay, NetId) -> Literal,
    ) -> Addends<Literal> {
        let mut literal = |bit: Bit| match bit {
            Bit::Constant(value) => Literal::FALSE.invert_if(value),
            Bit::Signal(signal) => of_net(overlay, signal.net).invert_if(signal.inverted),
        };
        let a = self.addends.a.iter().map(|&bit| literal(bit)).collect();
        let b: Vec<Literal> = self.addends.b.iter().map(|&bit| literal(bit)).collect();
        let carry_in = self.addends.carry_in.map(&mut literal);
        let mode = self.mode.map(&mut literal);
        let b = match mode {
            Some(mode) => b.into_iter().map(|b| overlay.xor(b, mode)).collect(),
            None => b,
        };
        Addends { a, b, carry_in }
    }
}

/// The signal behind the buffers and inverters before `signal`.
fn root(ground: &Ground<'_>, mut signal: Signal, mut pass: impl FnMut(NetId)) -> Signal {
    for _ in 0..MOST_BUFFERS {
        pass(signal.net);
        let Some(gate) = ground.gate_of(signal.net) else {
            return signal;
        };
        let inverts = match ground.netlist.function(gate).shape() {
            Shape::Buffer => false,
            Shape::Inverter => true,
            _ => return signal,
        };
        signal = Signal {
            net: ground.netlist.fan_ins(gate)[0],
            inverted: signal.inverted != inverts,
        };
    }
    pass(signal.net);
    signal
}

/// The nets to drive anew, in the order of the chain, and what each shows.
pub(super) fn replaced_nets(
    ground: &Ground<'_>,
    chain: &Chain,
    operands: &FxHashSet<NetId>,
) -> (Vec<NetId>, FxHashMap<NetId, Role>) {
    let mut order = Vec::new();
    let mut replaced = FxHashMap::default();
    for (position, each) in chain.positions.iter().enumerate() {
        let sums = each.sums.iter().map(|signal| (signal, false));
        let carries = each.carries.iter().map(|signal| (signal, true));
        for (signal, carry) in sums.chain(carries) {
            let net = signal.net;
            if operands.contains(&net)
                || replaced.contains_key(&net)
                || ground.gate_of(net).is_none()
            {
                continue;
            }
            order.push(net);
            let role = Role {
                position,
                carry,
                inverted: signal.inverted,
            };
            replaced.insert(net, role);
        }
    }
    (order, replaced)
}

/// Every gate that a change of `nets` may reach.
pub(super) fn fan_out_of(ground: &Ground<'_>, nets: &[NetId]) -> Vec<GateId> {
    let mut seen: FxHashSet<GateId> = FxHashSet::default();
    let mut found = Vec::new();
    let mut stack = nets.to_vec();
    while let Some(net) = stack.pop() {
        for &gate in ground.readers.of_net(net) {
            if seen.insert(gate) {
                found.push(gate);
                let output = ground.netlist.gate_output(gate);
                if ground.gate_of(output) == Some(gate) {
                    stack.push(output);
                }
            }
        }
    }
    found
}

/// The gates of the replaced nets and all that lose their last use with them,
/// the operands held; and the uses left of every net touched.
pub(super) fn sweep(
    ground: &Ground<'_>,
    order: &[NetId],
    replaced: &FxHashMap<NetId, Role>,
    operands: &[NetId],
) -> (FxHashSet<GateId>, FxHashMap<NetId, u32>) {
    let mut removed: FxHashSet<GateId> = FxHashSet::default();
    let mut uses: FxHashMap<NetId, u32> = FxHashMap::default();
    let mut stack: Vec<GateId> = order
        .iter()
        .filter_map(|&net| ground.gate_of(net))
        .collect();
    while let Some(gate) = stack.pop() {
        if !removed.insert(gate) {
            continue;
        }
        for &net in ground.netlist.fan_ins(gate) {
            let left = uses.entry(net).or_insert_with(|| ground.uses(net));
            *left -= 1;
            let held = replaced.contains_key(&net) || operands.binary_search(&net).is_ok();
            if *left == 0 && !held {
                stack.extend(ground.gate_of(net));
            }
        }
    }
    (removed, uses)
}

/// Gates removed beyond those of [`sweep`], because no new gate reads some
/// operand. No operand given may depend on what is replaced.
pub(super) fn sweep_unread(
    ground: &Ground<'_>,
    operands: &[NetId],
    uses_left: &FxHashMap<NetId, u32>,
    is_read: impl Fn(NetId) -> bool,
) -> Vec<GateId> {
    let mut uses: FxHashMap<NetId, u32> = FxHashMap::default();
    let left = |uses: &FxHashMap<NetId, u32>, net: NetId| {
        let known = uses.get(&net).or_else(|| uses_left.get(&net));
        known.copied().unwrap_or_else(|| ground.uses(net))
    };
    let mut stack: Vec<GateId> = operands
        .iter()
        .filter(|&&net| ground.uses(net) > 0 && left(&uses, net) == 0 && !is_read(net))
        .filter_map(|&net| ground.gate_of(net))
        .collect();
    let mut swept = Vec::new();
    while let Some(gate) = stack.pop() {
        swept.push(gate);
        for &net in ground.netlist.fan_ins(gate) {
            let now = left(&uses, net) - 1;
            uses.insert(net, now);
            if now == 0 && !is_read(net) {
                stack.extend(ground.gate_of(net));
            }
        }
    }
    swept.sort_unstable();
    swept
}
