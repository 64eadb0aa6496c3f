//! What a plan may build, and why: the limits on new gates and the margin.
//!
//! Where the user says nothing the netlist decides, and the reason is kept as a
//! sentence for the report. AIGER knows two-input ANDs only, so any other
//! request is refused rather than quietly ignored.

use super::overlay::GateStyle;
use crate::netlist::{FunctionId, Netlist, Shape, TruthTable};
use crate::network::Limits;
use crate::timing::DelayModel;

/// What one new gate may be.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum NewGates {
    /// One product of any polarities or its complement, or one XOR.
    SingleOperator,
    /// Any function of up to six inputs.
    Cover,
}

impl NewGates {
    /// The word used on the command line and in records.
    pub fn word(self) -> &'static str {
        match self {
            Self::SingleOperator => "single-operator",
            Self::Cover => "cover",
        }
    }
}

/// A request that cannot be met.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
pub enum SettingsError {
    /// Fewer than two inputs.
    #[error("a gate limit of {0} inputs is too small; at least 2 are needed")]
    TooFewInputs(usize),
    /// More inputs than a new AIGER gate has.
    #[error("an AIGER gate is an AND of two inputs; {0} cannot be asked for")]
    TooWideForAiger(usize),
    /// Covers in AIGER.
    #[error("an AIGER gate is an AND of two inputs; covers cannot be asked for")]
    CoverInAiger,
    /// A cover beyond a truth table.
    #[error("a new cover has at most 6 inputs; {0} cannot be asked for")]
    TooWideForCover(usize),
}

/// What the user asked for; `None` leaves it to the netlist.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Request {
    /// The delay model.
    pub model: DelayModel,
    /// What new gates may be.
    pub new_gates: Option<NewGates>,
    /// Most inputs of a new gate.
    pub gate_inputs: Option<usize>,
    /// Chains with more slack than this are not planned; `None` for the
    /// default margin.
    pub margin: Option<i32>,
}

impl Request {
    /// Everything left to the netlist.
    pub fn new(model: DelayModel) -> Self {
        Self {
            model,
            new_gates: None,
            gate_inputs: None,
            margin: None,
        }
    }
}

/// The settings a plan works by.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Settings {
    /// The delay model.
    pub model: DelayModel,
    /// What new gates may be.
    pub new_gates: NewGates,
    /// Why.
    pub new_gates_reason: String,
    /// Most inputs of a new gate.
    pub gate_inputs: usize,
    /// Why.
    pub gate_inputs_reason: String,
    /// A chain with more slack than this, against the longest path of its kind,
    /// is not planned; `None` for [`DEFAULT_MARGIN_PERCENT`] of that path.
    pub margin: Option<i32>,
    /// What the netlist's format makes of new gates.
    pub style: GateStyle,
}

/// The default margin: this share of the longest path of the chain's kind.
pub const DEFAULT_MARGIN_PERCENT: i32 = 10;

impl Settings {
    /// Completes a request for one netlist.
    ///
    /// # Errors
    /// When the request cannot be met in the netlist's format.
    pub fn resolve(request: Request, netlist: &Netlist) -> Result<Self, SettingsError> {
        if let Some(inputs) = request.gate_inputs.filter(|&inputs| inputs < 2) {
            return Err(SettingsError::TooFewInputs(inputs));
        }
        if netlist.has_inverted_edges() {
            return Self::for_aiger(request);
        }
        let (new_gates, new_gates_reason) = match request.new_gates {
            Some(asked) => (asked, "as asked".to_owned()),
            None if uses_covers(netlist) => (
                NewGates::Cover,
                "the netlist itself uses other functions of three or more inputs".to_owned(),
            ),
            None => (
                NewGates::SingleOperator,
                "the netlist uses no other function of three or more inputs".to_owned(),
            ),
        };
        let (style, most) = match new_gates {
            NewGates::SingleOperator => (GateStyle::SingleOperator, 4),
            NewGates::Cover => (GateStyle::Cover, TruthTable::MAX_INPUTS),
        };
        if let (NewGates::Cover, Some(inputs)) = (new_gates, request.gate_inputs)
            && inputs > TruthTable::MAX_INPUTS
        {
            return Err(SettingsError::TooWideForCover(inputs));
        }
        let (gate_inputs, gate_inputs_reason) = match request.gate_inputs {
            Some(asked) => (asked, "as asked".to_owned()),
            None => default_inputs(netlist, new_gates, most),
        };
        Ok(Self {
            model: request.model,
            new_gates,
            new_gates_reason,
            gate_inputs,
            gate_inputs_reason,
            margin: request.margin,
            style,
        })
    }

    fn for_aiger(request: Request) -> Result<Self, SettingsError> {
        match request {
            Request {
                gate_inputs: Some(inputs @ 3..),
                ..
            } => Err(SettingsError::TooWideForAiger(inputs)),
            Request {
                new_gates: Some(NewGates::Cover),
                ..
            } => Err(SettingsError::CoverInAiger),
            _ => Ok(Self {
                model: request.model,
                new_gates: NewGates::SingleOperator,
                new_gates_reason: "an AIGER gate is an AND".to_owned(),
                gate_inputs: 2,
                gate_inputs_reason: "an AIGER gate has two inputs".to_owned(),
                margin: request.margin,
                style: GateStyle::AndInverter,
            }),
        }
    }

    /// The limits in the words of the carry networks.
    pub fn limits(&self) -> Limits {
        Limits {
            gate_inputs: self.gate_inputs,
            covers: self.new_gates == NewGates::Cover,
        }
    }

    /// Whether every chain is planned, whatever it has to spare.
    pub fn plans_all(&self) -> bool {
        self.margin == Some(i32::MAX)
    }

    /// The margin against a longest path of `longest` ticks.
    pub fn margin_at(&self, longest: i32) -> i32 {
        self.margin
            .unwrap_or(longest.saturating_mul(DEFAULT_MARGIN_PERCENT) / 100)
    }
}

fn uses_covers(netlist: &Netlist) -> bool {
    (0..netlist.function_count()).any(|id| {
        let function = netlist.function_of(FunctionId::new(id));
        function.inputs() >= 3 && function.shape() == Shape::Other
    })
}

fn default_inputs(netlist: &Netlist, new_gates: NewGates, most: usize) -> (usize, String) {
    let largest = netlist
        .gates()
        .map(|gate| netlist.fan_ins(gate).len())
        .max()
        .unwrap_or(0);
    let kind = new_gates.word();
    if largest > most {
        let reason = format!(
            "the widest gate of the netlist has {largest}; {most} is the default limit for {kind} gates"
        );
        (most, reason)
    } else if largest < 2 {
        (2, "a gate needs at least two".to_owned())
    } else {
        (
            largest,
            format!("the widest gate of the netlist has {largest}"),
        )
    }
}
