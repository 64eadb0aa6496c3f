//! Which schemes are worth trying on a chain: the candidates a planner dry-runs.
//!
//! Deterministic: the order of [`all`], then valency, extra levels or group size
//! ascending; a network equal to an earlier one is left out. Bounded: above
//! [`MOST_LOG_LINEAR`] positions only schemes of linear size remain, each at its
//! default settings, and flat lookahead stops at its own cap, being cubic.

use super::{
    CarryNetwork, Growth, Limits, Profile, Scheme, Settings, all, flat_lookahead, group_lookahead,
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

/// A scheme fitted to one chain.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Fitted {
    /// The scheme's name.
    pub scheme: &'static str,
    /// Members of one group, for group lookahead.
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
        let group = scheme.takes.group.then_some(settings.group);
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
        let list = match scheme.growth {
            Growth::Quadratic | Growth::Quartic => fitting(scheme, positions, gate_inputs),
            _ => variations(scheme, positions, gate_inputs),
        };
        for settings in list {
            let next = Fitted::new(scheme, profile, settings);
            if fitted.iter().all(|earlier| earlier.network != next.network) {
                fitted.push(next);
            }
        }
    }
    fitted
}

fn fits(scheme: &Scheme, profile: &Profile) -> bool {
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

fn variations(scheme: &Scheme, positions: usize, gate_inputs: usize) -> Vec<Settings> {
    let mut list = vec![Settings::default()];
    if positions > MOST_LOG_LINEAR {
        return list;
    }
    if scheme.takes.valency {
        let most = gate_inputs.clamp(2, MOST_VALENCY);
        list = vary(&list, 2..=most, |settings, valency| Settings {
            valency,
            ..settings
        });
    }
    if scheme.takes.extra_levels {
        list = vary(&list, 1..=2, |settings, extra_levels| Settings {
            extra_levels,
            ..settings
        });
    }
    if scheme.takes.group {
        let most = gate_inputs.max(4).min(positions.saturating_sub(1));
        let sizes = GROUPS.into_iter().filter(|&size| size <= most);
        list = vary(&list, sizes, |settings, group| Settings {
            group,
            ..settings
        });
    }
    if scheme.takes.select_end {
        list = vary(&list, [false, true].into_iter(), |settings, select_end| {
            Settings {
                select_end,
                ..settings
            }
        });
    }
    list
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
