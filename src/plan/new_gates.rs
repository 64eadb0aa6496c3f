//! The gates a dry run would make, as they would be written, and every load that
//! its rebuild changes. Only asked for where delay depends on load: there the
//! polarity a gate is written in matters, and so does what reads it.
//!
//! A *place* is where a signal is found in the rebuilt netlist: a constant, a net
//! that was there before, or a slot, which is a net driven anew or a new one.

use super::dry_run::DryRun;
use super::overlay::{GateStyle, Node, Operator};
use super::site::Site;
use crate::netlist::{Driver, Function, GateId, NetId, PinPrice};
use rustc_hash::FxHashMap;
use std::rc::Rc;

/// See the head of the module.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Place {
    /// A constant.
    Constant,
    /// A net that stays as it was.
    Net(NetId),
    /// A net with a new driver.
    Slot(u32),
}

/// One new gate.
pub(super) struct NewGate {
    pub(super) slot: u32,
    pub(super) inputs: Vec<Place>,
    pub(super) prices: Rc<[PinPrice]>,
}

/// See the head of the module.
pub(super) struct NewGates {
    /// Inputs before what reads them.
    pub(super) list: Vec<NewGate>,
    /// By node: where it is found, and whether inverted there.
    pub(super) shown: Vec<Option<(Place, bool)>>,
    /// By needed net of the site: where its readers find it.
    pub(super) needed: Vec<Place>,
    /// By slot.
    pub(super) slot_loads: Vec<i32>,
    /// Of nets that stay, where it changes.
    pub(super) loads: FxHashMap<NetId, i32>,
}

impl NewGates {
    /// The gates of `run`; `loads` are those of the nets as they are.
    pub(super) fn of(run: &DryRun<'_, '_>, loads: &[i32]) -> Self {
        let mut maker = Maker::new(run);
        maker.make();
        maker.finish(loads)
    }

    /// The gates that stay and whose load changes, ascending.
    pub(super) fn reloaded_drivers(&self, site: &Site<'_>) -> Vec<GateId> {
        let netlist = site.ground.netlist;
        let mut gates: Vec<GateId> = Vec::new();
        // Sorted below.
        #[allow(clippy::iter_over_hash_type)]
        for &net in self.loads.keys() {
            match netlist.driver(net) {
                Driver::Gate(gate) => gates.push(gate),
                Driver::Many(index) => {
                    let drivers = &netlist.contended()[index as usize].drivers;
                    gates.extend(drivers.iter().filter_map(|&(driver, _)| match driver {
                        Driver::Gate(gate) => Some(gate),
                        _ => None,
                    }));
                }
                _ => {}
            }
        }
        gates.sort_unstable();
        gates.dedup();
        gates
    }
}

struct Maker<'r, 's, 'a> {
    run: &'r DryRun<'s, 'a>,
    style: GateStyle,
    list: Vec<NewGate>,
    shown: Vec<Option<(Place, bool)>>,
    slots: u32,
    /// Load added to slots and to nets.
    slot_loads: Vec<i32>,
    added: FxHashMap<NetId, i32>,
    prices: FxHashMap<Function, Rc<[PinPrice]>>,
}

impl<'r, 's, 'a> Maker<'r, 's, 'a> {
    fn new(run: &'r DryRun<'s, 'a>) -> Self {
        let style = run.overlay.style();
        let own = match style {
            GateStyle::AndInverter => 0,
            _ => run.site.needed.len(),
        };
        Self {
            run,
            style,
            list: Vec::new(),
            shown: vec![None; run.overlay.len()],
            slots: own as u32,
            slot_loads: vec![0; own],
            added: FxHashMap::default(),
            prices: FxHashMap::default(),
        }
    }

    fn new_slot(&mut self) -> u32 {
        self.slots += 1;
        self.slot_loads.push(0);
        self.slots - 1
    }

