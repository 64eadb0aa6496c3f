//! What the lines about times, loads and areas come to for the finished netlist.
//!
//! Ports are known only when models are linked, so these lines are kept as they
//! stand until then. A line about a port that is not there is told and left out: it
//! can make no path shorter or longer. Of two lines that say the same the last one
//! counts, and that is told too.

use super::constraint::Constraint;
use super::link::Design;
use super::model::Model;
use super::tally::{Oddity, Tally};
use crate::format::constraints::{
    ClockEvent, Constraints, ModelCost, PortDrive, PortLoad, PortTime,
};
use crate::netlist::{NameId, NetId, Netlist};
use crate::source::Place;
use rustc_hash::{FxHashMap, FxHashSet};

/// Everything the design says about time, load and area.
pub(super) fn settle(design: &Design, netlist: &Netlist, tally: &mut Tally) -> Constraints {
    let mut found = Constraints::default();
    for (index, model) in design.models.iter().enumerate() {
        if model.constraints.is_empty() && (index != design.top || model.clocks.is_empty()) {
            continue;
        }
        tally.file = model.file;
        cost(model, &mut found, tally);
        if index == design.top {
            Top::of(model, netlist, tally, &mut found).settle(model);
        } else {
            let left_out = model.constraints.iter().filter(|(_, c)| !c.is_of_a_cell());
            let mut lines = left_out.map(|&(line, _)| line);
            if let Some(line) = lines.next() {
                let count = 1 + lines.count() as u64;
                tally.count(Oddity::BelowTop, b"", count, || Place::line(line));
            }
        }
    }
    found
}

fn cost(model: &Model, found: &mut Constraints, tally: &mut Tally) {
    let mut cost = ModelCost {
        model: model.name,
        area: None,
        delays: Vec::new(),
    };
    for (line, constraint) in &model.constraints {
        match constraint {
            Constraint::Area(area) => {
                let before = cost.area.replace(*area);
                let place = || Place::line(*line);
                before.inspect(|_| tally.count(Oddity::SaidTwice, b".area", 1, place));
            }
            Constraint::Delay(delay) => cost.delays.push(*delay),
            _ => {}
        }
    }
    if cost.area.is_some() || !cost.delays.is_empty() {
        found.models.push(cost);
    }
}

struct Top<'a> {
    inputs: FxHashMap<NameId, NetId>,
    outputs: FxHashMap<NameId, NetId>,
    netlist: &'a Netlist,
    tally: &'a mut Tally,
    found: &'a mut Constraints,
}

impl<'a> Top<'a> {
    fn of(
        model: &Model,
        netlist: &'a Netlist,
        tally: &'a mut Tally,
        found: &'a mut Constraints,
    ) -> Self {
        let name = |net: u32| model.nets[net as usize];
        let inputs = model.inputs.iter().zip(netlist.inputs());
        let outputs = model.outputs.iter().zip(netlist.outputs());
        Self {
            inputs: inputs.map(|(port, &net)| (name(port.net), net)).collect(),
            outputs: outputs
                .map(|(port, output)| (name(port.net), output.signal.net))
                .collect(),
            netlist,
            tally,
            found,
        }
    }

    /// The input of that name; told when there is none.
    fn input(&mut self, name: NameId, line: u32) -> Option<NetId> {
        let found = self.inputs.get(&name).copied();
        self.told(found, name, line)
    }

    fn output(&mut self, name: NameId, line: u32) -> Option<NetId> {
        let found = self.outputs.get(&name).copied();
        self.told(found, name, line)
    }

    fn told(&mut self, found: Option<NetId>, name: NameId, line: u32) -> Option<NetId> {
        if found.is_none() {
            let subject = self.netlist.names().bytes(name);
            let place = || Place::line(line);
            self.tally.count(Oddity::NoSuchPort, subject, 1, place);
        }
        found
    }

    fn one<T>(&mut self, slot: impl FnOnce(&mut Constraints) -> &mut Option<T>, value: T, at: At) {
        if slot(self.found).replace(value).is_some() {
            self.said_twice(at);
        }
    }

    fn said_twice(&mut self, (word, line): At) {
        let place = || Place::line(line);
        self.tally.count(Oddity::SaidTwice, word, 1, place);
    }

