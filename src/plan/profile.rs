//! What a chain asks of its network, in the words of the carry networks.
//!
//! Arrivals are those of the very gates a dry run would make for g, p and the
//! half sum. Required times leave the block as deep as the longest path beside
//! the chain, so what has a longer tail behind it has to be ready earlier.

use super::overlay::GateStyle;
use super::site::{Role, Site};
use crate::network::profile::LONG_BEFORE;
use crate::network::{Costs, GateSink, Profile, Required};
use crate::timing::NEVER;

impl Site<'_> {
    /// The chain's arrivals, required times and costs.
    pub fn profile(&self) -> Profile {
        let mut overlay = self.base.clone();
        let (mut generate, mut propagate, mut half_sum) = (Vec::new(), Vec::new(), Vec::new());
        let at = |time: i32| time.max(LONG_BEFORE);
        for (&a, &b) in self.addends.a.iter().zip(&self.addends.b) {
            let g = overlay.and(&[a, b]);
            let none = overlay.and(&[!a, !b]);
            let h = overlay.xor(a, b);
            generate.push(at(overlay.arrival(g)));
            propagate.push(at(overlay.arrival(none)));
            half_sum.push(at(overlay.arrival(h)));
        }
        let carry_in = self.addends.carry_in.map(|c| at(overlay.arrival(c)));
        let settings = self.ground.settings;
        let ands_only = settings.style == GateStyle::AndInverter;
        let price = |function: &_| settings.model.pin_delays(function);
        Profile {
            generate,
            propagate,
            half_sum,
            carry_in,
            required: Some(self.required()),
            costs: Costs::of(settings.limits(), ands_only, price),
        }
    }

    fn required(&self) -> Required {
        let positions = self.addends.a.len();
        let mut required = Required {
            sums: vec![None; positions],
            carries: vec![None; positions],
        };
        let beside = self.beside.iter().filter_map(|each| each.longest);
        // A tick less than that path: on it, carry would still be the limit.
        let goal = beside.map(|(time, _)| time - 1).max().unwrap_or(0);
        for needed in &self.needed {
            let tails = self.tails.iter();
            let tail = tails.filter_map(|(_, tails)| tails.get(&needed.net)).max();
            let Some(tail) = tail.filter(|&&tail| tail != NEVER) else {
                continue;
            };
            let Role {
                position, carry, ..
            } = needed.role;
            let list = if carry {
                &mut required.carries
            } else {
                &mut required.sums
            };
            let by = goal.saturating_sub(*tail);
            let slot = &mut list[position];
            *slot = Some(slot.map_or(by, |known| known.min(by)));
        }
        required
    }
}
