//! The delays of a Liberty library, read at one fixed input slew.
//!
//! Delay tables over input slew and output load become curves over the load: every
//! row is interpolated straight between the two slews around the fixed one, and of
//! rise and fall, and of several conditions, the later counts at every load listed.
//! The fixed slew is the middle one of the first axis of slews. Clauses in
//! `grammar-notes/delays.md`; from memory of the open Liberty description.

use super::groups::{self, Group};
use crate::format::cells::shape_of;
use crate::netlist::{CellDelays, Curve, DelayTable, Entry, PinPrice, Shape};
use crate::source::{Diagnostic, Place, Source, quote};
use std::collections::BTreeMap;

type Found<T> = Result<T, Box<Diagnostic>>;

const SLEWS: &[&str] = &["input_net_transition", "input_transition_time"];
const LOAD: &str = "total_output_net_capacitance";

pub(super) fn read(source: &Source) -> Found<DelayTable> {
    let library = groups::read(source)?;
    let mut reader = Reader {
        source,
        templates: BTreeMap::new(),
        slew: None,
        scale: 1.0,
    };
    for template in library.of_kind("lu_table_template") {
        let axes = reader.axes(template)?;
        reader.templates.insert(template.name().to_owned(), axes);
    }
    let mut axes: Vec<&Axes> = Vec::new();
    for template in library.of_kind("lu_table_template") {
        axes.extend(reader.templates.get(template.name()));
    }
    let slews = axes.iter().flat_map(|axes| axes.iter());
    let first = slews
        .into_iter()
        .find(|axis| axis.is_slew && !axis.points.is_empty());
    reader.slew = first.map(|axis| axis.points[axis.points.len() / 2]);
    reader.library(&library)
}

/// One axis of a table.
#[derive(Clone, PartialEq, Debug)]
struct Axis {
    is_slew: bool,
    points: Vec<f64>,
}

type Axes = Vec<Axis>;

/// Delay by load, in the units of the library.
type Line = Vec<(f64, f64)>;

struct Reader<'s> {
    source: &'s Source,
    templates: BTreeMap<String, Axes>,
    /// The fixed input slew.
    slew: Option<f64>,
    /// Load units of a table in one of the library's.
    scale: f64,
}

/// What is known of a cell that is a gate.
struct Candidate {
    shape: Shape,
    inputs: usize,
    price: PinPrice,
    area: f64,
    name: String,
}