    fn settle(mut self, model: &Model) {
        for &clock in &model.clocks {
            if let Some(&net) = self.inputs.get(&model.nets[clock as usize]) {
                self.found.clocks.push(net);
            }
        }
        for (line, constraint) in &model.constraints {
            self.take(*line, constraint);
        }
        for (word, line) in [
            (
                &b".input_arrival"[..],
                last_only(&mut self.found.input_arrival, |p| (p.net, p.line)),
            ),
            (
                b".output_required",
                last_only(&mut self.found.output_required, |p| (p.net, p.line)),
            ),
            (
                b".input_drive",
                last_only(&mut self.found.input_drive, |p| (p.net, p.line)),
            ),
            (
                b".max_input_load",
                last_only(&mut self.found.max_input_load, |p| (p.net, p.line)),
            ),
            (
                b".output_load",
                last_only(&mut self.found.output_load, |p| (p.net, p.line)),
            ),
        ] {
            if let Some(line) = line {
                self.said_twice((word, line));
            }
        }
    }

    fn take(&mut self, line: u32, constraint: &Constraint<NameId>) {
        use Constraint as C;
        match *constraint {
            C::Area(_) | C::Delay(_) => {}
            C::WireLoadSlope(slope) => {
                self.one(
                    |c| &mut c.wire_load_slope,
                    slope,
                    (b".wire_load_slope", line),
                );
            }
            C::WireLoads(ref loads) => {
                if !self.found.wire_loads.is_empty() {
                    self.said_twice((b".wire", line));
                }
                self.found.wire_loads.clone_from(loads);
            }
            C::InputArrival(port, at, reference) => {
                if let Some(net) = self.input(port, line) {
                    let time = PortTime {
                        net,
                        at,
                        reference,
                        line,
                    };
                    self.found.input_arrival.push(time);
                }
            }
            C::OutputRequired(port, at, reference) => {
                if let Some(net) = self.output(port, line) {
                    let time = PortTime {
                        net,
                        at,
                        reference,
                        line,
                    };
                    self.found.output_required.push(time);
                }
            }
            C::InputDrive(port, drive) => {
                if let Some(net) = self.input(port, line) {
                    self.found.input_drive.push(PortDrive { net, drive, line });
                }
            }
            C::MaxInputLoad(port, load) => {
                if let Some(net) = self.input(port, line) {
                    self.found.max_input_load.push(PortLoad { net, load, line });
                }
            }
            C::OutputLoad(port, load) => {
                if let Some(net) = self.output(port, line) {
                    self.found.output_load.push(PortLoad { net, load, line });
                }
            }
            C::DefaultInputArrival(at) => {
                let word = b".default_input_arrival";
                self.one(|c| &mut c.default_input_arrival, at, (word, line));
            }
            C::DefaultOutputRequired(at) => {
                let word = b".default_output_required";
                self.one(|c| &mut c.default_output_required, at, (word, line));
            }
            C::DefaultInputDrive(drive) => {
                let word = b".default_input_drive";
                self.one(|c| &mut c.default_input_drive, drive, (word, line));
            }
            C::DefaultMaxInputLoad(load) => {
                let word = b".default_max_input_load";
                self.one(|c| &mut c.default_max_input_load, load, (word, line));
            }
            C::DefaultOutputLoad(load) => {
                let word = b".default_output_load";
                self.one(|c| &mut c.default_output_load, load, (word, line));
            }
            C::Cycle(time) => self.one(|c| &mut c.cycle, time, (b".cycle", line)),
            C::ClockEvent(percent, ref edges) => self.found.clock_events.push(ClockEvent {
                percent,
                edges: edges.clone(),
                line,
            }),
        }
    }
}

/// A word and the line it stands on.
type At = (&'static [u8], u32);

/// Keeps the last entry of each net; the line of the first repetition.
fn last_only<T>(list: &mut Vec<T>, key: impl Fn(&T) -> (NetId, u32)) -> Option<u32> {
    let mut seen = FxHashSet::default();
    let repeated = list
        .iter()
        .map(&key)
        .find(|&(net, _)| !seen.insert(net))
        .map(|(_, line)| line)?;
    seen.clear();
    list.reverse();
    list.retain(|entry| seen.insert(key(entry).0));
    list.reverse();
    Some(repeated)
}
