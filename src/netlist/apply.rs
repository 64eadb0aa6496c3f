//! Makes the netlist that holds under assumptions.
//!
//! Starts that no pattern tells apart form a set, and so do ends; whether a path
//! counts then depends on two set numbers only. An entry of which one side is
//! open bars what the other side names and needs no set.

use super::asserted::{Asserted, BARRED, EndPoint, Pairing};
use super::assume::{Assumed, Assumptions, Item, MOST_SETS, Misfit, Paths};
use super::graph::Topology;
use super::id::{BoxId, NetId, RegisterId};
use super::model::{Driver, Netlist};
use super::passage::open_boxes;
use super::pattern::Pattern;
use super::tie::tie;
use rustc_hash::{FxHashMap, FxHashSet};
use std::collections::BTreeMap;

impl Assumptions {
    /// Whether nothing is asserted.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// The netlist under these assumptions.
    ///
    /// # Errors
    /// When they do not fit `netlist`.
    pub fn apply(&self, netlist: &Netlist) -> Result<Assumed, Misfit> {
        let mut work = Work {
            assumptions: self,
            netlist: netlist.clone(),
            matched: BTreeMap::new(),
            passed: BTreeMap::new(),
        };
        let ties = work.ties()?;
        tie(&mut work.netlist, &ties);
        open_boxes(&mut work.netlist, &self.box_delay, &mut work.matched)?;
        let topology = Topology::of(&work.netlist);
        let mut asserted = Asserted::default();
        work.bar_nets(&mut asserted)?;
        work.arrivals(&mut asserted)?;
        let required = work.required()?;
        work.pair(&topology, &mut asserted)?;
        if asserted != Asserted::default() {
            work.netlist.asserted = Some(Box::new(asserted));
        }
        Ok(Assumed {
            netlist: work.netlist,
            matched: work.matched,
            required,
        })
    }

    /// The patterns that tell starts apart, in the order of the entries.
    fn froms(&self) -> Vec<(Item, Option<&Pattern>)> {
        let not = self.not_a_path.iter().enumerate();
        let cycles = self.cycles.iter().enumerate();
        not.map(|(i, each)| (Item::NotFrom(i), each.paths.from()))
            .chain(cycles.map(|(i, each)| (Item::CyclesFrom(i), each.from.as_ref())))
            .collect()
    }

    /// The patterns that tell ends apart, in the same order.
    fn tos(&self) -> Vec<(Item, Option<&Pattern>)> {
        let not = self.not_a_path.iter().enumerate();
        let cycles = self.cycles.iter().enumerate();
        not.map(|(i, each)| (Item::NotTo(i), each.paths.to()))
            .chain(cycles.map(|(i, each)| (Item::CyclesTo(i), each.to.as_ref())))
            .collect()
    }
}

fn is_everything(pattern: Option<&Pattern>) -> bool {
    pattern.is_none_or(Pattern::is_everything)
}

struct Work<'a> {
    assumptions: &'a Assumptions,
    netlist: Netlist,
    matched: BTreeMap<Item, usize>,
    /// By entry that excludes a part of the paths between two sets, the nets that
    /// part passes.
    passed: BTreeMap<usize, FxHashSet<NetId>>,
}

