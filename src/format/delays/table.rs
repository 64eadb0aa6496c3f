//! The YAML table of delays: prices by number of inputs, and of cells by pin.
//!
//! Our own format, written down clause by clause in `grammar-notes/delays.md`.
//! Unknown keys are refused with the nearest right one; every fault is told at its
//! line and column. Times and loads are decimal numbers and kept in thousandths.

use crate::format::yaml::{self, Step, Yaml};
use crate::netlist::{CellDelays, Curve, DelayTable, Entry, PinPrice};
use crate::source::{Diagnostic, Source, nearest, quote};
use std::collections::BTreeMap;

const KEYS: &[&str] = &[
    "unit",
    "pin_load",
    "end_load",
    "gates",
    "exclusive_or",
    "covers",
    "cells",
];
/// The most of any figure.
const MOST: f64 = 1_000_000.0;
/// Most inputs an entry may be for.
const MOST_INPUTS: i64 = 4096;

type Found<T> = Result<T, Box<Diagnostic>>;
/// A name, the place of what is said of it, and that.
type Named<'y> = (Vec<u8>, Vec<Step>, &'y Yaml);
type Values<'y> = Vec<(&'static str, Vec<Step>, &'y Yaml)>;

pub(super) fn read(source: &Source) -> Found<DelayTable> {
    let tree = yaml::parse(source).map_err(Box::new)?;
    Reader { source }.document(&tree)
}

struct Reader<'s> {
    source: &'s Source,
}

fn below(path: &[Step], step: Step) -> Vec<Step> {
    let mut path = path.to_vec();
    path.push(step);
    path
}

fn get<'a, 'y>(values: &'a Values<'y>, key: &str) -> Option<(&'a [Step], &'y Yaml)> {
    let (_, path, value) = values.iter().find(|(known, ..)| *known == key)?;
    (**value != Yaml::Null).then_some((path.as_slice(), *value))
}

