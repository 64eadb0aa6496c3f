//! The command line as typed: clap definitions and what they mean below.
//!
//! No clap type leaves this room; each stage gets its own small options value.

use crate::audit;
use crate::audit::record::Severity;
use crate::chain;
use crate::format::ReadOptions;
use crate::format::files::FileAccess;
use crate::plan::{NewGates, Request};
use crate::report::{Form, TradeoffForm};
use crate::source::nearest;
use crate::timing::DelayModel;
use clap::{Args, Parser, Subcommand, ValueEnum};
use std::path::PathBuf;
use std::sync::Arc;

/// Finds, proves and re-plans the carry chains of a gate-level netlist.
///
/// carrywise reads a BLIF or AIGER netlist, finds the carry chains in it, proves
/// what it found, and says whether carry limits the block, how each adder or
/// counter is built, and what a lookahead rebuild would bring and cost.
#[derive(Parser, Debug)]
#[command(
    name = "carrywise",
    version,
    max_term_width = 100,
    after_help = "Example:\n  carrywise audit tide_logger.blif",
    after_long_help = "Examples:\n  \
        carrywise audit tide_logger.blif\n  \
        carrywise audit old/*.blif --report review.md --report record.yaml\n  \
        carrywise closeup tide_logger.blif C1\n  \
        carrywise explain ripple-on-longest-path\n\n\
        Exit status: 0 done; 1 what was asked to hold does not; 2 an input or the command line\n\
        could not be used; 4 a fault of carrywise itself. Several files give the worst of theirs."
)]
pub struct CommandLine {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Subcommand, Debug)]
pub enum Command {
    /// Audit netlists: depth, proven carry chains, what a rebuild would bring
    #[command(after_help = AUDIT_EXAMPLES)]
    Audit(Box<AuditArguments>),
    /// Look at one chain bit by bit: arrivals, carries today, the best of every scheme
    #[command(after_help = "Example:\n  carrywise closeup tide_logger.blif C1")]
    Closeup(Box<CloseupArguments>),
    /// Compare schemes without a netlist: delay against the largest fan-in
    #[command(after_help = TRADEOFF_EXAMPLES)]
    Tradeoff(TradeoffArguments),
    /// Say what a finding means and what to do about it
    #[command(after_help = "Example:\n  carrywise explain net-driven-twice")]
    Explain {
        /// The rule, as a finding names it; all rules are listed without one
        rule: Option<String>,
    },
}

const AUDIT_EXAMPLES: &str = "Examples:\n  \
    carrywise audit tide_logger.blif\n  \
    carrywise audit tide_logger.aig --delay pairs --as markdown\n  \
    carrywise audit tide_logger.blif.gz --as json --report review.md";

const TRADEOFF_EXAMPLES: &str = "Examples:\n  \
    carrywise tradeoff --bits 32\n  \
    carrywise tradeoff --bits 16 --carry-in --delay pairs --gate-inputs 4\n  \
    carrywise tradeoff --bits 16 --arrivals late_levels.yaml --as yaml";

/// What `tradeoff` takes.
#[derive(Args, Debug)]
pub struct TradeoffArguments {
    /// Positions added
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(1..=4096))]
    pub bits: u64,

    /// With a carry-in
    #[arg(long)]
    pub carry_in: bool,

    /// A YAML file of when the bits of `a`, `b` and `carry_in` are ready, in units of the delay
    /// model [default: all at 0]
    #[arg(long, value_name = "FILE")]
    pub arrivals: Option<PathBuf>,

    /// What a gate costs, as for `audit`; where that depends on load, each gate is priced as if it
    /// drove two others
    #[arg(long, value_name = "MODEL", default_value = "unit", value_parser = delay)]
    pub delay: Delay,

    /// Most inputs of a gate that are tried [default: as many as some scheme can use]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(2..))]
    pub gate_inputs: Option<u64>,

    /// What one gate may be
    #[arg(
        long,
        value_name = "KIND",
        value_enum,
        default_value = "single-operator"
    )]
    pub new_gates: NewGatesWord,

    /// Form of the answer on standard output
    #[arg(long = "as", value_name = "FORM", value_enum, default_value = "table")]
    pub form: TradeoffWord,
}

