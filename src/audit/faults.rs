//! Findings: structure faults, wide gates, crowded nets, and what the chains
//! and the longest path give reason to look at.
//!
//! Each rule lists its first few places and counts the rest, so that a netlist
//! full of one fault still leaves room for the others. Worst first.

use super::assumed::{late_ports, per_cycle};
use super::findings::{self, MANY_READERS, RULES, Rule, WIDE_GATE};
use super::goals::Standing;
use super::rebuilds::scheme_phrase;
use super::record::{ChainRecord, Finding, UnprovenRecord};
use super::verdict::cut_on;
use super::words::{counted, depth_in, grouped, listed};
use crate::chain::{BuiltAs, Chain};
use crate::netlist::Assumptions;
use crate::netlist::assume::Assumed;
use crate::netlist::health::{Fault, FaultKind, Health};
use crate::netlist::{Driver, NetId, Netlist, RegisterId, Topology, Trigger, histogram};
use crate::timing::{KindTiming, PathStep, Time, Timing, end_net};
use std::cmp::Reverse;

/// Places listed of one rule.
const PLACES: usize = 20;
/// Drivers listed of one net.
const DRIVERS: usize = 6;
/// Names listed of one loop.
const LOOP_NAMES: usize = 8;

/// The findings, and how many more there are.
pub struct Findings<'a> {
    netlist: &'a Netlist,
    list: Vec<Finding>,
    left_out: u64,
}

impl<'a> Findings<'a> {
    /// None yet.
    pub fn new(netlist: &'a Netlist) -> Self {
        Self {
            netlist,
            list: Vec::new(),
            left_out: 0,
        }
    }

    /// The list, worst first, and how many are left out of it.
    pub fn sorted(mut self) -> (Vec<Finding>, u64) {
        let place = |finding: &Finding| RULES.iter().position(|rule| rule.slug == finding.rule);
        self.list
            .sort_by_cached_key(|finding| (Reverse(finding.severity), place(finding)));
        (self.list, self.left_out)
    }

    fn add(&mut self, slug: &str, net: Option<NetId>, line: u32, message: String) -> &mut Finding {
        let rule: &Rule = findings::find(slug).expect("every rule raised is in the registry");
        self.list.push(Finding {
            rule: rule.slug.to_owned(),
            severity: rule.severity,
            chain: None,
            net: net.map(|net| self.netlist.net_name(net)),
            line: (line > 0).then_some(u64::from(line)),
            message,
            advice: rule.advice.to_owned(),
            accepted: false,
        });
        let last = self.list.len() - 1;
        &mut self.list[last]
    }

    /// Structure faults.
    pub fn add_health(&mut self, health: &Health) {
        for kind in FaultKind::ALL {
            let of_kind = health.faults.iter().filter(|fault| fault.kind == kind);
            let mut listed = 0;
            for fault in of_kind.take(PLACES) {
                self.add_fault(fault);
                listed += 1;
            }
            self.left_out += (health.count(kind) - listed) as u64;
        }
    }

    fn add_fault(&mut self, fault: &Fault) {
        let (net, line) = (fault.nets[0], fault.lines.first().copied().unwrap_or(0));
        let name = self.netlist.net_name(net);
        let (slug, message) = match fault.kind {
            FaultKind::NoDriver => (
                "net-without-driver",
                format!("{name} is read, and nothing drives it"),
            ),
            FaultKind::DrivenTwice => {
                let lines = self.driver_lines(net);
                let at = if lines.is_empty() {
                    String::new()
                } else {
                    format!(", at lines {}", listed(&lines))
                };
                let drivers = counted(fault.lines.len() as u64, "driver", "drivers");
                ("net-driven-twice", format!("{name} has {drivers}{at}"))
            }
            FaultKind::Loop => ("loop-without-register", self.loop_message(fault)),
            FaultKind::NoReader => (
                "net-without-reader",
                match self.netlist.driver(net) {
                    Driver::Input(_) => format!("nothing reads the input {name}"),
                    Driver::Register(_) => format!("nothing reads the register {name}"),
                    _ => format!("nothing reads {name}"),
                },
            ),
            FaultKind::AlwaysConstant => {
                let value = u8::from(fault.value == Some(true));
                ("always-constant", format!("{name} is always {value}"))
            }
        };
        self.add(slug, Some(net), line, message);
    }