impl Reader<'_> {
    #[cold]
    fn fault<T>(&self, line: u32, message: String, help: &str) -> Found<T> {
        let name = &self.source.name;
        Err(Box::new(Diagnostic::error(
            name,
            Place::line(line),
            message,
            help,
        )))
    }

    /// Numbers given as texts of several, `"0.1, 0.2", "0.3"`.
    fn numbers(&self, values: &[String], line: u32) -> Found<Vec<f64>> {
        let mut numbers = Vec::new();
        for text in values {
            for word in text.split([',', ' ', '\t', '\n', '\\', '\r']) {
                if word.is_empty() {
                    continue;
                }
                match word.parse::<f64>() {
                    Ok(number) if number.is_finite() => numbers.push(number),
                    _ => {
                        let found = quote(word.as_bytes());
                        return self.fault(line, format!("expected a number, found {found}"), "");
                    }
                }
            }
        }
        Ok(numbers)
    }

    fn axes(&self, template: &Group) -> Found<Axes> {
        let mut axes = Axes::new();
        for (variable, index) in [("variable_1", "index_1"), ("variable_2", "index_2")] {
            let Some(variable) = template.value(variable) else {
                continue;
            };
            let is_slew = SLEWS.contains(&variable);
            if !is_slew && variable != LOAD {
                // A table over anything else is not followed.
                return Ok(Axes::new());
            }
            let points = match template.values(index) {
                Some((values, line)) => self.numbers(values, line)?,
                None => Vec::new(),
            };
            axes.push(Axis { is_slew, points });
        }
        Ok(axes)
    }

    fn library(mut self, library: &Group) -> Found<DelayTable> {
        let capacitance = |pin: &Group| pin.value("capacitance")?.parse::<f64>().ok();
        let pins = library.of_kind("cell").flat_map(|cell| cell.of_kind("pin"));
        let least = pins
            .filter_map(capacitance)
            .filter(|&load| load > 0.0 && load.is_finite())
            .fold(f64::INFINITY, f64::min);
        let least = if least.is_finite() { least } else { 1.0 };
        // The least pin is between 1000 and 10 000.
        self.scale = 10_f64.powi((3.0 - least.log10()).ceil() as i32);
        let pin_load = self.load(least);
        let mut table = DelayTable {
            kind: "library",
            unit: unit(library.value("time_unit").unwrap_or("1ns")),
            note: String::new(),
            gates: Vec::new(),
            parities: Vec::new(),
            covers: Vec::new(),
            cells: BTreeMap::new(),
            pin_load,
            end_load: pin_load,
        };
        let mut candidates = Vec::new();
        for cell in library.of_kind("cell") {
            let (delays, candidate) = self.cell(cell, pin_load)?;
            candidates.extend(candidate);
            table.cells.insert(cell.name().as_bytes().to_vec(), delays);
        }
        let of = |wanted: &[Shape]| entries(&candidates, wanted, pin_load);
        table.gates = of(&[Shape::Product, Shape::Inverter, Shape::Buffer]);
        table.parities = of(&[Shape::Parity]);
        table.covers = of(&[Shape::Other]);
        let any = [&table.gates, &table.covers, &table.parities];
        let Some(gates) = any.into_iter().find(|entries| !entries.is_empty()) else {
            return self.fault(
                library.line,
                "expected a cell of one output with a function and delays, found none".to_owned(),
                "delays are `timing` groups of output pins with `cell_rise` or `cell_fall`",
            );
        };
        table.gates = gates.clone();
        let slew = match self.slew {
            Some(slew) => format!("at a fixed input slew of {slew} {}", table.unit),
            None => "without input slew".to_owned(),
        };
        table.note = format!(
            "{}, delay tables {slew}, the later of rise and fall; a gate that is no cell of it \
             costs what the fastest cell of as many inputs does",
            self.source.name
        );
        Ok(table)
    }

    fn load(&self, capacitance: f64) -> i32 {
        (capacitance * self.scale).round() as i32
    }

    fn cell(&self, cell: &Group, pin_load: i32) -> Found<(CellDelays, Option<Candidate>)> {
        let mut delays = CellDelays::default();
        let mut outputs = 0;
        let mut function = None;
        for pin in cell.of_kind("pin") {
            if pin.value("direction") == Some("output") {
                outputs += 1;
                function = pin.value("function");
            }
            for name in &pin.names {
                if let Some(capacitance) = pin.value("capacitance") {
                    let (values, line) = ([capacitance.to_owned()], pin.line);
                    let number = self.numbers(&values, line)?.first().copied().unwrap_or(0.0);
                    delays
                        .loads
                        .insert(name.as_bytes().to_vec(), self.load(number.max(0.0)));
                }
            }
            for timing in pin.of_kind("timing") {
                let Some(curve) = self.timing(timing)? else {
                    continue;
                };
                let related = timing.value("related_pin").unwrap_or_default();
                for input in related.split_whitespace() {
                    for output in &pin.names {
                        let key = (output.as_bytes().to_vec(), input.as_bytes().to_vec());
                        let known = delays.arcs.remove(&key);
                        let worst = match known {
                            None => curve.clone(),
                            Some(known) => later_of(&known, &curve),
                        };
                        delays.arcs.insert(key, worst);
                    }
                }
            }
        }
        let shape = function.filter(|_| outputs == 1).and_then(shape_of);
        let candidate = shape.and_then(|(shape, inputs)| {
            let arcs = delays.arcs.values().cloned();
            let delay = arcs.reduce(|a, b| later_of(&a, &b))?;
            let load = delays.loads.values().copied().max().unwrap_or(pin_load);
            let area = cell.value("area").and_then(|area| area.parse().ok());
            Some(Candidate {
                shape,
                inputs,
                price: PinPrice { delay, load },
                area: area.unwrap_or(0.0),
                name: cell.name().to_owned(),
            })
        });
        Ok((delays, candidate))
    }

    /// The later of rise and fall; none where the timing is no way from an input to
    /// an output, or is over something else than slew and load.
    fn timing(&self, timing: &Group) -> Found<Option<Curve>> {
        let kind = timing.value("timing_type").unwrap_or("combinational");
        if !kind.starts_with("combinational") {
            return Ok(None);
        }
        let mut worst: Option<Curve> = None;
        for which in ["cell_rise", "cell_fall"] {
            for table in timing.of_kind(which) {
                let Some(line) = self.table(table)? else {
                    continue;
                };
                let points = line
                    .into_iter()
                    .map(|(load, delay)| (self.load(load), (delay * 1000.0).round() as i32));
                let curve = Curve::Points(points.collect());
                worst = Some(match worst {
                    None => curve,
                    Some(known) => later_of(&known, &curve),
                });
            }
        }
        Ok(worst)
    }

    /// A table at the fixed slew.
    fn table(&self, table: &Group) -> Found<Option<Line>> {
        let Some((values, line)) = table.values("values") else {
            return Ok(None);
        };
        let values = self.numbers(values, line)?;
        if table.name() == "scalar" || values.len() == 1 {
            return Ok(values.first().map(|&delay| vec![(0.0, delay)]));
        }
        let Some(template) = self.templates.get(table.name()) else {
            let found = quote(table.name().as_bytes());
            let message = format!("expected the name of a `lu_table_template`, found {found}");
            return self.fault(table.line, message, "templates stand in the library itself");
        };
        let mut axes = template.clone();
        for (axis, index) in axes.iter_mut().zip(["index_1", "index_2"]) {
            if let Some((values, line)) = table.values(index) {
                axis.points = self.numbers(values, line)?;
            }
        }
        let sizes: usize = axes.iter().map(|axis| axis.points.len()).product();
        if axes.is_empty() {
            return Ok(None);
        }
        if sizes != values.len() {
            let message = format!("expected {sizes} values, found {}", values.len());
            return self.fault(
                line,
                message,
                "a table has a value for every pair of its axes",
            );
        }
        let ascends = |axis: &Axis| axis.points.windows(2).all(|pair| pair[0] < pair[1]);
        if !axes.iter().all(ascends) {
            let message = "expected an axis that ascends, found one that does not".to_owned();
            return self.fault(line, message, "");
        }
        Ok(self.at_slew(&axes, &values))
    }

    fn at_slew(&self, axes: &Axes, values: &[f64]) -> Option<Line> {
        let slew_at = axes.iter().position(|axis| axis.is_slew);
        let load_at = axes.iter().position(|axis| !axis.is_slew);
        let loads = load_at.map_or(&[0.0][..], |at| &axes[at].points);
        let value = |slew: usize, load: usize| {
            let second = axes.get(1).map_or(1, |axis| axis.points.len());
            let (first_at, second_at) = match (slew_at, load_at) {
                (Some(0), _) | (_, Some(1)) => (slew, load),
                _ => (load, slew),
            };
            match axes.len() {
                1 => values[if slew_at.is_some() { slew } else { load }],
                _ => values[first_at * second + second_at],
            }
        };
        let slews = slew_at.map_or(&[0.0][..], |at| &axes[at].points);
        let wanted = self.slew.unwrap_or(slews[0]);
        let line = loads.iter().enumerate().map(|(n, &load)| {
            let after = slews.partition_point(|&slew| slew <= wanted);
            let right = after.clamp(1, slews.len().max(2) - 1).min(slews.len() - 1);
            let left = right.saturating_sub(1);
            let (low, high) = (value(left, n), value(right, n));
            let run = slews[right] - slews[left];
            let share = if run > 0.0 {
                (wanted - slews[left]) / run
            } else {
                0.0
            };
            (load, low + (high - low) * share)
        });
        Some(line.collect())
    }
}