impl Work<'_> {
    fn note(
        &mut self,
        item: Item,
        pattern: &Pattern,
        what: &'static str,
        count: usize,
    ) -> Result<(), Misfit> {
        if count == 0 {
            return Err(Misfit::NoMatch {
                item,
                pattern: pattern.text().to_owned(),
                what,
            });
        }
        self.matched.insert(item, count);
        Ok(())
    }

    fn ties(&mut self) -> Result<Vec<(NetId, bool)>, Misfit> {
        let tied = &self.assumptions.tied;
        if tied.is_empty() {
            return Ok(Vec::new());
        }
        let mut values: BTreeMap<NetId, bool> = BTreeMap::new();
        let mut counts = vec![0; tied.len()];
        for net in self.netlist.nets() {
            if self.netlist.local_name(net).is_none()
                && matches!(self.netlist.driver(net), Driver::Constant(_))
            {
                continue;
            }
            let name = self.netlist.net_name(net);
            for (i, each) in tied.iter().enumerate() {
                if !each.nets.matches(&name) {
                    continue;
                }
                let item = Item::Tied(i);
                counts[i] += 1;
                if matches!(self.netlist.driver(net), Driver::Many(_)) {
                    return Err(Misfit::Contended { item, net: name });
                }
                if values.insert(net, each.value) == Some(!each.value) {
                    return Err(Misfit::BothValues { item, net: name });
                }
            }
        }
        for (i, each) in tied.iter().enumerate() {
            self.note(Item::Tied(i), &each.nets, "a net", counts[i])?;
        }
        Ok(values.into_iter().collect())
    }

    /// Nets that no path may pass.
    fn bar_nets(&mut self, asserted: &mut Asserted) -> Result<(), Misfit> {
        for (i, each) in self.assumptions.not_a_path.iter().enumerate() {
            let (through, always) = match &each.paths {
                Paths::Through(through) => (through, true),
                Paths::Part { through, .. } => (through, false),
                Paths::Between { .. } => continue,
            };
            let mut named = FxHashSet::default();
            for net in self.netlist.nets() {
                if through.matches(&self.netlist.net_name(net)) {
                    named.insert(net);
                }
            }
            self.note(Item::NotThrough(i), through, "a net", named.len())?;
            if always {
                // Where the net is itself a start.
                let starts = named.iter().map(|&net| (net, BARRED));
                asserted.starts.extend(starts);
                asserted.barred.extend(named);
            } else {
                self.passed.insert(i, named);
            }
        }
        Ok(())
    }

    fn arrivals(&mut self, asserted: &mut Asserted) -> Result<(), Misfit> {
        for (i, each) in self.assumptions.arrival.iter().enumerate() {
            let mut count = 0;
            for &net in self.netlist.inputs() {
                if each.ports.matches(&self.netlist.net_name(net)) {
                    count += 1;
                    asserted.arrivals.insert(net, each.at);
                }
            }
            self.note(Item::Arrival(i), &each.ports, "an input port", count)?;
        }
        Ok(())
    }

    fn required(&mut self) -> Result<Vec<Vec<u32>>, Misfit> {
        let mut all = Vec::new();
        for (i, each) in self.assumptions.required.iter().enumerate() {
            let named = |(n, output)| {
                let name = self.netlist.output_name(output);
                each.ports.matches(&name).then_some(n as u32)
            };
            let outputs = self.netlist.outputs().iter().enumerate();
            let ports: Vec<u32> = outputs.filter_map(named).collect();
            self.note(
                Item::Required(i),
                &each.ports,
                "an output port",
                ports.len(),
            )?;
            all.push(ports);
        }
        Ok(all)
    }

    /// Sets of starts and of ends, and which pairs of them count.
    fn pair(&mut self, topology: &Topology, asserted: &mut Asserted) -> Result<(), Misfit> {
        let assumptions = self.assumptions;
        let (froms, tos) = (assumptions.froms(), assumptions.tos());
        if froms.is_empty() {
            return Ok(());
        }
        let through = |entry: usize| {
            let not = assumptions.not_a_path.get(entry);
            not.is_some_and(|each| matches!(each.paths, Paths::Through(_)))
        };
        // An entry with one open side bars what the other side names.
        let whole = |entry: usize| {
            let not = assumptions.not_a_path.get(entry);
            not.is_some_and(|each| matches!(each.paths, Paths::Between { .. }))
        };
        let bars_start = |entry: usize| whole(entry) && is_everything(tos[entry].1);
        let bars_end = |entry: usize| whole(entry) && is_everything(froms[entry].1);
        let starts = self.starts(topology);
        let ends = self.ends(topology);
        let start_sets = self.sets(
            &froms,
            "a start of paths",
            "starts",
            starts,
            &|entry| through(entry),
            &bars_start,
            &mut asserted.starts,
        )?;
        let end_sets = self.sets(
            &tos,
            "an end of paths",
            "ends",
            ends,
            &|entry| through(entry),
            &bars_end,
            &mut asserted.ends,
        )?;
        asserted.pairings = start_sets
            .iter()
            .map(|start| {
                end_sets
                    .iter()
                    .map(|end| pairing(assumptions, start, end))
                    .collect()
            })
            .collect();
        self.find_ways(&start_sets, &end_sets, asserted)
    }

    /// The way of every pair of sets, where entries exclude a part of its paths.
    fn find_ways(
        &self,
        start_sets: &[Vec<usize>],
        end_sets: &[Vec<usize>],
        asserted: &mut Asserted,
    ) -> Result<(), Misfit> {
        let mut known: Vec<Vec<usize>> = vec![Vec::new()];
        for start in start_sets {
            let mut row = Vec::new();
            for end in end_sets {
                let entries: Vec<usize> = self
                    .passed
                    .keys()
                    .copied()
                    .filter(|entry| start.contains(entry) && end.contains(entry))
                    .collect();
                let number = known.iter().position(|each| *each == entries);
                let number = number.unwrap_or_else(|| {
                    let nets = entries.iter().flat_map(|entry| &self.passed[entry]);
                    asserted.avoided.push(nets.copied().collect());
                    known.push(entries.clone());
                    known.len() - 1
                });
                if number == MOST_SETS {
                    let item = Item::NotThrough(entries[0]);
                    let what = "nets to avoid";
                    return Err(Misfit::TooManySets { item, what });
                }
                row.push(number as u8);
            }
            asserted.ways.push(row);
        }
        Ok(())
    }

    fn starts(&self, topology: &Topology) -> Vec<(NetId, String)> {
        let netlist = &self.netlist;
        let is_start = |net: &NetId| {
            topology.is_cut(*net)
                || matches!(
                    netlist.driver(*net),
                    Driver::Input(_) | Driver::Register(_) | Driver::Box(_)
                )
        };
        let nets = netlist.nets().filter(is_start);
        nets.map(|net| (net, netlist.net_name(net))).collect()
    }

    fn ends(&self, topology: &Topology) -> Vec<(EndPoint, String)> {
        let netlist = &self.netlist;
        let mut ends = Vec::new();
        for (i, output) in netlist.outputs().iter().enumerate() {
            ends.push((EndPoint::Output(i as u32), netlist.output_name(output)));
        }
        for (i, register) in netlist.registers().iter().enumerate() {
            let name = netlist.net_name(register.output);
            ends.push((EndPoint::Register(RegisterId::new(i)), name));
        }
        for (i, each) in netlist.boxes().iter().enumerate() {
            let name = netlist.names().text(each.model).into_owned();
            ends.push((EndPoint::Box(BoxId::new(i)), name));
        }
        for net in topology.cut.ones().map(NetId::new) {
            if !matches!(netlist.driver(net), Driver::None) {
                ends.push((EndPoint::Net(net), netlist.net_name(net)));
            }
        }
        ends
    }

    /// Numbers the sets that `patterns` tell apart: by set, its entries.
    #[expect(clippy::too_many_arguments, reason = "both sides of a path share it")]
    fn sets<T: std::hash::Hash + Eq + Copy>(
        &mut self,
        patterns: &[(Item, Option<&Pattern>)],
        what: &'static str,
        plural: &'static str,
        places: Vec<(T, String)>,
        ignored: &dyn Fn(usize) -> bool,
        bars: &dyn Fn(usize) -> bool,
        numbers: &mut FxHashMap<T, u8>,
    ) -> Result<Vec<Vec<usize>>, Misfit> {
        let mut counts = vec![0; patterns.len()];
        let mut known: FxHashMap<Vec<usize>, u8> = FxHashMap::default();
        let everywhere: Vec<usize> = (0..patterns.len())
            .filter(|&entry| !ignored(entry) && is_everything(patterns[entry].1))
            .collect();
        let mut sets = vec![everywhere.clone()];
        known.insert(everywhere, 0);
        for (place, name) in places {
            let mut entries = Vec::new();
            let mut barred = false;
            for (entry, (_, pattern)) in patterns.iter().enumerate() {
                if pattern.is_none_or(|pattern| pattern.matches(&name)) {
                    counts[entry] += 1;
                    barred |= bars(entry);
                    if !ignored(entry) {
                        entries.push(entry);
                    }
                }
            }
            if barred {
                numbers.insert(place, BARRED);
                continue;
            }
            let number = match known.get(&entries) {
                Some(&number) => number,
                None if sets.len() == MOST_SETS => {
                    let item = patterns[entries.first().copied().unwrap_or(0)].0;
                    return Err(Misfit::TooManySets { item, what: plural });
                }
                None => {
                    let number = sets.len() as u8;
                    known.insert(entries.clone(), number);
                    sets.push(entries);
                    number
                }
            };
            if number != 0 {
                numbers.entry(place).or_insert(number);
            }
        }
        for (&(item, pattern), count) in patterns.iter().zip(counts) {
            if let Some(pattern) = pattern {
                self.note(item, pattern, what, count)?;
            }
        }
        Ok(sets)
    }
}

/// Whether paths from a set of starts to a set of ends count, from the entries
/// that name each. Of several numbers of cycles the smallest holds.
fn pairing(assumptions: &Assumptions, start: &[usize], end: &[usize]) -> Pairing {
    let not = assumptions.not_a_path.len();
    let mut found = Pairing::Counts;
    for entry in start.iter().filter(|entry| end.contains(entry)) {
        let Some(several) = entry.checked_sub(not) else {
            if matches!(assumptions.not_a_path[*entry].paths, Paths::Part { .. }) {
                continue;
            }
            return Pairing::Never;
        };
        let own = assumptions.cycles[several].cycles;
        let fewer = match found {
            Pairing::Cycles { cycles, .. } => own < cycles,
            _ => true,
        };
        if fewer {
            found = Pairing::Cycles {
                cycles: own,
                entry: several as u32,
            };
        }
    }
    found
}
