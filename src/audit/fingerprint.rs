//! Fingerprints: the same for the same chain in another revision.
//!
//! Made from points that outlive a revision: ports and registers. Of each
//! position it takes where its operands come from, where its sum is shown, and of
//! the chain its kind and carry-in; never a line, a net number or the name of an
//! inner net. An operand that is an inner net is told by the ports and registers
//! it depends on, as long as those are few; else it says nothing. A chain with no
//! stable point at all is told by its instance path. Chains that are equal in all
//! of this are told apart by an ordinal.
//!
//! Hence renaming inner nets, shuffling gates and building the chain another way
//! leave it as it is, and it changes when ports or registers are renamed.

use super::chains::hexadecimal;
use crate::chain::{Chain, Kind};
use crate::netlist::{Bit, Driver, NetId, Netlist, Topology};
use rustc_hash::{FxHashMap, FxHashSet};
use sha2::{Digest, Sha256};
use std::fmt::Write;

/// Most ports and registers that tell an inner net.
const POINTS: usize = 16;
/// Most nets looked through for them.
const NETS: usize = 256;

/// Makes fingerprints, one chain after the other.
pub struct Prints<'a> {
    netlist: &'a Netlist,
    topology: &'a Topology,
    /// Where a net is shown: output ports and registers.
    shown_by: &'a FxHashMap<NetId, String>,
    known: FxHashMap<NetId, String>,
    ordinals: FxHashMap<String, u32>,
}

impl<'a> Prints<'a> {
    /// Prepares them; `shown_by` names the ports and registers that show a net.
    pub fn of(
        netlist: &'a Netlist,
        topology: &'a Topology,
        shown_by: &'a FxHashMap<NetId, String>,
    ) -> Self {
        Self {
            netlist,
            topology,
            shown_by,
            known: FxHashMap::default(),
            ordinals: FxHashMap::default(),
        }
    }

    /// Sixteen hexadecimal digits of SHA-256.
    pub fn fingerprint(&mut self, chain: &Chain, instance: &[String]) -> String {
        let carry_in = self.source(chain.carry_in);
        let mut points = format!("{}\t{carry_in}\n", chain.kind.word());
        if let Some(mode) = chain.mode {
            let mode = self.source(Bit::Signal(mode));
            let _ = writeln!(points, "{mode}");
        }
        let mut is_stable = false;
        if let Some(compared) = chain.comparison {
            let shown = self.shown_by.get(&compared.result.net);
            is_stable |= shown.is_some();
            let shown = shown.map_or("-", String::as_str);
            let _ = writeln!(points, "{}\t{shown}", compared.relation.word());
        }
        for bits in &chain.positions {
            let mut sources = [self.source(bits.a), self.source(bits.b)];
            if !matches!(chain.kind, Kind::Subtractor | Kind::AdderSubtractor) {
                sources.sort_unstable();
            }
            let shown = bits.sums.iter();
            let shown = shown.filter_map(|sum| self.shown_by.get(&sum.net)).min();
            let shown = shown.map_or("-", String::as_str);
            let [first, second] = &sources;
            is_stable |= [first, second, shown].iter().any(|point| point.len() > 1);
            let _ = writeln!(points, "{first}\t{second}\t{shown}");
        }
        if !is_stable {
            let _ = writeln!(points, "{}", instance.join("\t"));
        }
        let ordinal = self.ordinals.entry(points.clone()).or_insert(0);
        let _ = writeln!(points, "{ordinal}");
        *ordinal += 1;
        hexadecimal(&Sha256::digest(points.as_bytes())[..8])
    }

    /// Where an operand bit comes from; `-` when nothing stable tells.
    fn source(&mut self, bit: Bit) -> String {
        let signal = match bit {
            Bit::Constant(value) => return u8::from(value).to_string(),
            Bit::Signal(signal) => signal,
        };
        if let Some(point) = self.point(signal.net) {
            let mark = if signal.inverted { "~" } else { "" };
            return format!("{mark}{point}");
        }
        if let Some(known) = self.known.get(&signal.net) {
            return known.clone();
        }
        let source = match self.shown_by.get(&signal.net) {
            Some(shown) => shown.clone(),
            None => self
                .depends_on(signal.net)
                .unwrap_or_else(|| "-".to_owned()),
        };
        self.known.insert(signal.net, source.clone());
        source
    }

    /// A net that is a stable point itself.
    fn point(&self, net: NetId) -> Option<String> {
        let name = || self.netlist.net_name(net);
        match self.netlist.driver(net) {
            Driver::Input(_) => Some(format!("in {}", name())),
            Driver::Register(_) => Some(format!("reg {}", name())),
            _ => None,
        }
    }

    /// The ports and registers an inner net depends on, in the order of their
    /// names; `None` when they are many, or others than these.
    fn depends_on(&self, net: NetId) -> Option<String> {
        let mut points: Vec<String> = Vec::new();
        let mut seen: FxHashSet<NetId> = FxHashSet::default();
        let mut stack = vec![net];
        while let Some(net) = stack.pop() {
            if !seen.insert(net) {
                continue;
            }
            if let Some(point) = self.point(net) {
                points.push(point);
            } else if self.topology.is_cut(net) {
                return None;
            } else {
                match self.netlist.driver(net) {
                    Driver::Gate(gate) => stack.extend(self.netlist.fan_ins(gate)),
                    Driver::Constant(_) => {}
                    _ => return None,
                }
            }
            if points.len() > POINTS || seen.len() > NETS {
                return None;
            }
        }
        points.sort_unstable();
        Some(format!("of {}", points.join(" ")))
    }
}
