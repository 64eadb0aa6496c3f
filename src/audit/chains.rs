//! Proven chains into the record: order, ids, names, place, times, feedback.
//!
//! Chains are ordered widest first, then by their lowest operand net, which is
//! the same on every run.

use super::carried::{Cones, operand_nets};
use super::fingerprint::Prints;
use super::names::{operand, wire};
use super::rebuilds;
use super::record::{
    BuiltAsRecord, ChainDepth, ChainRecord, Feedback, Operand, Place, TaxonomyRecord, Wire,
};
use crate::chain::{CarryForm, Chain, Construction, Kind};
use crate::netlist::{Bit, Driver, GateId, NetId, Netlist, ScopeId, Signal, Topology, histogram};
use crate::plan::ChainPlan;
use crate::timing::{Spares, Timing};
use rustc_hash::{FxHashMap, FxHashSet};
use std::cmp::Reverse;
use std::fmt::Write;

/// Gates looked through between a sum and the register it may be stored in.
const FEEDBACK_GATES: usize = 32;

/// Puts chains into the order of their ids.
pub fn ordered(mut chains: Vec<Chain>) -> Vec<Chain> {
    let first_net = |chain: &Chain| operand_nets(chain).min();
    chains.sort_by_cached_key(|chain| (Reverse(bits(chain)), first_net(chain)));
    chains
}

/// The id of the chain at `index`.
pub fn id(index: usize) -> String {
    format!("C{}", index + 1)
}

/// Positions with an operand bit that is not constant.
fn bits(chain: &Chain) -> u64 {
    let counts = |bit: Bit| matches!(bit, Bit::Signal(_));
    let positions = chain.positions.iter();
    positions
        .filter(|bits| counts(bits.a) || counts(bits.b))
        .count() as u64
}

/// What the records of all chains are made from.
pub struct Sources<'a> {
    netlist: &'a Netlist,
    topology: &'a Topology,
    timing: &'a Timing,
    spares: &'a Spares<'a>,
    cones: &'a Cones,
    readers: Vec<u32>,
    /// Output ports and register inputs that show a net, by net.
    shown_by: FxHashMap<NetId, String>,
    /// By carry net, the gates that read it, once per pin.
    pins: FxHashMap<NetId, Vec<GateId>>,
}

impl<'a> Sources<'a> {
    /// Prepares them for `chains`.
    pub fn of(
        netlist: &'a Netlist,
        topology: &'a Topology,
        timing: &'a Timing,
        cones: &'a Cones,
        chains: &[Chain],
        spares: &'a Spares<'a>,
    ) -> Self {
        let all = || chains.iter().flat_map(|chain| &chain.positions);
        let shown: FxHashSet<NetId> = all()
            .flat_map(|bits| bits.sums.iter().chain(&bits.carries))
            .map(|signal| signal.net)
            .chain(chains.iter().flat_map(operand_nets))
            .collect();
        // Of several, the first by name: their order in the file may change.
        let mut shown_by: FxHashMap<NetId, String> = FxHashMap::default();
        let mut show = |net: NetId, name: String| {
            let known = shown_by.entry(net).or_insert_with(|| name.clone());
            if name < *known {
                *known = name;
            }
        };
        for output in netlist.outputs() {
            if shown.contains(&output.signal.net) {
                show(
                    output.signal.net,
                    format!("out {}", netlist.output_name(output)),
                );
            }
        }
        for register in netlist.registers() {
            if shown.contains(&register.input.net) {
                let name = netlist.net_name(register.output);
                show(register.input.net, format!("reg {name}"));
            }
        }
        let mut pins: FxHashMap<NetId, Vec<_>> = all()
            .flat_map(|bits| &bits.carries)
            .map(|signal| (signal.net, Vec::new()))
            .collect();
        if !pins.is_empty() {
            for gate in netlist.gates() {
                for net in netlist.fan_ins(gate) {
                    if let Some(readers) = pins.get_mut(net) {
                        readers.push(gate);
                    }
                }
            }
        }
        let readers = if chains.is_empty() {
            Vec::new()
        } else {
            histogram::reader_counts(netlist)
        };
        Self {
            netlist,
            topology,
            timing,
            spares,
            cones,
            readers,
            shown_by,
            pins,
        }
    }

