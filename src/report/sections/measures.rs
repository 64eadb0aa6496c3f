//! Path kinds, histograms and port depths.

use super::cut;
use crate::audit::record::{
    Depth, DepthBar, FanIn, FanInBar, FanOut, FanOutBar, Limit, PathKindFacts, PortDepth,
};
use crate::report::number::{counted, depth_in, doubling_bars, grouped, mean, or_dash, time_bars};
use crate::report::outline::{Block, Caps, Grid, Section};
use crate::report::text::clipped;
use crate::timing::{MANY, Time};

/// Bars per histogram.
const BARS: usize = 12;

/// The kinds of path, longest first.
pub fn paths(kinds: &[PathKindFacts], caps: Caps) -> Option<Section> {
    if kinds.is_empty() {
        return None;
    }
    let columns = vec![
        ("path kind", false),
        ("limit", false),
        ("longest", true),
        ("nothing assumed", true),
        ("in carries", true),
        ("carries free", true),
        ("ends there", true),
        ("next below", true),
    ];
    let row = |kind: &PathKindFacts| {
        let PathKindFacts {
            path_kind,
            limit,
            chain,
            longest,
            longest_without_assumptions,
            levels_in_carries,
            depth_if_carry_were_free,
            ends_at_longest,
            next_below,
            // Told below, of the first kind.
            paths_at_longest: _,
            ends_within_one: _,
            paths_within_one: _,
        } = kind;
        vec![
            clipped(path_kind, caps.name),
            match (limit, chain) {
                (Limit::Carry, Some(chain)) => format!("carry, {}", clipped(chain, caps.name)),
                (Limit::Carry, None) => "carry".to_owned(),
                (Limit::Elsewhere, _) => "elsewhere".to_owned(),
                (Limit::Unknown, _) => "unknown".to_owned(),
            },
            longest.to_string(),
            or_dash(longest_without_assumptions.map(|at| at.to_string())),
            levels_in_carries.to_string(),
            depth_if_carry_were_free.to_string(),
            grouped(*ends_at_longest),
            or_dash(next_below.map(|at| at.to_string())),
        ]
    };
    let rows = kinds.iter().take(caps.rows).map(row).collect();
    let mut blocks = cut(columns, rows, kinds.len(), caps.rows, "kinds of path");
    blocks.extend(near(&kinds[0]).map(Block::Text));
    Some(Section {
        heading: "Paths",
        aside: false,
        blocks,
    })
}

/// How much is as long as the longest path, or nearly: what has to be shortened
/// before the block gets one shallower.
fn near(kind: &PathKindFacts) -> Option<String> {
    if kind.longest == Time::ZERO {
        return None;
    }
    let many = |count: u64| match count {
        1 => "1 path".to_owned(),
        MANY.. => format!("{} paths or more", grouped(MANY)),
        n => format!("{} paths", grouped(n)),
    };
    let are = |count: u64| if count == 1 { "is" } else { "are" };
    let there = kind.paths_at_longest;
    let ends = counted(kind.ends_within_one, "end", "ends");
    let within = match kind.paths_within_one {
        Some(paths) => format!("{}, to {ends},", many(paths)),
        None => format!("paths to {ends}"),
    };
    let come = match kind.paths_within_one {
        Some(1) => "comes",
        _ => "come",
    };
    Some(format!(
        "{} {} as long as the longest ({}); {within} {come} within one of it.",
        many(there),
        are(there),
        kind.path_kind
    ))
}

