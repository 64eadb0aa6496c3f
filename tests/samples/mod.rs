//! Records made by hand, for the reports to render: the tide-gauge logger with
//! one ripple total on its longest path, and a record whose every name is as
//! hostile as a netlist can make it; and the audits of real netlists.

use carrywise::audit::record::*;
use carrywise::audit::{self, Options, Origin};
use carrywise::format::{self, ReadOptions};
use carrywise::source::Source;
use carrywise::timing::Time;

fn at(units: i64) -> Time {
    Time::whole(units)
}

/// Text that would do harm unescaped, in Markdown, a terminal, YAML or JSON.
#[allow(dead_code)]
pub const HOSTILE: &str = "a|b<script>`x`\\[3]*_~&#@team \u{1b}[31m\u{7}\u{202e}\u{e9}\u{1f30a}'\": - # $m$ www.x http://y";

/// The logger's flat netlist as a record. The figures are invented but agree
/// with each other.
#[allow(dead_code)]
pub fn tide_logger() -> Audit {
    let net = |base: &str, bit: usize| Wire::Net(format!("{base}[{bit}]"));
    let bus = |base: &str| Operand {
        name: format!("{base}[15:0]"),
        nets: (0..16).map(|bit| net(base, bit)).collect(),
    };
    let total = ChainRecord {
        id: "C1".into(),
        fingerprint: "5d0c1f6a9b3e7d42".into(),
        array: None,
        kind: "adder".into(),
        bits: 16,
        operands: vec![bus("total"), bus("level")],
        carry_in: None,
        carry_form: "carry".into(),
        carry_out: None,
        carry_taps: vec![],
        sums: (0..16).map(|bit| format!("next_total[{bit}]")).collect(),
        result: None,
        relation: None,
        signed: None,
        mode: None,
        feedback: Some(Feedback {
            role: "accumulator".into(),
            registers: (0..16).map(|bit| format!("total[{bit}]")).collect(),
        }),
        duplicates: None,
        built_as: BuiltAsRecord {
            name: "ripple".into(),
            nearest: Some("ripple".into()),
            group: None,
            levels: Some(31),
            cells: Some(31),
            largest_fan_out: Some(3),
            taxonomy: None,
            detail: String::new(),
        },
        proven: true,
        place: Place {
            instance: vec!["u_total".into()],
            line_first: Some(41),
            line_last: Some(120),
        },
        depth: ChainDepth {
            arrives: at(1),
            leaves: at(32),
            carries: (0..16).map(|bit| Some(at(2 + 2 * bit))).collect(),
            exercised: None,
        },
        on_longest_path: true,
        slack: Some(at(0)),
        slack_against: Some("longest path of the kind".into()),
        cheaper: None,
        not_planned: None,
        proposals: vec![
            proposal("P1", "brent-kung", 12, 14, 92, false),
            proposal("P2", "sklansky", 9, 11, 110, true),
            proposal("P3", "kogge-stone", 9, 11, 168, false),
        ],
    };
    let count = ChainRecord {
        id: "C2".into(),
        fingerprint: "88e4a0b1c2d3f405".into(),
        kind: "incrementer".into(),
        bits: 8,
        operands: vec![Operand {
            name: "minute[7:0]".into(),
            nets: (0..8).map(|bit| net("minute", bit)).collect(),
        }],
        carry_in: Some(Wire::Constant(1)),
        sums: (0..8).map(|bit| format!("next_minute[{bit}]")).collect(),
        feedback: Some(Feedback {
            role: "counter".into(),
            registers: (0..8).map(|bit| format!("minute[{bit}]")).collect(),
        }),
        place: Place {
            instance: vec![],
            line_first: Some(130),
            line_last: Some(144),
        },
        depth: ChainDepth {
            arrives: at(0),
            leaves: at(7),
            carries: (0..8).map(|bit| Some(at(bit))).collect(),
            exercised: None,
        },
        on_longest_path: false,
        slack: Some(at(25)),
        slack_against: Some("longest path of the kind".into()),
        cheaper: None,
        not_planned: Some(NotPlanned {
            why: "25 gate delays to spare".into(),
            slack: Some(at(25)),
        }),
        proposals: vec![],
        ..total.clone()
    };
    let step = |net: &str, gate: &str, line, fan_in, arrival| PathStep {
        net: net.into(),
        gate: gate.into(),
        line,
        fan_in,
        arrival: at(arrival),
        chain: None,
        bit: None,
    };
    let mut path = vec![
        step("level[0]", "input", None, None, 0),
        step("u_total/gated[0]", "AND", Some(38), Some(2), 1),
    ];
    for level in 0..31 {
        path.push(PathStep {
            chain: Some("C1".into()),
            bit: (level % 2 == 1 || level == 30).then_some(level / 2),
            ..step(
                &format!("u_total/n{level}"),
                "AND",
                Some(41 + level),
                Some(2),
                2 + level as i64,
            )
        });
    }
    path.push(step("next_total[15]", "cover", Some(122), Some(3), 33));
    Audit {
        schema: SCHEMA.into(),
        tool: Tool {
            name: "carrywise".into(),
            version: "0.1.0".into(),
        },
        netlist: NetlistFacts {
            file: "tide_logger.blif".into(),
            format: "blif".into(),
            model: Some("tide_logger".into()),
            sha256: "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08".into(),
            inputs: 24,
            outputs: 18,
            registers: 40,
            gates: 310,
            black_boxes: 0,
        },
        settings: Settings {
            delay_model: DelayModelFacts {
                name: "unit".into(),
                unit: "gate delays".into(),
                note: None,
                misfit: None,
            },
            new_gates: "single-operator".into(),
            new_gates_reason: "the netlist uses no other function of three or more inputs".into(),
            gate_inputs: 4,
            gate_inputs_reason: "the widest gate of the netlist has 4".into(),
            plan_margin_percent: Some(10),
            min_bits: 4,
            effort: 100_000,
            patterns_seed: 1,
            target_depth: None,
            assumptions_sha256: None,
        },
        seen: Seen {
            gates_with_function: 310,
            gates_without_function: 0,
            nets_cut: 0,
            chains_proven: 2,
            chains_witnessed: 1,
            chains_unproven: 0,
        },
        verdict: Verdict {
            limit: Limit::Carry,
            chain: Some("C1".into()),
            sentence: "Carry limits this block: total[15:0] + level[15:0] (C1, a 16-bit adder \
                       built as ripple) takes 31 of the 33 gate delays of the longest path \
                       (input→register); rebuilt as sklansky the block is 11 gate delays deep, \
                       for 62 gates more, none wider than 4 inputs."
                .into(),
            by_path_kind: vec![
                PathKindFacts {
                    path_kind: "input→register".into(),
                    limit: Limit::Carry,
                    chain: Some("C1".into()),
                    longest: at(33),
                    longest_without_assumptions: None,
                    levels_in_carries: at(31),
                    depth_if_carry_were_free: at(4),
                    ends_at_longest: 1,
                    next_below: Some(at(31)),
                    paths_at_longest: 2,
                    ends_within_one: 1,
                    paths_within_one: Some(6),
                },
                PathKindFacts {
                    path_kind: "register→output".into(),
                    limit: Limit::Elsewhere,
                    chain: None,
                    longest: at(6),
                    longest_without_assumptions: None,
                    levels_in_carries: at(0),
                    depth_if_carry_were_free: at(6),
                    ends_at_longest: 18,
                    next_below: None,
                    paths_at_longest: 18,
                    ends_within_one: 18,
                    paths_within_one: Some(18),
                },
            ],
        },
        depth: Depth {
            longest: at(33),
            longest_without_assumptions: None,
            longest_through_transparent: None,
            late_ends: None,
            least_to_spare: None,
            unit: "gate delays".into(),
            longest_free_buffers: Some(at(33)),
            longest_in_fo4: None,
            histogram: (1..=33)
                .map(|depth| DepthBar {
                    depth: at(depth),
                    outputs: 1 + (depth % 3) as u64,
                })
                .collect(),
            longest_path: path,
            longest_path_left_out: 0,
            ports: vec![PortDepth {
                bus: "level[15:0]".into(),
                deepest_in: Some(at(33)),
                deepest_out: None,
                deepest_through: Some(at(4)),
            }],
        },
        fan_in: FanIn {
            largest: 4,
            mean: 2.05,
            histogram: vec![
                FanInBar {
                    fan_in: 1,
                    gates: 20,
                },
                FanInBar {
                    fan_in: 2,
                    gates: 270,
                },
                FanInBar {
                    fan_in: 4,
                    gates: 20,
                },
            ],
        },
        fan_out: FanOut {
            largest: 40,
            mean: 1.8,
            histogram: vec![
                FanOutBar {
                    fan_out: 1,
                    nets: 300,
                },
                FanOutBar {
                    fan_out: 40,
                    nets: 1,
                },
            ],
        },
        chains: vec![total, count],
        recommended_set: RecommendedSet {
            proposals: vec!["C1/P2".into()],
            block_depth: Change {
                before: at(33),
                after: at(11),
            },
            path_kind: Some("input→register".into()),
            kind_depth: Some(Change {
                before: at(33),
                after: at(11),
            }),
            gates_added: 110,
            gates_removed: 48,
            gate_equivalents_added: 52,
            largest_fan_in: 2,
            largest_fan_out: 9,
            takes_over: Some("input→register to alarm, beside the chain".into()),
            chains_left: Vec::new(),
            sentence: "Rebuild C1 as sklansky (C1/P2): the block goes from 33 to 11 gate delays \
                       for 110 gates built and 48 removed."
                .into(),
        },
        arrays: vec![],
        recurrences_not_listed: 0,
        unproven: vec![UnprovenRecord {
            bits: 6,
            operands: vec!["tide[5:0]".into(), "mark[5:0]".into()],
            reason: "the carry into bit 3 stayed open".into(),
            effort: 100_000,
        }],
        findings: vec![Finding {
            rule: "ripple-on-longest-path".into(),
            severity: Severity::Warning,
            chain: Some("C1".into()),
            net: None,
            line: Some(41),
            message: "31 of 33 gate delays lie in a 16-bit ripple".into(),
            advice: "Take the recommended rebuild.".into(),
            accepted: false,
        }],
        findings_left_out: 0,
        assumed: vec![],
        caution: "carrywise counts gates and estimates; it does not sign off timing.".into(),
    }
}