/// The later of two curves at every load that either lists.
fn later_of(left: &Curve, right: &Curve) -> Curve {
    let loads = |curve: &Curve| match curve {
        Curve::Points(points) => points.iter().map(|&(load, _)| load).collect(),
        Curve::Line { .. } => Vec::new(),
    };
    let mut all = [loads(left), loads(right)].concat();
    all.sort_unstable();
    all.dedup();
    let points = all
        .into_iter()
        .map(|load| (load, left.at(load).max(right.at(load))));
    Curve::Points(points.collect())
}

/// For every number of inputs the fastest cell of the shapes wanted, of equals the
/// smallest, of those the first by name.
fn entries(candidates: &[Candidate], wanted: &[Shape], pin_load: i32) -> Vec<Entry> {
    let mut best: BTreeMap<usize, &Candidate> = BTreeMap::new();
    let worse = |left: &Candidate, right: &Candidate| {
        let key = |each: &Candidate| each.price.delay.at(pin_load.saturating_mul(2));
        let by_delay = key(left).cmp(&key(right));
        by_delay
            .then(left.area.total_cmp(&right.area))
            .then(left.name.cmp(&right.name))
            .is_gt()
    };
    for each in candidates
        .iter()
        .filter(|each| wanted.contains(&each.shape))
    {
        match best.get(&each.inputs) {
            Some(known) if !worse(known, each) => {}
            _ => {
                best.insert(each.inputs, each);
            }
        }
    }
    let entry = |(inputs, each): (usize, &Candidate)| Entry {
        inputs,
        price: each.price.clone(),
    };
    best.into_iter().map(entry).collect()
}

/// `1ns` is told as `ns`, `10ps` as it is.
fn unit(text: &str) -> String {
    let word = text.trim();
    let bare = word.strip_prefix('1').filter(|rest| {
        let mut letters = rest.chars();
        letters.next().is_some_and(char::is_alphabetic)
    });
    let plain: String = bare
        .unwrap_or(word)
        .chars()
        .filter(char::is_ascii_graphic)
        .collect();
    plain.chars().take(24).collect()
}
