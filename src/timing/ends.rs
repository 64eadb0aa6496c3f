//! Where paths start and end, and the kinds of path between.
//!
//! A cut net is a free input: paths that start there count as from an input,
//! and a gate that drives a cut net ends its path as an output would.
//!
//! Where assumptions tell starts or ends of one class apart (see
//! [`crate::netlist::Asserted`]), a class falls into groups, each timed on its
//! own; without assumptions every class is one group.

use super::model::DelayModel;
use crate::netlist::{BoxId, Driver, EndPoint, GateId, NetId, Netlist, RegisterId, Topology};
use std::collections::BTreeSet;

/// What a path starts from.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum StartClass {
    /// An input port or a cut net.
    Input,
    /// A register's output.
    Register,
    /// A box output.
    Box,
}

/// What a path ends at.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum EndClass {
    /// An output port, or a gate that drives a cut net.
    Output,
    /// A register's input or control.
    Register,
    /// A box input.
    Box,
}

impl StartClass {
    /// All classes.
    pub const ALL: [Self; 3] = [Self::Input, Self::Register, Self::Box];

    /// The word used in records.
    pub fn word(self) -> &'static str {
        match self {
            Self::Input => "input",
            Self::Register => "register",
            Self::Box => "box",
        }
    }
}

impl EndClass {
    /// All classes.
    pub const ALL: [Self; 3] = [Self::Output, Self::Register, Self::Box];

    /// The word used in records.
    pub fn word(self) -> &'static str {
        match self {
            Self::Output => "output",
            Self::Register => "register",
            Self::Box => "box",
        }
    }
}

/// Starts that assumptions do not tell apart.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct StartGroup {
    /// Their class.
    pub class: StartClass,
    /// Their set among the assumptions, 0 without any.
    pub set: u8,
    /// The way their paths take (see [`crate::netlist::Asserted`]), 0 for any.
    pub way: u8,
}

/// Ends that assumptions do not tell apart.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct EndGroup {
    /// Their class.
    pub class: EndClass,
    /// Their set among the assumptions, 0 without any.
    pub set: u8,
    /// The way paths to them take, 0 for any.
    pub way: u8,
}

impl StartGroup {
    /// Whether starts of the group `own`, which a net belongs to, are among these.
    #[inline]
    pub fn holds(self, own: Self) -> bool {
        (self.class, self.set) == (own.class, own.set)
    }

    /// The group once for each way its paths may have to take.
    pub fn by_way(self, netlist: &Netlist) -> Vec<Self> {
        let ways = netlist
            .asserted()
            .map_or_else(|| BTreeSet::from([0]), |own| own.ways_from(self.set));
        ways.into_iter().map(|way| Self { way, ..self }).collect()
    }
}

impl EndGroup {
    /// Whether ends of the group `own`, which an end belongs to, are among these.
    #[inline]
    pub fn holds(self, own: Self) -> bool {
        (self.class, self.set) == (own.class, own.set)
    }

    /// The group once for each way paths to it may have to take.
    pub fn by_way(self, netlist: &Netlist) -> Vec<Self> {
        let ways = netlist
            .asserted()
            .map_or_else(|| BTreeSet::from([0]), |own| own.ways_to(self.set));
        ways.into_iter().map(|way| Self { way, ..self }).collect()
    }
}

/// A kind of path.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct PathKind {
    /// Where such paths start.
    pub start: StartGroup,
    /// Where they end.
    pub end: EndGroup,
}

impl PathKind {
    /// The kind between two classes of which no assumption tells members apart.
    pub fn between(start: StartClass, end: EndClass) -> Self {
        Self {
            start: StartGroup {
                class: start,
                set: 0,
                way: 0,
            },
            end: EndGroup {
                class: end,
                set: 0,
                way: 0,
            },
        }
    }

    /// The kind of the paths from `start` to ends of the group `end`, on the way of
    /// the start.
    pub fn from_to(start: StartGroup, end: EndGroup) -> Self {
        Self {
            start,
            end: EndGroup {
                way: start.way,
                ..end
            },
        }
    }

    /// The classes the path runs between.
    pub fn classes(self) -> (StartClass, EndClass) {
        (self.start.class, self.end.class)
    }
}

impl std::fmt::Display for PathKind {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}→{}", self.start.class.word(), self.end.class.word())
    }
}

/// One place where a path ends.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum End {
    /// Output port, by index.
    Output(u32),
    /// A register's input.
    RegisterInput(RegisterId),
    /// A register's control pin.
    RegisterControl(RegisterId),
    /// An input of a box, by index.
    BoxInput(BoxId, u32),
    /// A gate that drives a cut net.
    Cut(GateId),
}

impl End {
    /// The class the end belongs to.
    pub fn class(self) -> EndClass {
        match self {
            Self::Output(_) | Self::Cut(_) => EndClass::Output,
            Self::RegisterInput(_) | Self::RegisterControl(_) => EndClass::Register,
            Self::BoxInput(..) => EndClass::Box,
        }
    }

    /// The group the end belongs to; `None` when no path to it counts.
    pub fn group(self, netlist: &Netlist) -> Option<EndGroup> {
        let class = self.class();
        if let (Self::BoxInput(id, pin), Some(declared)) = (self, netlist.declared())
            && declared.passes(id, pin)
        {
            return None;
        }
        let set = match netlist.asserted() {
            None => 0,
            Some(asserted) => asserted.end_set(match self {
                Self::Output(i) => EndPoint::Output(i),
                Self::RegisterInput(id) | Self::RegisterControl(id) => EndPoint::Register(id),
                Self::BoxInput(id, _) => EndPoint::Box(id),
                Self::Cut(gate) => EndPoint::Net(netlist.gate_output(gate)),
            })?,
        };
        let way = 0;
        Some(EndGroup { class, set, way })
    }