#[allow(dead_code)]
fn proposal(
    id: &str,
    scheme: &str,
    chain: i64,
    block: i64,
    added: u64,
    recommended: bool,
) -> ProposalRecord {
    ProposalRecord {
        id: id.into(),
        scheme: scheme.into(),
        group: None,
        levels: 4,
        valency: 2,
        select_end: false,
        on_front: true,
        recommended,
        reason: recommended.then(|| "the cheapest that takes carry off the longest path".into()),
        holds_under: if recommended {
            vec!["unit".into(), "pairs".into()]
        } else {
            vec![]
        },
        flips_under: vec![],
        chain_depth: Change {
            before: at(31),
            after: at(chain),
        },
        block_depth: Change {
            before: at(33),
            after: at(block),
        },
        takes_over: recommended.then(|| "level[3] to alarm, 11 gate delays".into()),
        gates_added: added,
        gates_removed: 48,
        gate_equivalents_added: added as i64 - 48,
        largest_fan_in: 4,
        largest_fan_out: 9,
        wire_tracks: None,
        above_bound: Some(at(2)),
        carries: None,
        network: None,
    }
}

/// The same record with [`HOSTILE`] wherever a file can put text of its own.
#[allow(dead_code)]
pub fn hostile() -> Audit {
    let mut audit = tide_logger();
    let evil = || HOSTILE.to_owned();
    audit.netlist.file = evil();
    audit.netlist.model = Some(evil());
    audit.verdict.sentence = format!("Carry limits this block: {HOSTILE} + {HOSTILE} (C1).");
    for step in &mut audit.depth.longest_path {
        step.net = evil();
    }
    for chain in &mut audit.chains {
        for operand in &mut chain.operands {
            operand.name = evil();
            operand.nets.fill(Wire::Net(evil()));
        }
        chain.carry_in = Some(Wire::Net(evil()));
        chain.carry_out = Some(evil());
        chain.sums.fill(evil());
        chain.place.instance = vec![evil(), evil()];
        for proposal in &mut chain.proposals {
            proposal.takes_over = Some(evil());
        }
    }
    audit.depth.ports[0].bus = evil();
    audit.unproven[0].operands = vec![evil(), evil()];
    audit.findings[0].net = Some(evil());
    audit.findings[0].message = format!("{HOSTILE} is late");
    audit.assumed = vec![AssumedRecord {
        assumption: evil(),
        why: evil(),
        places: 1,
        effect: Some(evil()),
    }];
    audit
}

/// The audit of a netlist under the default options.
#[allow(dead_code)]
pub fn audited(name: &str, bytes: &[u8]) -> Audit {
    let source = Source {
        name: name.to_owned(),
        bytes: bytes.to_vec(),
    };
    let parsed = format::read(&source, &ReadOptions::default())
        .unwrap_or_else(|errors| panic!("{}", errors[0]));
    let origin = Origin {
        file: source.name.clone(),
        format: parsed.format,
        sha256: audit::digest(&source.bytes),
    };
    audit::audit(&parsed.netlist, &origin, &Options::default()).expect("the defaults fit")
}

/// The audit of a file under `fixtures/`.
#[allow(dead_code)]
pub fn fixture(name: &str) -> Audit {
    let path = format!("{}/fixtures/{name}", env!("CARGO_MANIFEST_DIR"));
    let bytes = std::fs::read(&path).unwrap_or_else(|error| panic!("{path}: {error}"));
    audited(name, &bytes)
}