/// Words of `--as` of `tradeoff`.
#[derive(ValueEnum, Clone, Copy, Debug)]
pub enum TradeoffWord {
    /// For a terminal
    Table,
    /// The whole record, one document
    Yaml,
    /// The whole record, one line
    Json,
}

impl TradeoffWord {
    /// The form it means.
    pub fn form(self) -> TradeoffForm {
        match self {
            Self::Table => TradeoffForm::Table,
            Self::Yaml => TradeoffForm::Yaml,
            Self::Json => TradeoffForm::Json,
        }
    }
}

/// What `audit` takes.
#[derive(Args, Debug)]
pub struct AuditArguments {
    /// BLIF or AIGER files, plain or packed with gzip or zstd, told apart by content; `-` is
    /// standard input
    #[arg(required = true, value_name = "FILE")]
    pub files: Vec<PathBuf>,

    /// Also write the report to PATH; .md, .yaml and .json say in which form. May be repeated
    #[arg(long, value_name = "PATH")]
    pub report: Vec<PathBuf>,

    /// Exit with 1 when a finding is at least this bad
    #[arg(long, value_name = "LEVEL", value_enum, default_value = "never")]
    pub fail_on: FailWord,

    /// Plan every chain, whatever it has to spare
    #[arg(long)]
    pub plan_all: bool,

    /// What other commands take too.
    #[command(flatten)]
    pub shared: SharedArguments,
}

/// What `closeup` takes.
#[derive(Args, Debug)]
pub struct CloseupArguments {
    /// A BLIF or AIGER file, plain or packed; `-` is standard input
    #[arg(value_name = "FILE")]
    pub file: PathBuf,

    /// The chain: its id (`C1`), its fingerprint, or any of its nets
    #[arg(value_name = "CHAIN")]
    pub chain: String,

    /// What other commands take too.
    #[command(flatten)]
    pub shared: SharedArguments,
}

/// How to read a netlist, what to look for, and in which form to tell it.
#[derive(Args, Debug)]
pub struct SharedArguments {
    /// Form of the report on standard output
    #[arg(long = "as", value_name = "FORM", value_enum, default_value = "table")]
    pub form: FormWord,

    /// What a gate costs: `unit` counts every gate 1, `pairs` counts levels of two-input gates,
    /// `logical-effort` is about static CMOS gates and what each drives, in units of τ; a file is
    /// a YAML table of delays, or a Liberty library with delays
    #[arg(long, value_name = "MODEL|PATH", default_value = "unit", value_parser = delay)]
    pub delay: Delay,

    /// Most inputs of one new gate [default: the widest gate of the netlist, at most 4 for
    /// single-operator and 6 for cover; 2 for AIGER]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(2..))]
    pub gate_inputs: Option<u64>,

    /// What one new gate may be: `single-operator` is one product or one exclusive-or, `cover` any
    /// function [default: cover where the netlist uses such functions of three or more inputs]
    #[arg(long, value_name = "KIND", value_enum)]
    pub new_gates: Option<NewGatesWord>,

    /// The model that is the design [default: the first of the file]
    #[arg(long, value_name = "MODEL")]
    pub top: Option<String>,

    /// Also read files that `.search` names from below DIR; below the folder of the naming file
    /// they are read anyway. May be repeated
    #[arg(long, value_name = "DIR")]
    pub search_dir: Vec<PathBuf>,

