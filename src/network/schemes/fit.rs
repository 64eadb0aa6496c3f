//! Which schemes are worth trying on a chain: the candidates a planner dry-runs.
//!
//! Deterministic: the order of [`all`], then valency, extra levels or group size
//! ascending; a network equal to an earlier one is left out. Bounded: above
//! [`MOST_LOG_LINEAR`] positions only schemes of linear size remain, each at its
//! default settings, and flat lookahead stops at its own cap, being cubic.

use super::{
    CarryNetwork, FanOuts, Growth, Limits, Profile, Scheme, Settings, all, by_name, flat_lookahead,
    group_lookahead,
};
use crate::network::{and_or_path, arrival_aware};

/// The widest chain a scheme of n·log n size, or any variation, is proposed for.
pub const MOST_LOG_LINEAR: usize = 4096;

/// The widest chain for which schemes that fit arrivals are also tried a level
/// later than they could be.
const MOST_RELAXED: usize = 128;

/// The highest valency proposed, whatever the gate inputs.
const MOST_VALENCY: usize = 6;

/// Group sizes tried, as far as gate inputs allow; up to four always.
const GROUPS: [usize; 8] = [2, 3, 4, 5, 6, 8, 16, 32];

/// Block sizes tried beside growing blocks.
const BLOCKS: [usize; 2] = [4, 8];

/// Sparseness tried.
const SPARSENESS: [usize; 3] = [2, 4, 8];

/// A scheme fitted to one chain.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Fitted {
    /// The scheme's name.
    pub scheme: &'static str,
    /// Members of one group or block, where the scheme has them all alike.
    pub group: Option<usize>,
    /// Levels of lookahead for group lookahead; for every other scheme the
    /// combine nodes on the longest path.
    pub levels: usize,
    /// Most spans one combine node joins.
    pub valency: usize,
    /// Whether some sum ends in a select.
    pub select_end: bool,
    /// The settings it was made with.
    pub settings: Settings,
    /// The carry network.
    pub network: CarryNetwork,
}

impl Fitted {
    /// Fits one scheme.
    pub fn new(scheme: &Scheme, profile: &Profile, settings: Settings) -> Self {
        let network = scheme.network_for(profile, settings);
        let grouped = scheme.takes.group && !(scheme.takes.growing && settings.growing);
        let group = grouped.then_some(settings.group);
        let levels = match group {
            Some(size) if scheme.name == group_lookahead::SCHEME.name => {
                group_lookahead::lookahead_levels(profile.positions(), size)
            }
            _ => network.levels(),
        };
        Self {
            scheme: scheme.name,
            group,
            levels,
            valency: network.largest_valency(),
            select_end: (0..network.positions()).any(|i| network.sum(i).is_some()),
            settings,
            network,
        }
    }

    /// What sets it apart from other variations of its scheme beside group,
    /// valency and select end, in words.
    pub fn variant(&self) -> Option<String> {
        let takes = by_name(self.scheme)?.takes;
        let settings = self.settings;
        let positions = self.network.positions() + usize::from(self.network.lowest() < 0);
        let levels = positions.next_power_of_two().trailing_zeros();
        if takes.fan_outs {
            let folds = settings.folds as u32;
            let list = settings.fan_outs.list(levels.saturating_sub(folds));
            let list: Vec<String> = list.iter().map(usize::to_string).collect();
            return Some(format!("fan-outs {}", list.join(" ")));
        }
        if takes.extra_levels {
            return Some(match settings.extra_levels {
                0 => return None,
                1 => "1 extra level".to_owned(),
                n => format!("{n} extra levels"),
            });
        }
        if takes.growing && settings.growing {
            return Some("growing blocks".to_owned());
        }
        takes.select_inside.then(|| {
            let inside = if settings.select_inside {
                "select inside"
            } else {
                "ripple inside"
            };
            inside.to_owned()
        })
    }
}

/// The sensible proposals for a chain of equal arrivals, where a gate may have
/// `gate_inputs` inputs. The first is always ripple.
pub fn candidates(positions: usize, has_carry_in: bool, gate_inputs: usize) -> Vec<Fitted> {
    let limits = Limits {
        gate_inputs,
        covers: false,
    };
    candidates_for(&Profile::even(positions, has_carry_in, limits))
}

/// The sensible proposals for a chain. The first is always ripple.
pub fn candidates_for(profile: &Profile) -> Vec<Fitted> {
    let positions = profile.positions();
    let gate_inputs = profile.costs.limits().gate_inputs;
    let mut fitted: Vec<Fitted> = Vec::new();
    for scheme in all().iter().filter(|scheme| fits(scheme, profile)) {
        for settings in variations(scheme, positions, gate_inputs) {
            let next = Fitted::new(scheme, profile, settings);
            if fitted.iter().all(|earlier| earlier.network != next.network) {
                fitted.push(next);
            }
        }
    }
    fitted
}

/// Whether a scheme is tried on a chain at all: its size, and what gates may be.
pub fn fits(scheme: &Scheme, profile: &Profile) -> bool {
    let positions = profile.positions();
    match scheme.growth {
        Growth::Quadratic => positions <= arrival_aware::MOST_POSITIONS,
        Growth::Quartic => {
            positions <= and_or_path::MOST_POSITIONS && !profile.costs.limits().covers
        }
        Growth::Linear => true,
        Growth::LogLinear => positions <= MOST_LOG_LINEAR,
        Growth::Cubic => positions <= flat_lookahead::MOST_POSITIONS,
    }
}

