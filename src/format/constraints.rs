//! What a netlist says about time: clocks, arrival and required times, drives,
//! loads, delays and areas, as plain data.
//!
//! The reader keeps these figures and judges nothing; units are whatever the
//! file's author meant. Only what the top model says about its ports is kept, as
//! the BLIF document of 28 July 1992 has it; areas and pin delays are kept of
//! every model, since those describe cells.
//!
//! Invariant: every figure is finite. Port times and loads name a net of the
//! netlist, and each net stands once in a list.

use crate::netlist::{FileTimes, NameId, NetId, Netlist};
use rustc_hash::FxHashMap;

/// A figure for a rising and one for a falling signal.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub struct RiseFall {
    /// When the signal rises.
    pub rise: f64,
    /// When it falls.
    pub fall: f64,
}

/// An edge of a clock (`r'clk`, `f'clk`).
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct ClockEdge<N = NameId> {
    /// The clock.
    pub clock: N,
    /// Whether it rises.
    pub rising: bool,
}

/// What a time is counted from, when that is not the start of the cycle.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Reference<N = NameId> {
    /// Whether the time lies before the edge; after it otherwise.
    pub before: bool,
    /// The edge.
    pub edge: ClockEdge<N>,
}

/// Arrival at an input or required time of an output.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PortTime {
    /// The port's net.
    pub net: NetId,
    /// The times.
    pub at: RiseFall,
    /// What they count from.
    pub reference: Option<Reference>,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// Drive of an input port, as delay per load.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PortDrive {
    /// The port's net.
    pub net: NetId,
    /// The drive.
    pub drive: RiseFall,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// Load at a port.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PortLoad {
    /// The port's net.
    pub net: NetId,
    /// The load.
    pub load: f64,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// An edge within a clock event.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct TimedEdge<N = NameId> {
    /// The edge.
    pub edge: ClockEdge<N>,
    /// How much before and after the nominal moment it may come.
    pub slack: Option<(f64, f64)>,
}

/// When an edge happens.
#[derive(Clone, PartialEq, Debug)]
pub struct ClockEvent<N = NameId> {
    /// Position in the cycle, in percent.
    pub percent: f64,
    /// The edges that happen then.
    pub edges: Vec<TimedEdge<N>>,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// Whether a cell's output follows an input or its complement.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Phase {
    /// `INV`
    Inverting,
    /// `NONINV`
    NonInverting,
    /// `UNKNOWN`
    Unknown,
}

/// Delay of a model from one of its inputs (`.delay`).
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PinDelay<N = NameId> {
    /// The input.
    pub pin: N,
    /// Its phase.
    pub phase: Phase,
    /// Load of the pin.
    pub load: f64,
    /// Most load the output may drive.
    pub most_load: f64,
    /// Delay without load.
    pub block: RiseFall,
    /// Delay per load.
    pub drive: RiseFall,
}

/// Area and delays of one model.
#[derive(Clone, PartialEq, Debug)]
pub struct ModelCost {
    /// The model.
    pub model: NameId,
    /// Its area.
    pub area: Option<f64>,
    /// Its pins' delays, in the order of the text.
    pub delays: Vec<PinDelay>,
}

/// Everything a netlist says about time, load and area.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Constraints {
    /// Nets listed as clocks.
    pub clocks: Vec<NetId>,
    /// Cycle time.
    pub cycle: Option<f64>,
    /// Edges in the cycle, in the order of the text.
    pub clock_events: Vec<ClockEvent>,
    /// Arrival at inputs.
    pub input_arrival: Vec<PortTime>,
    /// Arrival at every other input.
    pub default_input_arrival: Option<RiseFall>,
    /// Required time of outputs.
    pub output_required: Vec<PortTime>,
    /// Required time of every other output.
    pub default_output_required: Option<RiseFall>,
    /// Drive of inputs.
    pub input_drive: Vec<PortDrive>,
    /// Drive of every other input.
    pub default_input_drive: Option<RiseFall>,
    /// Most load that inputs may be given.
    pub max_input_load: Vec<PortLoad>,
    /// Most load of every other input.
    pub default_max_input_load: Option<f64>,
    /// Load at outputs.
    pub output_load: Vec<PortLoad>,
    /// Load at every other output.
    pub default_output_load: Option<f64>,
    /// Load that a wire adds for each reader.
    pub wire_load_slope: Option<f64>,
    /// Loads of wires by number of readers, from one on.
    pub wire_loads: Vec<f64>,
    /// Area and delays by model, in the order of the text.
    pub models: Vec<ModelCost>,
}

impl Constraints {
    /// The times that count in timing: arrival at inputs, required times of outputs,
    /// the later of rise and fall at an input and the earlier at an output, and the
    /// cycle. A time that counts from a clock's edge is left out, since where that
    /// edge lies depends on clocks that no path here follows.
    pub fn times(&self, netlist: &Netlist) -> FileTimes {
        let mut times = FileTimes {
            cycle: self.cycle.map(FileTimes::thousandths),
            ..FileTimes::default()
        };
        let late = |at: RiseFall| FileTimes::thousandths(at.rise.max(at.fall));
        let early = |at: RiseFall| FileTimes::thousandths(at.rise.min(at.fall));
        if let Some(at) = self.default_input_arrival {
            let inputs = netlist.inputs().iter();
            times.arrival.extend(inputs.map(|&net| (net, late(at))));
        }
        for own in &self.input_arrival {
            match own.reference {
                None => times.arrival.insert(own.net, late(own.at)),
                Some(_) => times.arrival.remove(&own.net),
            };
        }
        let by_net: FxHashMap<NetId, &PortTime> = self
            .output_required
            .iter()
            .map(|own| (own.net, own))
            .collect();
        for (port, output) in netlist.outputs().iter().enumerate() {
            let at = match by_net.get(&output.signal.net) {
                Some(own) => own.reference.is_none().then(|| early(own.at)),
                None => self.default_output_required.map(early),
            };
            times.required.extend(at.map(|at| (port as u32, at)));
        }
        times
    }

    /// Whether the netlist says nothing of the kind.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}
