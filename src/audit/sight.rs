//! What could hide a longer path or a chain, in words that name it.
//!
//! Behind a cut net the real path may be longer by an unknown amount; inside an
//! instance without a function anything may run; a register that is open passes
//! paths on; a candidate left undecided may be a chain. As long as one of these
//! touches a path, a verdict about the whole block would claim more than was
//! seen. A net without driver hides something only where gates stand behind it:
//! their paths begin in logic that is not in the file and are told too short. One
//! that merely leaves by a port or is stored makes no path of this file longer; it
//! is a finding, and the verdict about what is in the file stands. Every instance counts: without a function not even the directions of its
//! pins are certain.

use super::words::{counted, depth_in, grouped, listed};
use crate::netlist::{BlackBox, BoxId, Driver, NetId, Netlist, RegisterId, Topology};
use crate::timing::{DelayModel, NEVER, PathStep, Time, Timing};
use std::cmp::Reverse;
use std::collections::BTreeMap;

/// Names given of one kind of thing.
const NAMES: usize = 3;

/// The block with its transparent registers open.
pub struct Open {
    /// They.
    pub registers: Vec<RegisterId>,
    /// The longest path then.
    pub longest: Time,
}

impl Open {
    /// Times the block with its transparent registers open, when it has any.
    pub fn of(netlist: &Netlist, model: DelayModel) -> Option<Self> {
        let open = netlist.looked_through()?;
        let topology = Topology::of(&open);
        Some(Self {
            registers: netlist.transparent_registers().collect(),
            longest: model.time(Timing::of(&open, &topology, model).longest()),
        })
    }
}

/// What sight is judged from.
pub struct Sight<'a> {
    /// The netlist.
    pub netlist: &'a Netlist,
    /// Its order and cuts.
    pub topology: &'a Topology,
    /// Its timing.
    pub timing: &'a Timing,
    /// Candidates left undecided.
    pub undecided: usize,
    /// The block with its transparent registers open.
    pub open: Option<&'a Open>,
    /// The longest path.
    pub path: &'a [PathStep],
    /// Unit of depths.
    pub unit: &'a str,
}