impl Reader<'_> {
    #[cold]
    fn fault<T>(&self, path: &[Step], message: String, help: &str) -> Found<T> {
        let place = yaml::place(self.source, path);
        let name = &self.source.name;
        Err(Box::new(Diagnostic::error(name, place, message, help)))
    }

    #[cold]
    fn expected<T>(&self, path: &[Step], what: &str, found: &Yaml, help: &str) -> Found<T> {
        let found = match found {
            Yaml::Text(text) => quote(text.as_bytes()),
            Yaml::Whole(number) => number.to_string(),
            Yaml::Number(number) => number.to_string(),
            other => other.kind().to_owned(),
        };
        self.fault(path, format!("expected {what}, found {found}"), help)
    }

    fn document(&self, tree: &Yaml) -> Found<DelayTable> {
        let values = self.keys(tree, &[], KEYS)?;
        let unit = match get(&values, "unit") {
            None => "units".to_owned(),
            Some((_, Yaml::Text(unit))) if is_unit(unit) => unit.clone(),
            Some((path, other)) => {
                let what = "`unit`, a word of at most 24 letters";
                return self.expected(path, what, other, "write for example `unit: ns`");
            }
        };
        let pin_load = self.optional(&values, "pin_load")?.unwrap_or(1000);
        let end_load = self.optional(&values, "end_load")?.unwrap_or(pin_load);
        let entries = |key: &str| match get(&values, key) {
            None => Ok(Vec::new()),
            Some((path, value)) => self.entries(key, value, path, pin_load),
        };
        let gates = entries("gates")?;
        if gates.is_empty() {
            let help = "write for example `gates: [{inputs: 2, delay: 0.03, slope: 0.01}]`";
            return self.fault(&[], "expected `gates`, found none".to_owned(), help);
        }
        let cells = match get(&values, "cells") {
            None => BTreeMap::new(),
            Some((path, value)) => self.cells(value, path)?,
        };
        Ok(DelayTable {
            kind: "delay-table",
            note: format!("{}, delay and slope by load", self.source.name),
            unit,
            gates,
            parities: entries("exclusive_or")?,
            covers: entries("covers")?,
            cells,
            pin_load,
            end_load,
        })
    }

    /// The entries of a map, each key known and given once.
    fn keys<'y>(&self, tree: &'y Yaml, path: &[Step], known: &[&'static str]) -> Found<Values<'y>> {
        let Yaml::Map(entries) = tree else {
            return self.expected(path, &words(known), tree, "");
        };
        let mut values: Values<'y> = Vec::new();
        for (n, (key, value)) in entries.iter().enumerate() {
            let at = || below(path, Step::Key(n));
            let Yaml::Text(word) = key else {
                return self.expected(&at(), &words(known), key, "");
            };
            let Some(&found) = known.iter().find(|known| *known == word) else {
                let help = match nearest(word, known) {
                    Some(near) => format!("did you mean `{near}`?"),
                    None => "leave it out".to_owned(),
                };
                return self.expected(&at(), &words(known), key, &help);
            };
            if values.iter().any(|(earlier, ..)| *earlier == found) {
                let message = format!("expected `{found}` once, found it again");
                return self.fault(&at(), message, "join the two");
            }
            values.push((found, below(path, Step::Value(n)), value));
        }
        Ok(values)
    }

    /// A figure in thousandths.
    fn figure(&self, key: &str, value: &Yaml, path: &[Step]) -> Found<i32> {
        let number = match value {
            Yaml::Whole(whole) => *whole as f64,
            Yaml::Number(number) => *number,
            _ => f64::NAN,
        };
        if (0.0..=MOST).contains(&number) {
            return Ok((number * 1000.0).round() as i32);
        }
        self.expected(
            path,
            &format!("`{key}`, a number from 0 to {MOST}"),
            value,
            "",
        )
    }

    fn optional(&self, values: &Values<'_>, key: &str) -> Found<Option<i32>> {
        match get(values, key) {
            None => Ok(None),
            Some((path, value)) => Ok(Some(self.figure(key, value, path)?)),
        }
    }

    /// `delay` and `slope`.
    fn line(&self, values: &Values<'_>, path: &[Step]) -> Found<Curve> {
        let Some(fixed) = self.optional(values, "delay")? else {
            return self.fault(path, "expected `delay`, found none".to_owned(), "");
        };
        let slope = self.optional(values, "slope")?.unwrap_or(0);
        Ok(Curve::Line { fixed, slope })
    }

    fn entries(&self, key: &str, value: &Yaml, path: &[Step], load: i32) -> Found<Vec<Entry>> {
        let form = "entries with `inputs`, `delay` and `slope`";
        let Yaml::List(items) = value else {
            let help = "write a list: a `-` before every entry, or `[...]` around them";
            return self.expected(path, &format!("`{key}`, a list of {form}"), value, help);
        };
        let mut entries: Vec<Entry> = Vec::new();
        for (n, item) in items.iter().enumerate() {
            let path = below(path, Step::Item(n));
            let values = self.keys(item, &path, &["inputs", "delay", "slope"])?;
            let least = entries.last().map_or(1, |last| last.inputs as i64 + 1);
            let inputs = match get(&values, "inputs") {
                Some((_, &Yaml::Whole(inputs))) if (least..=MOST_INPUTS).contains(&inputs) => {
                    inputs
                }
                other => {
                    let what = format!("`inputs`, a whole number from {least} to {MOST_INPUTS}");
                    let (path, value) = other.unwrap_or((&path, &Yaml::Null));
                    return self.expected(path, &what, value, "entries ascend by inputs");
                }
            };
            entries.push(Entry {
                inputs: inputs as usize,
                price: PinPrice {
                    delay: self.line(&values, &path)?,
                    load,
                },
            });
        }
        Ok(entries)
    }

    /// The entries of a map whose keys are names.
    fn named<'y>(&self, what: &str, value: &'y Yaml, path: &[Step]) -> Found<Vec<Named<'y>>> {
        let Yaml::Map(entries) = value else {
            return self.expected(path, what, value, "");
        };
        let mut named: Vec<Named<'y>> = Vec::new();
        for (n, (key, value)) in entries.iter().enumerate() {
            let name = match key {
                Yaml::Text(name) if !name.is_empty() => name.clone(),
                Yaml::Whole(number) => number.to_string(),
                other => {
                    let at = below(path, Step::Key(n));
                    return self.expected(&at, "a name", other, "quote it");
                }
            };
            if named.iter().any(|(known, ..)| known == name.as_bytes()) {
                let at = below(path, Step::Key(n));
                let message = format!("expected {} once, found it again", quote(name.as_bytes()));
                return self.fault(&at, message, "join the two");
            }
            named.push((name.into_bytes(), below(path, Step::Value(n)), value));
        }
        Ok(named)
    }

    fn cells(&self, value: &Yaml, path: &[Step]) -> Found<BTreeMap<Vec<u8>, CellDelays>> {
        let mut cells = BTreeMap::new();
        for (name, path, value) in self.named("cells by name", value, path)? {
            let values = self.keys(value, &path, &["delays", "loads"])?;
            let mut cell = CellDelays::default();
            if let Some((path, value)) = get(&values, "loads") {
                for (pin, path, value) in self.named("input pins with loads", value, path)? {
                    cell.loads.insert(pin, self.figure("load", value, &path)?);
                }
            }
            if let Some((path, value)) = get(&values, "delays") {
                for (output, path, value) in self.named("output pins", value, path)? {
                    for (input, path, value) in self.named("input pins", value, &path)? {
                        let values = self.keys(value, &path, &["delay", "slope"])?;
                        let curve = self.line(&values, &path)?;
                        cell.arcs.insert((output.clone(), input), curve);
                    }
                }
            }
            cells.insert(name, cell);
        }
        Ok(cells)
    }
}

fn is_unit(word: &str) -> bool {
    let fits = |c: char| c.is_ascii_graphic() || c == ' ';
    !word.trim().is_empty() && word.len() <= 24 && word.chars().all(fits)
}

fn words(words: &[&str]) -> String {
    let quoted: Vec<String> = words.iter().map(|word| format!("`{word}`")).collect();
    match quoted.as_slice() {
        [front @ .., last] if !front.is_empty() => {
            format!("one of {} and {last}", front.join(", "))
        }
        _ => quoted.concat(),
    }
}