    /// The line of every driver of a net, and the instance when it is in one.
    fn driver_lines(&self, net: NetId) -> Vec<String> {
        let netlist = self.netlist;
        let Driver::Many(index) = netlist.driver(net) else {
            return Vec::new();
        };
        let drivers = &netlist.contended()[index as usize].drivers;
        let known = drivers.iter().filter(|(_, line)| *line > 0);
        let mut lines: Vec<String> = known
            .clone()
            .take(DRIVERS)
            .map(|&(driver, line)| {
                let scope = match driver {
                    Driver::Gate(gate) => netlist.scope_path(netlist.gate_scope(gate)),
                    _ => Vec::new(),
                };
                let path: Vec<_> = scope.iter().map(|&n| netlist.names().text(n)).collect();
                match path.is_empty() {
                    true => line.to_string(),
                    false => format!("{line} in {}", path.join("/")),
                }
            })
            .collect();
        match known.count().saturating_sub(DRIVERS) {
            0 => {}
            more => lines.push(format!("{} more", grouped(more as u64))),
        }
        lines
    }

    fn loop_message(&self, fault: &Fault) -> String {
        let total = fault.nets.len() + fault.left_out;
        let shown = fault.nets.iter().take(LOOP_NAMES);
        let mut names: Vec<String> = shown.map(|&net| self.netlist.net_name(net)).collect();
        let more = total - names.len();
        let first = names[0].clone();
        if more > 0 {
            names.push(format!("{} more", grouped(more as u64)));
        }
        match total {
            1 => format!("{first} reads itself"),
            _ => format!(
                "{} in a circle: {}, and back to {first}",
                counted(total as u64, "gate", "gates"),
                names.join(", ")
            ),
        }
    }

    /// Gates with many inputs and nets with many readers of the netlist as read, the
    /// worst first.
    pub fn add_crowds(&mut self, netlist: &Netlist) {
        let mut wide: Vec<_> = netlist
            .gates()
            .filter(|&gate| netlist.fan_ins(gate).len() as u64 > WIDE_GATE)
            .collect();
        wide.sort_by_key(|&gate| Reverse(netlist.fan_ins(gate).len()));
        for &gate in wide.iter().take(PLACES) {
            let net = netlist.gate_output(gate);
            let inputs = counted(netlist.fan_ins(gate).len() as u64, "input", "inputs");
            let message = format!("the gate of {} has {inputs}", netlist.net_name(net));
            self.add("gate-too-wide", Some(net), netlist.gate_line(gate), message);
        }
        self.left_out += wide.len().saturating_sub(PLACES) as u64;

        let mut readers = histogram::reader_counts(netlist);
        for register in netlist.registers() {
            if let Some(control) = register.control {
                readers[control.index()] -= 1;
            }
        }
        let is_constant = |net| matches!(netlist.driver(net), Driver::Constant(_));
        let mut crowded: Vec<NetId> = netlist
            .nets()
            .filter(|&net| u64::from(readers[net.index()]) > MANY_READERS && !is_constant(net))
            .collect();
        crowded.sort_by_key(|&net| Reverse(readers[net.index()]));
        for &net in crowded.iter().take(PLACES) {
            let line = match netlist.driver(net) {
                Driver::Gate(gate) => netlist.gate_line(gate),
                Driver::Register(id) => netlist.registers()[id.index()].line,
                _ => 0,
            };
            let count = counted(u64::from(readers[net.index()]), "reader", "readers");
            let message = format!("{} has {count}", netlist.net_name(net));
            self.add("too-many-readers", Some(net), line, message);
        }
        self.left_out += crowded.len().saturating_sub(PLACES) as u64;
    }

