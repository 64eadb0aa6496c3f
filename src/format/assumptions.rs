//! The assumptions file: YAML to [`Assumptions`], with located errors.
//!
//! Our own format, written down clause by clause in `grammar-notes/assumptions.md`.
//! Unknown keys are refused with the nearest right one, a `why` is asked of every
//! entry, and what no netlist could fit is refused while reading; what *this*
//! netlist does not fit is told by [`AssumptionsFile::misfit`], at the line of
//! the pattern concerned.

use super::yaml::{self, Step, Yaml};
use crate::netlist::assume::{BoxDelay, Cycles, Item, Misfit, NotAPath, Paths, PortTime, Tied};
use crate::netlist::carry_cell::{CarryCell, PinPair};
use crate::netlist::{Assumptions, Pattern};
use crate::source::{Diagnostic, Source, nearest, quote};
use rustc_hash::FxHashMap;

const SECTIONS: &[&str] = &[
    "tied",
    "not_a_path",
    "cycles",
    "arrival",
    "required",
    "box_delay",
    "carry_cells",
];
/// The latest time that may be asserted, in units of the delay model.
const LATEST: i64 = 1 << 24;
/// The longest delay that may be declared, in units of the delay model: short enough
/// that many in series stay within what is counted.
const LONGEST: i64 = 10_000;
/// Most cycles that may be asserted.
const MOST_CYCLES: i64 = 1 << 16;

/// An assumptions file as read.
pub struct AssumptionsFile {
    /// What it asserts.
    pub assumptions: Assumptions,
    source: Source,
    places: FxHashMap<Item, Vec<Step>>,
}

impl AssumptionsFile {
    /// The file.
    pub fn source(&self) -> &Source {
        &self.source
    }

    /// A located message about assumptions that do not fit the netlist read from
    /// `file`.
    pub fn misfit(&self, misfit: &Misfit, file: &str) -> Diagnostic {
        let path = self
            .places
            .get(&misfit.item())
            .map_or(&[][..], Vec::as_slice);
        let help = match misfit {
            Misfit::NoMatch { .. } => {
                "compare the names with those of a report; `*` stands for any characters, `?` for \
                 one"
            }
            Misfit::BothValues { .. } => "take one of the two ties out, or narrow its pattern",
            Misfit::Contended { .. } => "mend the netlist first: what the net carries is undefined",
            Misfit::TooManySets { .. } => "use fewer or wider patterns",
            Misfit::NoDelay { .. } => {
                "the output depends on that pin; give every such pair a delay, by patterns where \
                 they are alike"
            }
            Misfit::NotPlain { .. } => "declare cells of combinational logic only",
        };
        Diagnostic::error(
            &self.source.name,
            yaml::place(&self.source, path),
            format!("{misfit} in {}", quote(file.as_bytes())),
            help,
        )
    }
}

/// Reads an assumptions file.
///
/// # Errors
/// The first fault of the text, located.
pub fn read(source: Source) -> Result<AssumptionsFile, Box<Diagnostic>> {
    let tree = yaml::parse(&source).map_err(Box::new)?;
    let mut reader = Reader {
        source: &source,
        places: FxHashMap::default(),
        assumptions: Assumptions::default(),
    };
    reader.document(&tree)?;
    let Reader {
        places,
        assumptions,
        ..
    } = reader;
    Ok(AssumptionsFile {
        assumptions,
        places,
        source,
    })
}

type Found<T> = Result<T, Box<Diagnostic>>;

struct Reader<'s> {
    source: &'s Source,
    places: FxHashMap<Item, Vec<Step>>,
    assumptions: Assumptions,
}

/// The entries of a map, each key known and given once.
struct Fields<'y> {
    path: Vec<Step>,
    values: Vec<(&'static str, usize, &'y Yaml)>,
}