    /// The records of all chains, in the order of [`ordered`], each with its plan.
    pub fn records(&self, chains: &[Chain], plans: &[ChainPlan]) -> Vec<ChainRecord> {
        let registers: FxHashMap<NetId, usize> = self
            .netlist
            .registers()
            .iter()
            .enumerate()
            .map(|(i, register)| (register.output, i))
            .collect();
        let mut prints = Prints::of(self.netlist, self.topology, &self.shown_by);
        let earlier = duplicates(chains);
        let each = chains.iter().enumerate();
        each.map(|(index, chain)| {
            let place = self.place(chain);
            let fingerprint = prints.fingerprint(chain, &place.instance);
            let marks = (fingerprint, earlier[index].map(id));
            self.record(index, chain, &plans[index], &registers, place, marks)
        })
        .collect()
    }

    fn record(
        &self,
        index: usize,
        chain: &Chain,
        plan: &ChainPlan,
        registers: &FxHashMap<NetId, usize>,
        place: Place,
        (fingerprint, duplicates): (String, Option<String>),
    ) -> ChainRecord {
        let netlist = self.netlist;
        let name = |signal: Signal| netlist.signal_name(signal);
        let depth = ChainDepth {
            arrives: self.timing.time(plan.arrives),
            leaves: self.timing.time(plan.leaves),
            carries: (plan.carries.iter())
                .map(|at| at.map(|at| self.timing.time(at)))
                .collect(),
            exercised: None,
        };
        let results = chain.positions.iter();
        let spare = results
            .flat_map(|bits| bits.sums.iter().chain(&bits.carries))
            .filter_map(|signal| self.spares.at(signal.net))
            .min_by_key(|spare| (spare.ticks, spare.basis));
        let own: FxHashSet<_> = self.cones.gates[index].iter().copied().collect();
        ChainRecord {
            id: id(index),
            fingerprint,
            array: None,
            kind: chain.kind.word().to_owned(),
            bits: bits(chain),
            operands: operands(netlist, chain),
            carry_in: carry_in(netlist, chain),
            carry_form: match chain.carry_form {
                CarryForm::Carry => "carry",
                CarryForm::Borrow => "borrow",
            }
            .to_owned(),
            carry_out: self.carry_out(chain),
            carry_taps: self.carry_taps(chain, &own),
            sums: chain
                .positions
                .iter()
                .filter_map(|bits| bits.sums.first().copied().map(name))
                .collect(),
            result: chain.comparison.map(|compared| name(compared.result)),
            relation: (chain.comparison).map(|compared| compared.relation.word().to_owned()),
            signed: chain.comparison.map(|compared| compared.signed),
            mode: chain.mode.map(name),
            feedback: self.feedback(chain, registers),
            duplicates,
            built_as: self.built_as(index, chain),
            proven: true,
            place,
            depth,
            on_longest_path: self.on_longest_path(chain),
            slack: spare.map(|spare| self.timing.time(spare.ticks)),
            slack_against: spare.map(|spare| spare.basis.words().to_owned()),
            not_planned: rebuilds::not_planned(self.timing, plan),
            cheaper: plan.cheaper.map(|index| format!("P{}", index + 1)),
            proposals: rebuilds::proposals(netlist, self.timing, plan),
        }
    }

    fn carry_out(&self, chain: &Chain) -> Option<String> {
        if chain.kind == Kind::Comparator {
            return None;
        }
        let carry = *chain.positions.last()?.carries.first()?;
        // A borrow is the complement of the carry of a + ~b + 1.
        let shown = match chain.carry_form {
            CarryForm::Carry => carry,
            CarryForm::Borrow => !carry,
        };
        chain.has_carry_out.then(|| self.netlist.signal_name(shown))
    }

