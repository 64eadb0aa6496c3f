//! The audit: from a netlist to the one record that every report renders.
//!
//! This room calls the rooms below in order (topology, health, timing, chains,
//! plans), puts what they say into the record's words, and judges: verdict and
//! findings. It changes nothing and cannot fail on a valid netlist, except when
//! what was asked for does not fit the netlist's format.

mod assumed;
mod carried;
mod chains;
pub mod closeup;
mod exercised;
mod faults;
pub mod findings;
mod fingerprint;
mod free_carry;
mod gate_words;
mod goals;
mod measures;
mod model_fit;
mod names;
mod rebuilds;
pub mod record;
mod shape;
mod sight;
pub mod tradeoff;
mod verdict;
pub mod words;

use crate::chain;
use crate::format::Format;
use crate::netlist::assume::Misfit;
use crate::netlist::health::Health;
use crate::netlist::{Netlist, Topology};
use crate::plan::{self, ChainPlan, Ground, Request, Settings, SettingsError, Together};
use crate::timing::{DelayModel, Spares, Timing};
pub use assumed::Asserting;
use assumed::Without;
use carried::{Carried, Cones};
use faults::Findings;
use goals::Standing;
use measures::ChainMap;
use record::{
    Audit, DelayModelFacts, Depth, NetlistFacts, SCHEMA, Seen, Settings as SettingsRecord, Tool,
    UnprovenRecord,
};
use sha2::{Digest, Sha256};
use sight::{Open, Sight};
use verdict::Evidence;

/// What an audit does not settle.
const CAUTION: &str = "carrywise counts gates and estimates what a rebuild would bring and cost; \
    it does not sign off timing. Sign-off belongs to the timing flow qualified for the foundry's \
    process or for the device, and where the block can hurt someone, to the functional-safety \
    practice it falls under.";

/// Where the netlist came from.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Origin {
    /// File name as given.
    pub file: String,
    /// The format it was in.
    pub format: Format,
    /// SHA-256 of the bytes; see [`digest`].
    pub sha256: String,
}

/// How to audit.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// Delay model and limits on new gates.
    pub request: Request,
    /// What to look for, and how hard.
    pub chains: chain::Options,
    /// What every path end without a required time of its own is held against, in
    /// whole units of the delay model.
    pub target_depth: Option<u64>,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            request: Request::new(DelayModel::Unit),
            chains: chain::Options::default(),
            target_depth: None,
        }
    }
}

/// SHA-256 of an input, as the record gives it.
pub fn digest(bytes: &[u8]) -> String {
    chains::hexadecimal(&Sha256::digest(bytes))
}