    /// Registers that pass their input on while their control says so.
    pub fn add_transparent(&mut self, registers: &[RegisterId]) {
        let netlist = self.netlist;
        for id in registers.iter().take(PLACES) {
            let register = &netlist.registers()[id.index()];
            let control = register.control.map(|net| netlist.net_name(net));
            let control = control.unwrap_or_else(|| "its control".to_owned());
            let when = match register.trigger {
                Trigger::ActiveHigh => format!("while {control} is 1"),
                Trigger::ActiveLow => format!("while {control} is 0"),
                _ => "at any time".to_owned(),
            };
            let name = netlist.net_name(register.output);
            let message = format!("the register {name} passes its input on {when}");
            self.add(
                "transparent-register",
                Some(register.output),
                register.line,
                message,
            );
        }
        self.left_out += registers.len().saturating_sub(PLACES) as u64;
    }

    /// Instances without a known function.
    pub fn add_boxes(&mut self) {
        let boxes = self.netlist.boxes();
        for each in boxes.iter().take(PLACES) {
            let model = self.netlist.names().text(each.model).into_owned();
            let message = format!("the function of {model} is not in the file");
            self.add("cell-without-function", None, each.line, message);
        }
        self.left_out += boxes.len().saturating_sub(PLACES) as u64;
    }

    /// A longest path that begins or ends at a cut.
    pub fn add_cut_path(
        &mut self,
        topology: &Topology,
        longest: Option<(&KindTiming, &[PathStep])>,
    ) {
        let Some((kind, path)) = longest else { return };
        if let Some(net) = cut_on(self.netlist, topology, kind, path) {
            let name = self.netlist.net_name(net);
            let message = format!("the longest path is cut at {name}; the real one may be longer");
            self.add("path-cut-here", Some(net), 0, message);
        }
    }

    /// Outputs that are ready after they must be, and paths of several cycles that
    /// need more of a cycle than the longest path of one.
    pub fn add_late(
        &mut self,
        assumptions: &Assumptions,
        under: &Assumed,
        timing: &Timing,
        unit: &str,
    ) {
        let late = late_ports(assumptions, under, timing);
        for port in late.iter().take(PLACES) {
            let output = &self.netlist.outputs()[port.output as usize];
            let message = format!(
                "{} is ready at {}, and must be at {}: {} over",
                self.netlist.output_name(output),
                port.at,
                port.required,
                depth_in(port.at - port.required, unit)
            );
            self.add("too-deep", Some(output.signal.net), output.line, message);
        }
        self.left_out += late.len().saturating_sub(PLACES) as u64;
        for relaxed in &timing.relaxed {
            let each = per_cycle(relaxed.timing.longest, relaxed.cycles);
            if each > timing.longest() {
                let message = format!(
                    "paths that may take {} cycles need {} a cycle, more than the longest path \
                     of one",
                    relaxed.cycles,
                    depth_in(timing.time(each), unit)
                );
                self.add("too-deep", None, 0, message);
            }
        }
    }

    /// A delay model that does not fit the netlist.
    pub fn add_misfit(&mut self, misfit: Option<&str>) {
        if let Some(misfit) = misfit {
            self.add("delay-model-does-not-fit", None, 0, misfit.to_owned());
        }
    }

    /// Ends that miss the target for the block.
    pub fn add_missed_target(&mut self, standing: &Standing, unit: &str) {
        let (Some(target), Some((over, end))) = (standing.target, standing.latest_for_target)
        else {
            return;
        };
        let target = depth_in(target, unit);
        let (name, over) = (end.describe(self.netlist), depth_in(over.abs(), unit));
        let message = match standing.late_for_target {
            1 => format!("{name} is reached {over} after the target of {target}"),
            n => format!(
                "{} are reached after the target of {target}, the latest, {name}, {over} after it",
                counted(n, "end", "ends")
            ),
        };
        let net = end_net(self.netlist, end);
        self.add("too-deep", net, 0, message);
    }