    /// Carries below the last with a reader outside the chain.
    fn carry_taps(&self, chain: &Chain, own: &FxHashSet<GateId>) -> Vec<String> {
        let below = chain.positions.len() - 1;
        let carries = chain.positions[..below]
            .iter()
            .flat_map(|bits| &bits.carries);
        carries
            .filter(|carry| {
                let gates = &self.pins[&carry.net];
                let outside = gates.iter().any(|gate| !own.contains(gate));
                // Readers that are no gates: outputs, registers, boxes.
                outside || self.readers[carry.net.index()] as usize > gates.len()
            })
            .map(|&carry| self.netlist.signal_name(carry))
            .collect()
    }

    fn built_as(&self, index: usize, chain: &Chain) -> BuiltAsRecord {
        let outputs = self.cones.gates[index].iter();
        let readers = outputs.map(|&gate| self.readers[self.netlist.gate_output(gate).index()]);
        let Construction {
            nearest,
            group,
            levels,
            cells,
            taxonomy,
            detail,
        } = &chain.construction;
        let count = |n: Option<usize>| n.map(|n| n as u64);
        BuiltAsRecord {
            name: chain.built_as.word().to_owned(),
            nearest: nearest.map(str::to_owned),
            group: count(*group),
            levels: count(*levels),
            cells: count(*cells),
            largest_fan_out: readers.max().map(u64::from),
            taxonomy: taxonomy.map(|place| TaxonomyRecord {
                l: place.extra_levels as u64,
                f: place.fan_out as u64,
                t: place.tracks as u64,
            }),
            detail: detail.clone(),
        }
    }

    /// The deepest instance that holds every sum and carry, and their lines.
    fn place(&self, chain: &Chain) -> Place {
        let (mut lines, mut common): (Option<(u32, u32)>, Option<Vec<_>>) = (None, None);
        let mut last_scope: Option<ScopeId> = None;
        for bits in &chain.positions {
            for signal in bits.sums.iter().chain(&bits.carries) {
                let Driver::Gate(gate) = self.netlist.driver(signal.net) else {
                    continue;
                };
                let line = self.netlist.gate_line(gate);
                if line > 0 {
                    let (low, high) = lines.unwrap_or((line, line));
                    lines = Some((low.min(line), high.max(line)));
                }
                let scope = self.netlist.gate_scope(gate);
                if last_scope == Some(scope) {
                    continue;
                }
                last_scope = Some(scope);
                let path = self.netlist.scope_path(scope);
                common = Some(match common {
                    None => path,
                    Some(mut known) => {
                        let shared = known.iter().zip(&path).take_while(|(a, b)| a == b);
                        known.truncate(shared.count());
                        known
                    }
                });
            }
        }
        let names = self.netlist.names();
        let instance = common.unwrap_or_default();
        Place {
            instance: instance
                .into_iter()
                .map(|name| names.text(name).into_owned())
                .collect(),
            line_first: lines.map(|(low, _)| u64::from(low)),
            line_last: lines.map(|(_, high)| u64::from(high)),
        }
    }

    fn on_longest_path(&self, chain: &Chain) -> bool {
        let positions = chain.positions.iter();
        let mut results = positions.flat_map(|bits| bits.carries.iter().chain(&bits.sums));
        results.any(|signal| self.timing.is_on_longest_path(signal.net))
    }

    /// Whether every operand bit that changes is a register that stores the sum
    /// of its own position, directly or through a few gates.
    fn feedback(&self, chain: &Chain, registers: &FxHashMap<NetId, usize>) -> Option<Feedback> {
        [false, true].into_iter().find_map(|second| {
            let mut outputs = Vec::new();
            for bits in &chain.positions {
                let Bit::Signal(signal) = (if second { bits.b } else { bits.a }) else {
                    continue;
                };
                let register = &self.netlist.registers()[*registers.get(&signal.net)?];
                if !self.stores(register.input.net, &bits.sums) {
                    return None;
                }
                outputs.push(self.netlist.net_name(register.output));
            }
            let role = match chain.kind {
                Kind::Adder | Kind::Subtractor | Kind::AdderSubtractor => "accumulator",
                Kind::Incrementer | Kind::Decrementer => "counter",
                Kind::Comparator => return None,
            };
            (!outputs.is_empty()).then(|| Feedback {
                role: role.to_owned(),
                registers: outputs,
            })
        })
    }