/// Why a netlist was not audited.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
pub enum AuditError {
    /// The limits asked for on new gates do not fit the netlist's format.
    #[error(transparent)]
    Settings(#[from] SettingsError),
    /// The assumptions do not fit the netlist.
    #[error(transparent)]
    Misfit(#[from] Misfit),
}

/// Audits one netlist as it was read.
///
/// # Errors
/// When the limits asked for on new gates do not fit the netlist's format.
pub fn audit(netlist: &Netlist, origin: &Origin, options: &Options) -> Result<Audit, AuditError> {
    audit_under(netlist, origin, options, None)
}

/// Audits one netlist, under assumptions when there are some. Structure faults,
/// fan-in and fan-out are those of the netlist as read; everything about paths and
/// chains holds under the assumptions.
///
/// # Errors
/// When the limits on new gates or the assumptions do not fit the netlist.
pub fn audit_under(
    read: &Netlist,
    origin: &Origin,
    options: &Options,
    asserting: Option<&Asserting<'_>>,
) -> Result<Audit, AuditError> {
    let settings = Settings::resolve(options.request, read)?;
    let model = settings.model;
    let unit = model.unit_word();
    let applied = match asserting {
        None => None,
        Some(asserting) => Some((asserting, asserting.assumptions.apply(read)?)),
    };
    let mut topology = Topology::of(read);
    let health = Health::of(read, &topology);
    let without = applied
        .is_some()
        .then(|| Without::of(read, &topology, model));
    let netlist = applied.as_ref().map_or(read, |(_, under)| &under.netlist);
    if applied.is_some() {
        topology = Topology::of(netlist);
    }
    // The search needs the most memory, so it runs before the timing is held.
    let chain::Found {
        chains,
        unproven,
        witnessed,
        recurrences_not_listed,
    } = chain::find(netlist, &topology, options.chains);
    let timing = Timing::of(netlist, &topology, model);
    let chains = chains::ordered(chains);
    let (plans, together) = plans(netlist, &topology, &timing, &settings, &chains);

    let carried = Carried::of(netlist, &chains);
    let cones = Cones::of(netlist, &topology, &chains);
    let asserted = applied
        .as_ref()
        .map(|(asserting, under)| (asserting.assumptions, under));
    let asked = goals::asked(netlist, asserted, options.target_depth, model);
    let spares = Spares::of(netlist, &topology, &timing, &asked);
    let sources = chains::Sources::of(netlist, &topology, &timing, &cones, &chains, &spares);
    let mut records = sources.records(&chains, &plans);
    // Another model's timing is as large as this one's: one at a time.
    drop(sources);
    drop(spares);
    drop(timing);
    rebuilds::note_models(netlist, &topology, &settings, &chains, &plans, &mut records);
    let timing = Timing::of(netlist, &topology, model);
    exercised::note(
        netlist,
        &topology,
        &timing,
        &chains,
        options.chains.effort,
        &mut records,
    );
    let mut recommended_set =
        rebuilds::recommended_set(netlist, &records, &plans, together.as_ref(), &timing, unit);
    if model.depends_on_load() && !recommended_set.proposals.is_empty() {
        recommended_set.sentence.push_str(
            " Loads as they are today and a usual load of new gates are assumed of the set; a \
             proposal's own figures have the loads of its rebuild.",
        );
    }
    if let Some((asserting, _)) = &applied {
        assumed::hold_under_ties(asserting.assumptions, &mut recommended_set);
    }
    let unproven: Vec<UnprovenRecord> = unproven
        .iter()
        .map(|candidate| unproven_record(netlist, candidate))
        .collect();

    let kind = timing.longest_kind();
    let path = kind.map_or_else(Vec::new, |kind| timing.path_of(netlist, &topology, kind));
    let longest_path = kind.map(|kind| (kind, path.as_slice()));
    let ids: Vec<String> = (0..chains.len()).map(chains::id).collect();
    let map = || ChainMap {
        carried: &carried,
        cones: &cones,
        ids: &ids,
    };
    let open = Open::of(netlist, model);
    let standing = Standing::of(netlist, &topology, &timing, &asked);
    let verdict = Evidence {
        netlist,
        topology: &topology,
        timing: &timing,
        chains: &chains,
        records: &records,
        map: map(),
        sight: Sight {
            netlist,
            topology: &topology,
            timing: &timing,
            undecided: unproven.len(),
            open: open.as_ref(),
            path: &path,
            unit,
        },
        min_bits: options.chains.min_bits,
        longest: longest_path,
        set: &recommended_set,
        unit,
        without: without.as_ref(),
        goals: standing.as_ref(),
    }
    .verdict();
    let assumed = applied
        .as_ref()
        .map_or_else(Vec::new, |(asserting, under)| {
            assumed::records(asserting.assumptions, under, &timing, unit)
        });

    let mut findings = Findings::new(netlist);
    if let Some((asserting, under)) = &applied {
        findings.add_late(asserting.assumptions, under, &timing, unit);
        findings.add_unused(&assumed::unused(asserting.assumptions, read, &timing));
    }
    if let Some(standing) = &standing {
        findings.add_missed_target(standing, unit);
    }
    findings.add_health(&health);
    findings.add_boxes();
    if let Some(open) = &open {
        findings.add_transparent(&open.registers);
    }
    findings.add_cut_path(&topology, longest_path);
    findings.add_ripples(&timing, &chains, &records);
    findings.add_faster(&records);
    findings.add_duplicates(&records);
    findings.add_unproven(&unproven);
    let misfit = model_fit::misfit(read, model);
    findings.add_misfit(misfit.as_deref());
    findings.add_crowds(read);
    let (findings, findings_left_out) = findings.sorted();

    Ok(Audit {
        schema: SCHEMA.to_owned(),
        tool: Tool {
            name: env!("CARGO_PKG_NAME").to_owned(),
            version: env!("CARGO_PKG_VERSION").to_owned(),
        },
        netlist: netlist_facts(read, origin),
        settings: SettingsRecord {
            assumptions_sha256: asserting.map(|asserting| asserting.sha256.clone()),
            ..settings_record(&settings, options, misfit)
        },
        seen: Seen {
            gates_with_function: read.gate_count() as u64,
            gates_without_function: netlist.boxes().len() as u64,
            nets_cut: topology.cut.count_ones(..) as u64,
            chains_proven: records.len() as u64,
            chains_witnessed: witnessed as u64,
            chains_unproven: unproven.len() as u64,
        },
        verdict,
        depth: Depth {
            longest_through_transparent: open.as_ref().map(|open| open.longest),
            late_ends: standing.as_ref().map(|standing| standing.late),
            least_to_spare: standing
                .as_ref()
                .and_then(|standing| standing.least.map(|(spare, ..)| spare)),
            longest_without_assumptions: without.as_ref().map(|without| without.longest),
            ..measures::depth(netlist, &topology, &timing, model, longest_path, &map())
        },
        fan_in: measures::fan_in(read),
        fan_out: measures::fan_out(read),
        chains: records,
        recommended_set,
        arrays: Vec::new(),
        recurrences_not_listed,
        unproven,
        findings,
        findings_left_out,
        assumed,
        caution: CAUTION.to_owned(),
    })
}

fn plans(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    settings: &Settings,
    chains: &[chain::Chain],
) -> (Vec<ChainPlan>, Option<Together>) {
    if chains.is_empty() {
        return (Vec::new(), None);
    }
    let ground = Ground::of(netlist, topology, timing, settings);
    let mut plans = plan::plan_all(&ground, chains);
    let together = plan::choose_together(&ground, chains, &mut plans);
    plan::note_savings(&ground, chains, &mut plans);
    (plans, together)
}

fn netlist_facts(netlist: &Netlist, origin: &Origin) -> NetlistFacts {
    NetlistFacts {
        file: origin.file.clone(),
        format: origin.format.word().to_owned(),
        model: netlist
            .model()
            .map(|name| netlist.names().text(name).into_owned()),
        sha256: origin.sha256.clone(),
        inputs: netlist.inputs().len() as u64,
        outputs: netlist.outputs().len() as u64,
        registers: netlist.registers().len() as u64,
        gates: netlist.gate_count() as u64,
        black_boxes: netlist.boxes().len() as u64,
    }
}

fn settings_record(
    settings: &Settings,
    options: &Options,
    misfit: Option<String>,
) -> SettingsRecord {
    SettingsRecord {
        delay_model: DelayModelFacts {
            name: settings.model.name().to_owned(),
            unit: settings.model.unit_word().to_owned(),
            note: settings.model.as_table().map(|table| table.note.clone()),
            misfit,
        },
        new_gates: settings.new_gates.word().to_owned(),
        new_gates_reason: settings.new_gates_reason.clone(),
        gate_inputs: settings.gate_inputs as u64,
        gate_inputs_reason: settings.gate_inputs_reason.clone(),
        plan_margin_percent: (!settings.plans_all())
            .then_some(plan::DEFAULT_MARGIN_PERCENT.unsigned_abs().into()),
        min_bits: options.chains.min_bits as u64,
        effort: options.chains.effort,
        patterns_seed: options.chains.seed,
        target_depth: options.target_depth,
        assumptions_sha256: None,
    }
}

fn unproven_record(netlist: &Netlist, candidate: &chain::Unproven) -> UnprovenRecord {
    let a: Vec<_> = candidate.operands.iter().map(|&(a, _)| a).collect();
    let b: Vec<_> = candidate.operands.iter().map(|&(_, b)| b).collect();
    let operands = [a, b].map(|bits| names::operand(netlist, &bits).name);
    UnprovenRecord {
        bits: candidate.bits as u64,
        operands: operands.into(),
        reason: candidate.reason.to_owned(),
        effort: candidate.effort,
    }
}