    /// Assumptions that change nothing.
    pub fn add_unused(&mut self, unused: &[String]) {
        for assumption in unused.iter().take(PLACES) {
            let message = format!("assuming that {assumption} changes nothing");
            self.add("assumption-unused", None, 0, message);
        }
        self.left_out += unused.len().saturating_sub(PLACES) as u64;
    }

    /// Candidates left undecided.
    pub fn add_unproven(&mut self, unproven: &[UnprovenRecord]) {
        for candidate in unproven.iter().take(PLACES) {
            let message = format!(
                "a candidate of {} over {} stayed open: {}",
                counted(candidate.bits, "bit", "bits"),
                listed(&candidate.operands),
                candidate.reason
            );
            self.add("chain-unproven", None, 0, message);
        }
        self.left_out += unproven.len().saturating_sub(PLACES) as u64;
    }

    /// Chains that a cheaper build would serve as well.
    pub fn add_faster(&mut self, records: &[ChainRecord]) {
        let mut listed = 0;
        for record in records {
            let Some(id) = &record.cheaper else { continue };
            let Some(cheaper) = record.proposals.iter().find(|each| each.id == *id) else {
                continue;
            };
            if listed == PLACES {
                self.left_out += 1;
                continue;
            }
            listed += 1;
            let saved = cheaper.gate_equivalents_added.unsigned_abs();
            let message = format!(
                "{} of {} has {} to spare; as {} ({}/{id}) it takes {} fewer, and no kind of \
                 path gets longer",
                record.id,
                record.formula(),
                record.slack.unwrap_or(Time::ZERO),
                scheme_phrase(cheaper),
                record.id,
                counted(saved, "gate equivalent", "gate equivalents"),
            );
            let line = record.place.line_first;
            let line = line.and_then(|line| u32::try_from(line).ok());
            let finding = self.add("faster-than-needed", None, line.unwrap_or(0), message);
            finding.chain = Some(record.id.clone());
        }
    }

    /// Chains that compute what an earlier one computes.
    pub fn add_duplicates(&mut self, records: &[ChainRecord]) {
        let twins = records.iter().filter_map(|record| {
            let earlier = record.duplicates.as_ref()?;
            Some((record, earlier))
        });
        let mut listed = 0;
        for (record, earlier) in twins {
            if listed == PLACES {
                self.left_out += 1;
                continue;
            }
            listed += 1;
            let message = format!(
                "{} computes {} a second time; {earlier} has the same operands",
                record.id,
                record.formula(),
            );
            let line = record
                .place
                .line_first
                .and_then(|line| u32::try_from(line).ok());
            let finding = self.add("duplicate-chain", None, line.unwrap_or(0), message);
            finding.chain = Some(record.id.clone());
        }
    }

    /// Ripple chains with two carries or more on a longest path.
    pub fn add_ripples(&mut self, timing: &Timing, chains: &[Chain], records: &[ChainRecord]) {
        let mut listed = 0;
        for (chain, record) in chains.iter().zip(records) {
            if chain.built_as != BuiltAs::Ripple {
                continue;
            }
            let on_path = |position: &&crate::chain::Position| {
                let mut carries = position.carries.iter();
                carries.any(|carry| timing.is_on_longest_path(carry.net))
            };
            let carries = chain.positions.iter().filter(on_path).count();
            if carries < 2 {
                continue;
            }
            if listed == PLACES {
                self.left_out += 1;
                continue;
            }
            listed += 1;
            let message = format!(
                "{} of the {} carries of {} lie on a longest path, each made from the one below",
                grouped(carries as u64),
                grouped(chain.positions.len() as u64),
                record.formula(),
            );
            let line = record
                .place
                .line_first
                .and_then(|line| u32::try_from(line).ok());
            let finding = self.add("ripple-on-longest-path", None, line.unwrap_or(0), message);
            finding.chain = Some(record.id.clone());
        }
    }
}