    /// Leave out chains of fewer bits than this
    #[arg(long, value_name = "N", default_value_t = 4,
          value_parser = clap::value_parser!(u64).range(1..=1 << 32))]
    pub min_bits: u64,

    /// Refuse a netlist that has more gates than this once its hierarchy is flat
    #[arg(long, value_name = "N", default_value_t = 100_000_000)]
    pub max_gates: u64,

    /// Solver conflicts allowed per question of a proof, in proportion fewer in cones over a
    /// thousand nodes
    #[arg(long, value_name = "N", default_value_t = 20_000)]
    pub effort: u64,

    /// Functions of cells: a BLIF file of one-cell models, or a Liberty library
    #[arg(long, value_name = "PATH")]
    pub cells: Option<PathBuf>,

    /// A YAML file of what may be assumed about the block: tied nets, paths that do not count,
    /// paths of several cycles, arrival and required times, delays of boxes and of carry cells
    #[arg(long, value_name = "PATH")]
    pub assume: Option<PathBuf>,

    /// Hold every path end without a required time of its own against this depth, in whole units
    /// of the delay model
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(..=1 << 24))]
    pub target_depth: Option<u64>,

    /// No warnings on standard error; errors still
    #[arg(long, short)]
    pub quiet: bool,
}

/// Words of `--as`.
#[derive(ValueEnum, Clone, Copy, Debug)]
pub enum FormWord {
    /// For a terminal
    Table,
    /// For a code review
    Markdown,
    /// The whole record, one document per netlist
    Yaml,
    /// The whole record, one line per netlist
    Json,
}

impl FormWord {
    /// The form it means.
    pub fn form(self) -> Form {
        match self {
            Self::Table => Form::Table,
            Self::Markdown => Form::Markdown,
            Self::Yaml => Form::Yaml,
            Self::Json => Form::Json,
        }
    }
}

/// What `--delay` asks for.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Delay {
    /// A model that needs no file.
    Model(DelayModel),
    /// A delay table, or a library with delays.
    File(PathBuf),
}

fn delay(text: &str) -> Result<Delay, String> {
    if let Some(model) = DelayModel::from_name(text) {
        return Ok(Delay::Model(model));
    }
    if text.contains(['.', '/', '\\']) {
        return Ok(Delay::File(PathBuf::from(text)));
    }
    let words = DelayModel::ALL.map(DelayModel::name);
    let hint =
        nearest(text, &words).map_or_else(String::new, |word| format!("; did you mean `{word}`?"));
    let known = words.map(|word| format!("`{word}`")).join(", ");
    Err(format!(
        "expected one of {known}, or a file, as ./delays.yaml or ./cells.lib{hint}"
    ))
}

/// Words of `--fail-on`.
#[derive(ValueEnum, Clone, Copy, Debug)]
pub enum FailWord {
    /// On an error
    Error,
    /// On a warning or an error
    Warning,
    /// On none
    Never,
}

impl FailWord {
    /// The least severity that fails, when one does.
    pub fn least(self) -> Option<Severity> {
        match self {
            Self::Error => Some(Severity::Error),
            Self::Warning => Some(Severity::Warning),
            Self::Never => None,
        }
    }
}

/// Words of `--new-gates`.
#[derive(ValueEnum, Clone, Copy, Debug)]
pub enum NewGatesWord {
    /// One product of any polarities or its complement, or one exclusive-or
    SingleOperator,
    /// Any function
    Cover,
}

impl AuditArguments {
    /// How to audit.
    pub fn auditing(&self, model: DelayModel) -> audit::Options {
        let mut options = self.shared.auditing(model);
        if self.plan_all {
            options.request.margin = Some(i32::MAX);
        }
        options
    }
}

impl SharedArguments {
    /// How to read, with access to further files.
    pub fn reading(&self, files: Arc<dyn FileAccess>) -> ReadOptions {
        ReadOptions {
            top: self.top.clone(),
            max_gates: self.max_gates,
            files: Some(files),
        }
    }

    /// How to audit.
    pub fn auditing(&self, model: DelayModel) -> audit::Options {
        let whole = |n: u64| usize::try_from(n).unwrap_or(usize::MAX);
        audit::Options {
            request: Request {
                new_gates: self.new_gates.map(|word| match word {
                    NewGatesWord::SingleOperator => NewGates::SingleOperator,
                    NewGatesWord::Cover => NewGates::Cover,
                }),
                gate_inputs: self.gate_inputs.map(whole),
                ..Request::new(model)
            },
            chains: chain::Options {
                min_bits: whole(self.min_bits),
                effort: self.effort,
                ..chain::Options::default()
            },
            target_depth: self.target_depth,
        }
    }
}