/// The settings a scheme is tried with. What is known to be no better than its
/// neighbours is left out; [`every_variation`] has it all.
pub fn variations(scheme: &Scheme, positions: usize, gate_inputs: usize) -> Vec<Settings> {
    if matches!(scheme.growth, Growth::Quadratic | Growth::Quartic) {
        return fitting(scheme, positions, gate_inputs);
    }
    let mut list = vec![Settings::default()];
    if positions > MOST_LOG_LINEAR {
        return list;
    }
    let takes = scheme.takes;
    let set_group = |settings, group| Settings { group, ..settings };
    if takes.valency {
        let most = gate_inputs.clamp(2, MOST_VALENCY);
        list = vary(&list, 2..=most, |settings, valency| Settings {
            valency,
            ..settings
        });
    }
    if takes.extra_levels {
        list = vary(&list, 1..=2, |settings, extra_levels| Settings {
            extra_levels,
            ..settings
        });
    }
    if takes.fan_outs {
        let levels = (positions + 1).next_power_of_two().trailing_zeros();
        let tracks = [levels.saturating_sub(2), levels / 2];
        let members = tracks.map(|t| FanOuts::with_tracks(levels, t));
        list = vary(&list, members.into_iter(), |settings, fan_outs| Settings {
            fan_outs,
            ..settings
        });
    }
    if takes.growing {
        let growing = Settings {
            growing: true,
            ..Settings::default()
        };
        list = vary(&list, BLOCKS.into_iter(), set_group);
        list.push(growing);
    } else if takes.select_inside {
        list.retain(|each| each.valency == 2);
        list = vary(&list, SPARSENESS.into_iter(), set_group);
        list = vary(
            &list,
            [false, true].into_iter(),
            |settings, select_inside| Settings {
                select_inside,
                ..settings
            },
        );
    } else if takes.group {
        let most = gate_inputs.max(4).min(positions.saturating_sub(1));
        let sizes = GROUPS.into_iter().filter(|&size| size <= most);
        list = vary(&list, sizes, set_group);
    }
    // A select end is for networks of few levels; groups and fan-outs have their
    // say without one.
    let quick = scheme.growth == Growth::LogLinear && !takes.group && !takes.fan_outs;
    if takes.select_end && quick {
        let selected = list.iter().filter(|each| each.extra_levels < 2);
        let selected: Vec<Settings> = selected
            .map(|&settings| Settings {
                select_end: true,
                ..settings
            })
            .collect();
        list.extend(selected);
    }
    list
}

/// Every way a scheme may be varied on so many positions, with gates of at most
/// `gate_inputs`; what is proposed for a chain and more: every fold, every
/// fan-out vector. Panics above 128 positions, where the vectors are thousands.
pub fn every_variation(scheme: &Scheme, positions: usize, gate_inputs: usize) -> Vec<Settings> {
    assert!(positions <= 128, "too many fan-out vectors");
    let mut list = variations(scheme, positions, gate_inputs);
    let levels = (positions + 1).next_power_of_two().trailing_zeros();
    if scheme.takes.extra_levels && scheme.growth == Growth::LogLinear {
        list = vary(&list, 0..levels as usize, |settings, extra_levels| {
            Settings {
                extra_levels,
                ..settings
            }
        });
    }
    if scheme.takes.fan_outs {
        let members = FanOuts::every(levels).into_iter();
        list = vary(&list, members, |settings, fan_outs| Settings {
            fan_outs,
            ..settings
        });
    }
    let mut once: Vec<Settings> = Vec::with_capacity(list.len());
    let mut seen = rustc_hash::FxHashSet::default();
    once.extend(list.into_iter().filter(|&settings| seen.insert(settings)));
    once
}

/// What a chain of so many positions is not tried with, as a clause.
pub fn left_out(positions: usize) -> Option<String> {
    (positions > MOST_LOG_LINEAR).then(|| {
        format!(
            "schemes that grow faster than the width, and variations, are tried up to \
             {MOST_LOG_LINEAR} positions only"
        )
    })
}

/// Variations of a scheme that fits itself to arrivals: the earliest and, where
/// that does not take long, a level later.
fn fitting(scheme: &Scheme, positions: usize, gate_inputs: usize) -> Vec<Settings> {
    let most = gate_inputs.clamp(2, MOST_VALENCY);
    let valencies = if scheme.takes.valency {
        2..=most
    } else {
        2..=2
    };
    let valencies = valencies.filter(|&valency| valency == 2 || valency == most);
    let extra = if positions <= MOST_RELAXED {
        0..=1
    } else {
        0..=0
    };
    let mut list = vec![Settings::default()];
    list = vary(&list, valencies, |settings, valency| Settings {
        valency,
        ..settings
    });
    list = vary(&list, extra, |settings, extra_levels| Settings {
        extra_levels,
        ..settings
    });
    vary(&list, [false, true].into_iter(), |settings, select_end| {
        Settings {
            select_end,
            ..settings
        }
    })
}

fn vary<T>(
    list: &[Settings],
    values: impl Iterator<Item = T> + Clone,
    set: impl Fn(Settings, T) -> Settings,
) -> Vec<Settings> {
    let varied = list
        .iter()
        .flat_map(|&settings| values.clone().map(move |value| (settings, value)));
    varied
        .map(|(settings, value)| set(settings, value))
        .collect()
}