    fn make(&mut self) {
        let run = self.run;
        let first = run.first_nets();
        for node in run.overlay.nodes() {
            match run.overlay.operator(node) {
                Operator::Constant => self.shown[node.index()] = Some((Place::Constant, false)),
                Operator::Net(net) => self.shown[node.index()] = Some((Place::Net(net), false)),
                _ => {
                    if let Some(existing) = run.overlay.existing(node) {
                        let place = Place::Net(existing.net);
                        self.shown[node.index()] = Some((place, existing.inverted));
                    } else if run.made.is_made[node.index()] {
                        let (slot, inverted) = match first.get(&node) {
                            Some(&(index, inverted)) => (index as u32, inverted),
                            None => (self.new_slot(), false),
                        };
                        self.gate(node, slot, inverted);
                        self.shown[node.index()] = Some((Place::Slot(slot), inverted));
                    }
                }
            }
        }
        if self.style == GateStyle::AndInverter {
            return;
        }
        // What is left of the needed nets: gates of their own, buffers, inverters.
        let mut driven: Vec<bool> = vec![false; run.site.needed.len()];
        for gate in &self.list {
            if let Some(flag) = driven.get_mut(gate.slot as usize) {
                *flag = true;
            }
        }
        for (index, literal) in run.literals.iter().enumerate() {
            if driven[index] {
                continue;
            }
            let node = literal.node();
            if run.overlay.is_gate(node) {
                self.gate(node, index as u32, literal.is_inverted());
                continue;
            }
            let (place, inverted) = self.shown[node.index()].unwrap_or((Place::Constant, false));
            if place != Place::Constant {
                let function = Function::buffer(inverted != literal.is_inverted());
                self.push(function, index as u32, vec![place]);
            }
        }
    }

    fn gate(&mut self, node: Node, slot: u32, inverted: bool) {
        let overlay = &self.run.overlay;
        let (mut places, mut flags) = (Vec::new(), Vec::new());
        for input in overlay.inputs(node) {
            let known = self.shown[input.node().index()];
            let (place, turned) = known.unwrap_or((Place::Constant, false));
            places.push(place);
            flags.push(turned != input.is_inverted());
        }
        let function = overlay.operator(node).written(&flags, inverted);
        self.push(function, slot, places);
    }

    fn push(&mut self, function: Function, slot: u32, inputs: Vec<Place>) {
        let model = self.run.site.ground.timing.delays.model();
        let free_inversions = self.style == GateStyle::AndInverter;
        let prices = self.prices.entry(function);
        let prices = Rc::clone(
            prices.or_insert_with_key(|function| model.prices(function, free_inversions).into()),
        );
        for (&place, price) in inputs.iter().zip(prices.iter()) {
            self.load(place, price.load);
        }
        self.list.push(NewGate {
            slot,
            inputs,
            prices,
        });
    }

    fn load(&mut self, place: Place, load: i32) {
        let slot = match place {
            Place::Constant => return,
            Place::Net(net) => self.added.entry(net).or_insert(0),
            Place::Slot(slot) => &mut self.slot_loads[slot as usize],
        };
        *slot = slot.saturating_add(load);
    }

    fn finish(mut self, loads: &[i32]) -> NewGates {
        let run = self.run;
        let site = run.site;
        let taken = taken_loads(run);
        let left = |net: NetId| {
            let taken = taken.get(&net).copied().unwrap_or(0);
            loads[net.index()].saturating_sub(taken)
        };
        let mut needed = Vec::with_capacity(site.needed.len());
        for (index, (each, literal)) in site.needed.iter().zip(&run.literals).enumerate() {
            let place = if self.style == GateStyle::AndInverter {
                let shown = self.shown[literal.node().index()];
                shown.map_or(Place::Constant, |(place, _)| place)
            } else {
                Place::Slot(index as u32)
            };
            self.load(place, left(each.net));
            needed.push(place);
        }
        let mut changed: FxHashMap<NetId, i32> = FxHashMap::default();
        // A map is filled; no order shows.
        #[allow(clippy::iter_over_hash_type)]
        for &net in taken.keys().chain(self.added.keys()) {
            if site.replaced.contains_key(&net) {
                continue;
            }
            let added = self.added.get(&net).copied().unwrap_or(0);
            let now = left(net).saturating_add(added);
            if now != loads[net.index()] {
                changed.insert(net, now);
            }
        }
        NewGates {
            list: self.list,
            shown: self.shown,
            needed,
            slot_loads: self.slot_loads,
            loads: changed,
        }
    }
}

/// The load that goes with the gates removed, by net.
fn taken_loads(run: &DryRun<'_, '_>) -> FxHashMap<NetId, i32> {
    let ground = run.site.ground;
    let (netlist, delays) = (ground.netlist, &ground.timing.delays);
    let mut taken: FxHashMap<NetId, i32> = FxHashMap::default();
    // Sums do not depend on the order of the set.
    #[allow(clippy::iter_over_hash_type)]
    for &gate in run.site.removed.iter().chain(&run.swept) {
        let prices = delays.prices_of(netlist, gate);
        for (&net, price) in netlist.fan_ins(gate).iter().zip(prices) {
            let slot = taken.entry(net).or_insert(0);
            *slot = slot.saturating_add(price.load);
        }
    }
    taken
}