impl<'y> Fields<'y> {
    /// A value that is there and not `null`, with its path.
    fn get(&self, key: &str) -> Option<(&'y Yaml, Vec<Step>)> {
        let (_, n, value) = self.values.iter().find(|(known, ..)| *known == key)?;
        (**value != Yaml::Null).then(|| (*value, below(&self.path, Step::Value(*n))))
    }
}

fn below(path: &[Step], step: Step) -> Vec<Step> {
    let mut path = path.to_vec();
    path.push(step);
    path
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
            other => other.kind().to_owned(),
        };
        self.fault(path, format!("expected {what}, found {found}"), help)
    }

    fn document(&mut self, tree: &Yaml) -> Found<()> {
        let help = "write for example `tied: {test_mode: {value: 0, why: \"off in the field\"}}`";
        let Yaml::Map(entries) = tree else {
            return self.expected(&[], &format!("one of {}", words(SECTIONS)), tree, help);
        };
        let fields = self.fields(entries, Vec::new(), SECTIONS)?;
        if let Some((value, path)) = fields.get("tied") {
            self.tied(value, &path)?;
        }
        for (section, read) in [
            ("not_a_path", Self::not_a_path as fn(&mut Self, _) -> _),
            ("cycles", Self::cycles),
            ("arrival", Self::arrival),
            ("required", Self::required),
            ("box_delay", Self::box_delay),
            ("carry_cells", Self::carry_cell),
        ] {
            if let Some((value, path)) = fields.get(section) {
                for fields in self.list(section, value, path)? {
                    read(self, fields)?;
                }
            }
        }
        if self.assumptions.is_empty() {
            return self.expected(&[], "at least one assumption", &Yaml::Null, help);
        }
        Ok(())
    }

    fn fields<'y>(
        &self,
        entries: &'y [(Yaml, Yaml)],
        path: Vec<Step>,
        known: &[&'static str],
    ) -> Found<Fields<'y>> {
        let mut values: Vec<(&'static str, usize, &Yaml)> = Vec::new();
        for (n, (key, value)) in entries.iter().enumerate() {
            let at = || below(&path, Step::Key(n));
            let Yaml::Text(word) = key else {
                return self.expected(&at(), &format!("one of {}", words(known)), key, "");
            };
            let Some(&known) = known.iter().find(|known| *known == word) else {
                let help = match nearest(word, known) {
                    Some(near) => format!("did you mean `{near}`?"),
                    None => "leave it out".to_owned(),
                };
                let message = format!(
                    "expected one of {}, found {}",
                    words(known),
                    quote(word.as_bytes())
                );
                return self.fault(&at(), message, &help);
            };
            if values.iter().any(|(earlier, ..)| *earlier == known) {
                let message = format!("expected `{known}` once, found it again");
                return self.fault(&at(), message, "join the two");
            }
            values.push((known, n, value));
        }
        Ok(Fields { path, values })
    }

    /// The entries of a section that is a list.
    fn list<'y>(&self, section: &str, value: &'y Yaml, path: Vec<Step>) -> Found<Vec<Fields<'y>>> {
        let known: &[&'static str] = match section {
            "not_a_path" => &["from", "through", "to", "why"],
            "cycles" => &["from", "to", "n", "why"],
            "box_delay" => &["box", "from", "to", "delay", "why"],
            "carry_cells" => &["cell", "delays", "why"],
            "delays" => &["from", "to", "delay"],
            _ => &["ports", "at", "why"],
        };
        let form = format!("entries with {}", words(known));
        let Yaml::List(items) = value else {
            let help = "write a list: a `-` before every entry, or `[...]` around them";
            return self.expected(&path, &format!("a list of {form}"), value, help);
        };
        let mut all = Vec::new();
        for (n, item) in items.iter().enumerate() {
            let path = below(&path, Step::Item(n));
            let Yaml::Map(entries) = item else {
                return self.expected(&path, &form, item, "");
            };
            all.push(self.fields(entries, path, known)?);
        }
        Ok(all)
    }

    fn why(&self, fields: &Fields<'_>) -> Found<String> {
        let help = "say why it may be assumed; a reviewer reads it";
        match fields.get("why") {
            Some((Yaml::Text(why), _)) if !why.trim().is_empty() => Ok(why.trim().to_owned()),
            Some((other, path)) => self.expected(&path, "a text that says why", other, help),
            None => {
                let message = "expected a `why`, found none".to_owned();
                self.fault(&fields.path, message, help)
            }
        }
    }

    fn whole(&self, fields: &Fields<'_>, key: &str, from: i64, to: i64) -> Found<i64> {
        let what = format!("`{key}`, a whole number from {from} to {to}");
        match fields.get(key) {
            Some((&Yaml::Whole(n), _)) if (from..=to).contains(&n) => Ok(n),
            Some((other, path)) => self.expected(&path, &what, other, ""),
            None => self.fault(&fields.path, format!("expected {what}, found none"), ""),
        }
    }

    fn pattern(&mut self, fields: &Fields<'_>, key: &str, item: Item) -> Found<Option<Pattern>> {
        let Some((value, path)) = fields.get(key) else {
            return Ok(None);
        };
        // A name may consist of digits only.
        let text = match value {
            Yaml::Text(text) if !text.is_empty() => text.clone(),
            Yaml::Whole(number) => number.to_string(),
            other => {
                let what = format!("`{key}`, a name or a pattern");
                return self.expected(&path, &what, other, "quote it");
            }
        };
        self.places.insert(item, path);
        Ok(Some(Pattern::new(&text)))
    }

    fn tied(&mut self, value: &Yaml, path: &[Step]) -> Found<()> {
        let form = "names, each with `value` and `why`";
        let Yaml::Map(entries) = value else {
            return self.expected(path, form, value, "write `name: {value: 0, why: \"...\"}`");
        };
        for (n, (key, value)) in entries.iter().enumerate() {
            let at = below(path, Step::Key(n));
            let name = match key {
                Yaml::Text(name) if !name.is_empty() => name.clone(),
                Yaml::Whole(number) => number.to_string(),
                other => return self.expected(&at, "a name or a pattern", other, "quote it"),
            };
            let inside = below(path, Step::Value(n));
            let Yaml::Map(entries) = value else {
                let help = "write `{value: 0, why: \"...\"}`";
                return self.expected(&inside, "`value` and `why`", value, help);
            };
            let fields = self.fields(entries, inside, &["value", "why"])?;
            let value = self.whole(&fields, "value", 0, 1)? == 1;
            let why = self.why(&fields)?;
            let item = Item::Tied(self.assumptions.tied.len());
            self.places.insert(item, at);
            self.assumptions.tied.push(Tied {
                nets: Pattern::new(&name),
                value,
                why,
            });
        }
        Ok(())
    }

    fn not_a_path(&mut self, fields: Fields<'_>) -> Found<()> {
        let index = self.assumptions.not_a_path.len();
        let from = self.pattern(&fields, "from", Item::NotFrom(index))?;
        let through = self.pattern(&fields, "through", Item::NotThrough(index))?;
        let to = self.pattern(&fields, "to", Item::NotTo(index))?;
        let why = self.why(&fields)?;
        let narrow =
            |side: &Option<Pattern>| side.as_ref().is_some_and(|side| !side.is_everything());
        let paths = match through {
            Some(through) if narrow(&from) || narrow(&to) => Paths::Part { from, through, to },
            Some(through) => Paths::Through(through),
            None if !narrow(&from) && !narrow(&to) => {
                return self.fault(
                    &fields.path,
                    "expected `from`, `through` or `to` to name some places, found every path"
                        .to_owned(),
                    "name what is no path; a block without any has no depth",
                );
            }
            None => Paths::Between { from, to },
        };
        self.assumptions.not_a_path.push(NotAPath { paths, why });
        Ok(())
    }

    fn cycles(&mut self, fields: Fields<'_>) -> Found<()> {
        let index = self.assumptions.cycles.len();
        let from = self.pattern(&fields, "from", Item::CyclesFrom(index))?;
        let to = self.pattern(&fields, "to", Item::CyclesTo(index))?;
        let cycles = self.whole(&fields, "n", 2, MOST_CYCLES)?;
        let why = self.why(&fields)?;
        self.assumptions.cycles.push(Cycles {
            from,
            to,
            cycles: u32::try_from(cycles).unwrap_or(u32::MAX),
            why,
        });
        Ok(())
    }

    fn port_time(&mut self, fields: &Fields<'_>, item: Item) -> Found<PortTime> {
        let Some(ports) = self.pattern(fields, "ports", item)? else {
            let message = "expected `ports`, a name or a pattern, found none".to_owned();
            return self.fault(&fields.path, message, "");
        };
        let at = self.whole(fields, "at", 0, LATEST)?;
        Ok(PortTime {
            ports,
            at: i32::try_from(at).unwrap_or(i32::MAX),
            why: self.why(fields)?,
        })
    }

    /// A pattern that has to be there.
    fn named(&mut self, fields: &Fields<'_>, key: &str, item: Item) -> Found<Pattern> {
        match self.pattern(fields, key, item)? {
            Some(pattern) => Ok(pattern),
            None => {
                let message = format!("expected `{key}`, a name or a pattern, found none");
                self.fault(&fields.path, message, "`*` stands for every one")
            }
        }
    }

    fn delay(&self, fields: &Fields<'_>) -> Found<i32> {
        let delay = self.whole(fields, "delay", 0, LONGEST)?;
        Ok(i32::try_from(delay).unwrap_or(i32::MAX))
    }

    fn box_delay(&mut self, fields: Fields<'_>) -> Found<()> {
        let index = self.assumptions.box_delay.len();
        let entry = BoxDelay {
            name: self.named(&fields, "box", Item::BoxName(index))?,
            from: self.named(&fields, "from", Item::BoxFrom(index))?,
            to: self.named(&fields, "to", Item::BoxTo(index))?,
            delay: self.delay(&fields)?,
            why: self.why(&fields)?,
        };
        self.assumptions.box_delay.push(entry);
        Ok(())
    }

    fn carry_cell(&mut self, fields: Fields<'_>) -> Found<()> {
        let index = self.assumptions.carry_cells.len();
        let cell = self.named(&fields, "cell", Item::CarryCell(index))?;
        let why = self.why(&fields)?;
        let Some((value, path)) = fields.get("delays") else {
            let message = "expected `delays`, a list, found none".to_owned();
            let help = "write `delays: [{from: CI, to: CO, delay: 1}]`";
            return self.fault(&fields.path, message, help);
        };
        let mut delays = Vec::new();
        for (pair, fields) in self.list("delays", value, path)?.iter().enumerate() {
            delays.push(PinPair {
                from: self.named(fields, "from", Item::CarryFrom(index, pair))?,
                to: self.named(fields, "to", Item::CarryTo(index, pair))?,
                delay: self.delay(fields)?,
            });
        }
        self.assumptions
            .carry_cells
            .push(CarryCell { cell, delays, why });
        Ok(())
    }

    fn arrival(&mut self, fields: Fields<'_>) -> Found<()> {
        let item = Item::Arrival(self.assumptions.arrival.len());
        let time = self.port_time(&fields, item)?;
        self.assumptions.arrival.push(time);
        Ok(())
    }

    fn required(&mut self, fields: Fields<'_>) -> Found<()> {
        let item = Item::Required(self.assumptions.required.len());
        let time = self.port_time(&fields, item)?;
        self.assumptions.required.push(time);
        Ok(())
    }
}

fn words(words: &[&str]) -> String {
    let quoted: Vec<String> = words.iter().map(|word| format!("`{word}`")).collect();
    match quoted.as_slice() {
        [front @ .., last] if !front.is_empty() => format!("{} and {last}", front.join(", ")),
        _ => quoted.concat(),
    }
}