    fn stores(&self, net: NetId, sums: &[Signal]) -> bool {
        let mut nets = vec![net];
        let mut at = 0;
        while at < nets.len() && at < FEEDBACK_GATES {
            let net = nets[at];
            at += 1;
            if sums.iter().any(|sum| sum.net == net) {
                return true;
            }
            if let Driver::Gate(gate) = self.netlist.driver(net)
                && !self.topology.is_cut(net)
            {
                for fan_in in self.netlist.fan_ins(gate) {
                    if !nets.contains(fan_in) {
                        nets.push(*fan_in);
                    }
                }
            }
        }
        false
    }
}

/// By chain, the first earlier one with the same operands and carry-in, and so
/// the same function.
fn duplicates(chains: &[Chain]) -> Vec<Option<usize>> {
    type Function = (Kind, Option<Signal>, Bit, Vec<[Bit; 2]>);
    let mut first: FxHashMap<Function, usize> = FxHashMap::default();
    let each = chains.iter().enumerate().map(|(index, chain)| {
        let operands = chain.positions.iter().map(|bits| {
            let mut pair = [bits.a, bits.b];
            if !matches!(chain.kind, Kind::Subtractor | Kind::AdderSubtractor) {
                pair.sort_unstable();
            }
            pair
        });
        let key = (chain.kind, chain.mode, chain.carry_in, operands.collect());
        let earlier = *first.entry(key).or_insert(index);
        (earlier != index).then_some(earlier)
    });
    each.collect()
}

/// Bytes in hexadecimal digits.
pub fn hexadecimal(bytes: &[u8]) -> String {
    bytes.iter().fold(String::new(), |mut text, byte| {
        let _ = write!(text, "{byte:02x}");
        text
    })
}

fn operands(netlist: &Netlist, chain: &Chain) -> Vec<Operand> {
    let a: Vec<Bit> = chain.positions.iter().map(|bits| bits.a).collect();
    let b = chain.positions.iter().map(|bits| bits.b);
    let mut operands = vec![operand(netlist, &a)];
    match chain.kind {
        Kind::Adder | Kind::AdderSubtractor => {
            operands.push(operand(netlist, &b.collect::<Vec<_>>()));
        }
        // As it is subtracted: what is added is its complement.
        Kind::Subtractor => operands.push(operand(netlist, &b.map(complement).collect::<Vec<_>>())),
        Kind::Comparator => return compared(netlist, chain),
        Kind::Incrementer | Kind::Decrementer => {}
    }
    operands
}

/// The operands of a comparator as they are compared: the chain holds the second
/// complemented, and the sign bits of a signed one exchanged.
fn compared(netlist: &Netlist, chain: &Chain) -> Vec<Operand> {
    let signed = chain.comparison.is_some_and(|compared| compared.signed);
    let top = chain.positions.len() - 1;
    let bits = chain.positions.iter().enumerate();
    let pairs = bits.map(|(i, bits)| match signed && i == top {
        true => (complement(bits.a), bits.b),
        false => (bits.a, complement(bits.b)),
    });
    let (a, b): (Vec<Bit>, Vec<Bit>) = pairs.unzip();
    vec![operand(netlist, &a), operand(netlist, &b)]
}

fn complement(bit: Bit) -> Bit {
    match bit {
        Bit::Constant(value) => Bit::Constant(!value),
        Bit::Signal(signal) => Bit::Signal(!signal),
    }
}

fn carry_in(netlist: &Netlist, chain: &Chain) -> Option<Wire> {
    match (chain.kind, chain.carry_in) {
        (Kind::Adder, Bit::Constant(false)) => None,
        // Of a comparator the relation says it.
        (Kind::Comparator, Bit::Constant(_)) => None,
        (_, bit) => Some(wire(netlist, bit)),
    }
}