    /// Whether the end is among those of a group.
    pub fn is_in(self, netlist: &Netlist, group: EndGroup) -> bool {
        self.group(netlist).is_some_and(|own| group.holds(own))
    }

    /// Its place in a record: the port or net, in plain words.
    pub fn describe(self, netlist: &Netlist) -> String {
        match self {
            Self::Output(i) => netlist.output_name(&netlist.outputs()[i as usize]),
            Self::RegisterInput(id) | Self::RegisterControl(id) => {
                netlist.net_name(netlist.registers()[id.index()].output)
            }
            Self::BoxInput(id, pin) => {
                netlist.net_name(netlist.boxes()[id.index()].inputs[pin as usize])
            }
            Self::Cut(gate) => netlist.net_name(netlist.gate_output(gate)),
        }
    }
}

/// The net an end reads; `None` for a gate that drives a cut net, whose own
/// pins end the path.
pub fn end_net(netlist: &Netlist, end: End) -> Option<NetId> {
    match end {
        End::Output(i) => Some(netlist.outputs()[i as usize].signal.net),
        End::RegisterInput(id) => Some(netlist.registers()[id.index()].input.net),
        End::RegisterControl(id) => netlist.registers()[id.index()].control,
        End::BoxInput(id, pin) => Some(netlist.boxes()[id.index()].inputs[pin as usize]),
        End::Cut(_) => None,
    }
}

/// Every end to which paths count, with its group, in a fixed order: outputs,
/// registers, boxes, cuts.
pub fn grouped_ends<'a>(
    netlist: &'a Netlist,
    topology: &'a Topology,
) -> impl Iterator<Item = (End, EndGroup)> + 'a {
    all_ends(netlist, topology).filter_map(|end| Some((end, end.group(netlist)?)))
}

/// The ends of [`grouped_ends`].
pub fn ends<'a>(netlist: &'a Netlist, topology: &'a Topology) -> impl Iterator<Item = End> + 'a {
    grouped_ends(netlist, topology).map(|(end, _)| end)
}

/// Every end there is.
fn all_ends<'a>(netlist: &'a Netlist, topology: &'a Topology) -> impl Iterator<Item = End> + 'a {
    let outputs = (0..netlist.outputs().len() as u32).map(End::Output);
    let registers = netlist
        .registers()
        .iter()
        .enumerate()
        .flat_map(|(i, register)| {
            let id = RegisterId::new(i);
            let control = register.control.map(|_| End::RegisterControl(id));
            [Some(End::RegisterInput(id)), control]
                .into_iter()
                .flatten()
        });
    let boxes = netlist.boxes().iter().enumerate().flat_map(|(i, each)| {
        (0..each.inputs.len() as u32).map(move |pin| End::BoxInput(BoxId::new(i), pin))
    });
    let looped = topology.loops.iter().flatten().filter_map(|&net| {
        let Driver::Gate(gate) = netlist.driver(net) else {
            return None;
        };
        Some(End::Cut(gate))
    });
    let contended = netlist.contended().iter().flat_map(|contention| {
        contention.drivers.iter().filter_map(|&(driver, _)| {
            let Driver::Gate(gate) = driver else {
                return None;
            };
            Some(End::Cut(gate))
        })
    });
    outputs
        .chain(registers)
        .chain(boxes)
        .chain(looped)
        .chain(contended)
}

/// The group of starts a net belongs to, if it is a start from which paths count.
#[inline]
pub fn start_group(netlist: &Netlist, topology: &Topology, net: NetId) -> Option<StartGroup> {
    let class = start_class(netlist, topology, net).filter(|_| !netlist.is_barred(net))?;
    let set = match netlist.asserted() {
        None => 0,
        Some(asserted) => asserted.start_set(net)?,
    };
    let way = 0;
    Some(StartGroup { class, set, way })
}

/// When a start is ready, in ticks of the delay model.
#[inline]
pub fn start_time(netlist: &Netlist, model: DelayModel, net: NetId) -> i32 {
    let per_unit = model.ticks_per_unit();
    let asserted = netlist
        .asserted()
        .and_then(|asserted| asserted.arrival(net));
    if let Some(units) = asserted {
        return units.saturating_mul(per_unit).min(LATEST);
    }
    let stated = netlist.times().filter(|_| model.counts_time());
    let stated = stated.and_then(|times| times.arrival.get(&net));
    stated.map_or(0, |&thousandths| thousandths / (1000 / per_unit))
}

/// The latest start there is, so that delays can be added.
const LATEST: i32 = 1_000_000_000;

/// What kind of start a net is, if it is one.
fn start_class(netlist: &Netlist, topology: &Topology, net: NetId) -> Option<StartClass> {
    if topology.is_cut(net) {
        return Some(StartClass::Input);
    }
    match netlist.driver(net) {
        Driver::Input(_) => Some(StartClass::Input),
        Driver::Register(_) => Some(StartClass::Register),
        Driver::Box(_) => Some(StartClass::Box),
        Driver::Gate(_) | Driver::Constant(_) | Driver::None | Driver::Many(_) => None,
    }
}
