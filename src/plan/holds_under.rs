//! Whether a recommendation would be the same under other delay models.
//!
//! Few wide gates against many narrow ones has a sweet spot, and where it lies
//! depends on what a gate is said to cost. So the chains with a recommendation are
//! planned once more under every model that needs no file, and the scheme chosen
//! there, with its group size, is compared. One timing is held at a time, and only
//! the first chains are asked about: past [`MOST_ASKED`] nobody reads the answers
//! one by one.

use super::ground::Ground;
use super::propose::{ChainPlan, plan};
use super::settings::Settings;
use crate::chain::Chain;
use crate::netlist::{Netlist, Topology};
use crate::timing::{DelayModel, Timing};

/// Most chains whose recommendation is tried under other models.
pub const MOST_ASKED: usize = 16;

/// Under which models a recommendation stays and under which it does not.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct HoldsUnder {
    /// The same scheme is chosen, in the order the models are offered; the model of
    /// the settings first.
    pub holds: Vec<&'static str>,
    /// Another is, or none.
    pub flips: Vec<&'static str>,
}

/// By chain: what holds of its recommendation; `None` where there is none.
pub fn holds_under(
    netlist: &Netlist,
    topology: &Topology,
    settings: &Settings,
    chains: &[Chain],
    plans: &[ChainPlan],
) -> Vec<Option<HoldsUnder>> {
    let chosen = |plan: &ChainPlan| {
        let fitted = plan.recommended.map(|i| &plan.proposals[i].fitted)?;
        Some((fitted.scheme, fitted.group))
    };
    let mut found: Vec<Option<HoldsUnder>> = plans
        .iter()
        .map(|plan| {
            chosen(plan).map(|_| HoldsUnder {
                holds: vec![settings.model.name()],
                flips: Vec::new(),
            })
        })
        .collect();
    let asked: Vec<usize> = (0..plans.len())
        .filter(|&i| found[i].is_some())
        .take(MOST_ASKED)
        .collect();
    if asked.is_empty() {
        return found;
    }
    for model in DelayModel::ALL {
        if model == settings.model {
            continue;
        }
        let timing = Timing::of(netlist, topology, model);
        let settings = Settings {
            model,
            ..settings.clone()
        };
        let ground = Ground::of(netlist, topology, &timing, &settings);
        for &i in &asked {
            let other = plan(&ground, &chains[i]);
            let same = chosen(&other) == chosen(&plans[i]);
            if let Some(answer) = &mut found[i] {
                let list = if same {
                    &mut answer.holds
                } else {
                    &mut answer.flips
                };
                list.push(model.name());
            }
        }
    }
    found
}