/// Fan-in, fan-out and depth, side by side.
pub fn measures(depth: &Depth, fan_in: &FanIn, fan_out: &FanOut, caps: Caps) -> Option<Section> {
    let Depth {
        longest,
        longest_without_assumptions: _,
        longest_through_transparent,
        late_ends,
        least_to_spare,
        unit,
        longest_free_buffers,
        longest_in_fo4,
        histogram: depth_bars,
        longest_path: _,
        longest_path_left_out: _,
        ports: _,
    } = depth;
    let mut lead = format!(
        "Gates have {} at most and {} on average; nets have {} at most and {} on average.",
        counted(fan_in.largest, "input", "inputs"),
        mean(fan_in.mean),
        counted(fan_out.largest, "reader", "readers"),
        mean(fan_out.mean),
    );
    if let Some(open) = longest_through_transparent {
        let open = depth_in(*open, unit);
        lead.push_str(&format!(
            " With its transparent registers open the block is {open} deep."
        ));
    }
    if let (Some(late), Some(spare)) = (late_ends, least_to_spare) {
        let least = match *spare < Time::ZERO {
            true => format!("the latest by {}", depth_in(spare.abs(), unit)),
            false => format!("the nearest has {} to spare", depth_in(*spare, unit)),
        };
        lead.push_str(&match late {
            0 => format!(" Every end with a time to hold is in time; {least}."),
            n => format!(
                " Late {} {}, {least}.",
                if *n == 1 { "is" } else { "are" },
                counted(*n, "end", "ends")
            ),
        });
    }
    if let Some(free) = longest_free_buffers {
        if free == longest {
            lead.push_str(" The depth is the same with buffers and inverters free.");
        } else {
            let free = depth_in(*free, unit);
            lead.push_str(&format!(
                " With buffers and inverters free the depth is {free}."
            ));
        }
    }
    if let Some(fo4) = longest_in_fo4 {
        lead.push_str(&format!(
            " The depth is that of {fo4} inverters which drive four like them (FO4)."
        ));
    }
    let gates = |&FanInBar { fan_in, gates }: &FanInBar| (fan_in as i64, gates);
    let nets = |&FanOutBar { fan_out, nets }: &FanOutBar| (fan_out as i64, nets);
    let ends = |&DepthBar { depth, outputs }: &DepthBar| (depth, outputs);
    let bars = BARS.min(caps.rows.max(1));
    let columns = [
        doubling_bars(
            &fan_in.histogram.iter().map(gates).collect::<Vec<_>>(),
            bars,
        ),
        doubling_bars(
            &fan_out.histogram.iter().map(nets).collect::<Vec<_>>(),
            bars,
        ),
        time_bars(&depth_bars.iter().map(ends).collect::<Vec<_>>(), bars),
    ];
    let height = columns.iter().map(Vec::len).max().unwrap_or(0);
    let rows = (0..height).map(|i| {
        columns
            .iter()
            .flat_map(|column| match column.get(i) {
                Some((values, count)) => [values.clone(), grouped(*count)],
                None => [String::new(), String::new()],
            })
            .collect()
    });
    let grid = Grid {
        columns: vec![
            ("gate inputs", true),
            ("gates", true),
            ("net readers", true),
            ("nets", true),
            ("depth", true),
            ("path ends", true),
        ],
        rows: rows.collect(),
    };
    let mut blocks = vec![Block::Text(lead)];
    if height > 0 {
        blocks.push(Block::Grid(grid));
    }
    Some(Section {
        heading: "Measures",
        aside: true,
        blocks,
    })
}

/// Depth by port bus.
pub fn ports(depth: &Depth, caps: Caps) -> Option<Section> {
    if depth.ports.is_empty() {
        return None;
    }
    let columns = vec![
        ("port", false),
        ("to a register", true),
        ("from a register", true),
        ("straight through", true),
    ];
    let row = |port: &PortDepth| {
        let PortDepth {
            bus,
            deepest_in,
            deepest_out,
            deepest_through,
        } = port;
        vec![
            clipped(bus, caps.name),
            or_dash(deepest_in.map(|at| at.to_string())),
            or_dash(deepest_out.map(|at| at.to_string())),
            or_dash(deepest_through.map(|at| at.to_string())),
        ]
    };
    let rows = depth.ports.iter().take(caps.rows).map(row).collect();
    Some(Section {
        heading: "Depth by port",
        aside: true,
        blocks: cut(columns, rows, depth.ports.len(), caps.rows, "ports"),
    })
}