impl Sight<'_> {
    /// What hid part of the answer; `carry` when carry limits what is seen.
    pub fn hidden(&self, carry: bool) -> Option<String> {
        let mut parts = Vec::new();
        parts.extend(self.cut());
        parts.extend(self.boxes());
        parts.extend(self.through_a_box());
        parts.extend(self.transparent());
        if !carry && self.undecided > 0 {
            parts.push(match self.undecided {
                1 => "a candidate for a carry chain was left undecided".to_owned(),
                n => format!(
                    "{} candidates for carry chains were left undecided",
                    grouped(n as u64)
                ),
            });
        }
        (!parts.is_empty()).then(|| listed(&parts))
    }

    /// Said when there is nothing but instances without a function.
    pub fn blind(&self) -> Option<String> {
        let boxes = self.unsettled();
        if self.netlist.gate_count() > 0 || boxes.is_empty() {
            return None;
        }
        let which = match boxes.len() {
            1 => "the only instance".to_owned(),
            n => format!("not one of the {} instances", grouped(n as u64)),
        };
        let has = if boxes.len() == 1 { "has no" } else { "has a" };
        Some(format!(
            "Unknown, because {which} {has} known function ({}): no path could be followed and \
             no chain looked for.",
            self.models(&boxes)
        ))
    }

    /// The longest path from a net to an end, or [`NEVER`].
    fn tail(&self, net: NetId) -> i32 {
        self.timing.tails.by_net[net.index()]
    }

    /// When a net without driver would have to settle to make a longest path longer:
    /// the first of them.
    fn behind(&self, nets: &[NetId]) -> String {
        let spare = nets.iter().filter_map(|&net| self.timing.slack(net));
        let Some(least) = spare.map(|slack| slack.ticks).min() else {
            return String::new();
        };
        let least = depth_in(self.timing.time(least), self.unit);
        format!("; it matters if settled after {least}")
    }

    fn reaches_an_end(&self, net: NetId) -> bool {
        self.timing.tails.by_net[net.index()] != NEVER
    }

    fn cut(&self) -> Vec<String> {
        let loops = self.topology.loops.iter();
        let on_loops: Vec<NetId> = loops
            .filter_map(|nets| nets.iter().copied().find(|&net| self.reaches_an_end(net)))
            .collect();
        let contended = self.netlist.contended().iter().map(|each| each.net);
        let mut contended: Vec<NetId> = contended.filter(|&net| self.reaches_an_end(net)).collect();
        contended.sort_unstable();
        let cut = self.topology.cut.ones().map(NetId::new);
        let bare: Vec<NetId> = cut
            .filter(|&net| self.netlist.driver(net) == Driver::None && self.tail(net) > 0)
            .collect();
        let mut parts = Vec::new();
        match on_loops.len() {
            0 => {}
            1 => parts.push(format!(
                "a loop without a register is cut (at {})",
                self.names(&on_loops)
            )),
            n => parts.push(format!(
                "{} loops without a register are cut (at {})",
                grouped(n as u64),
                self.names(&on_loops)
            )),
        }
        for (nets, which) in [(&contended, "several drivers"), (&bare, "no driver")] {
            let behind = match which {
                "no driver" => self.behind(nets),
                _ => String::new(),
            };
            match nets.len() {
                0 => {}
                1 => parts.push(format!(
                    "a net with {which} is cut ({}{behind})",
                    self.names(nets)
                )),
                n => parts.push(format!(
                    "{} nets with {which} are cut ({}{behind})",
                    grouped(n as u64),
                    self.names(nets)
                )),
            }
        }
        parts
    }

    /// Instances of which the user has not said how long every path through takes.
    fn unsettled(&self) -> Vec<&BlackBox> {
        let settled = |id| {
            let declared = self.netlist.declared();
            declared.is_some_and(|declared| declared.settles(id))
        };
        let boxes = self.netlist.boxes().iter().enumerate();
        boxes
            .filter(|&(i, _)| !settled(BoxId::new(i)))
            .map(|(_, each)| each)
            .collect()
    }

    fn boxes(&self) -> Option<String> {
        let boxes = self.unsettled();
        let instances = match boxes.len() as u64 {
            0 => return None,
            1 => "an instance".to_owned(),
            n => format!("{} instances", grouped(n)),
        };
        Some(format!(
            "paths and chains may run through {instances} without a known function ({})",
            self.models(&boxes)
        ))
    }

    /// A longest path inside a box whose delay is asserted: what takes the time in
    /// there is not known.
    fn through_a_box(&self) -> Option<String> {
        let declared = self.netlist.declared()?;
        let id = self
            .path
            .iter()
            .find_map(|step| declared.passage(step.gate?))?;
        let model = self.netlist.boxes()[id.index()].model;
        Some(format!(
            "the longest path runs through {}, of which only the delay is known",
            self.netlist.names().text(model)
        ))
    }

    fn transparent(&self) -> Option<String> {
        let open = self.open?;
        if open.longest <= self.timing.time(self.timing.longest()) {
            return None;
        }
        let outputs: Vec<NetId> = open
            .registers
            .iter()
            .map(|id| self.netlist.registers()[id.index()].output)
            .collect();
        Some(format!(
            "paths may run on through {} ({}), and then take up to {}",
            counted(
                outputs.len() as u64,
                "transparent register",
                "transparent registers"
            ),
            self.names(&outputs),
            depth_in(open.longest, self.unit)
        ))
    }

    fn names(&self, nets: &[NetId]) -> String {
        let shown = nets.iter().take(NAMES);
        let mut names: Vec<String> = shown.map(|&net| self.netlist.net_name(net)).collect();
        if nets.len() > NAMES {
            names.push(format!("{} more", grouped((nets.len() - NAMES) as u64)));
        }
        listed(&names)
    }

    /// The models without a function, the most frequent first.
    fn models(&self, boxes: &[&BlackBox]) -> String {
        let mut counts: BTreeMap<_, u64> = BTreeMap::new();
        for each in boxes {
            *counts.entry(each.model).or_insert(0) += 1;
        }
        let mut models: Vec<_> = counts.into_iter().collect();
        models.sort_by_key(|&(_, count)| Reverse(count));
        let mut words: Vec<String> = models
            .iter()
            .take(NAMES)
            .map(|&(model, count)| {
                let name = self.netlist.names().text(model);
                match (count, models.len()) {
                    (1, 1) => name.into_owned(),
                    _ => format!("{} {name}", grouped(count)),
                }
            })
            .collect();
        if models.len() > NAMES {
            let more = (models.len() - NAMES) as u64;
            words.push(format!("{} more models", grouped(more)));
        }
        listed(&words)
    }
}
