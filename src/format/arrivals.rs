//! The arrivals file of a trade-off: YAML to input times, with located errors.
//!
//! Our own format, written down clause by clause in `grammar-notes/arrivals.md`:
//! `a` and `b`, each one time for all bits or a list, least significant first,
//! and `carry_in`, one time. Unknown keys are refused with the nearest right one.
//! Invariant: what is read has one time a bit, none before 0 or past [`LATEST`].

use super::yaml::{self, Step, Yaml};
use crate::source::{Diagnostic, Source, nearest, quote};

/// The latest time that may be given, in units of the delay model.
pub const LATEST: i64 = 1 << 20;

const KEYS: &[&str] = &["a", "b", "carry_in"];

/// When inputs are ready, in ticks.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct InputTimes {
    /// First operand, least significant first.
    pub a: Vec<i32>,
    /// Second operand.
    pub b: Vec<i32>,
    /// Carry-in, where the file gives one.
    pub carry_in: Option<i32>,
}

impl InputTimes {
    /// Both operands ready at 0, without carry-in.
    pub fn at_once(bits: usize) -> Self {
        Self {
            a: vec![0; bits],
            b: vec![0; bits],
            carry_in: None,
        }
    }
}

/// Reads the times of so many bits; a unit of the delay model has `per_unit`
/// ticks.
///
/// # Errors
/// The first fault of the text, located.
pub fn read(source: &Source, bits: usize, per_unit: i32) -> Result<InputTimes, Box<Diagnostic>> {
    let tree = yaml::parse(source).map_err(Box::new)?;
    let reader = Reader {
        source,
        bits,
        per_unit,
    };
    reader.document(&tree)
}

struct Reader<'s> {
    source: &'s Source,
    bits: usize,
    per_unit: i32,
}

impl Reader<'_> {
    #[cold]
    fn fault<T>(&self, path: &[Step], message: String, help: &str) -> Result<T, Box<Diagnostic>> {
        let place = yaml::place(self.source, path);
        let name = &self.source.name;
        Err(Box::new(Diagnostic::error(name, place, message, help)))
    }

    fn document(&self, tree: &Yaml) -> Result<InputTimes, Box<Diagnostic>> {
        let mut times = InputTimes::at_once(self.bits);
        let entries = match tree {
            Yaml::Map(entries) => entries,
            Yaml::Null => return Ok(times),
            other => {
                let message = format!("expected keys with values, found {}", other.kind());
                return self.fault(&[], message, "write `a: 0`, `b: [0, 1, 2]`, `carry_in: 4`");
            }
        };
        let mut seen: Vec<&str> = Vec::new();
        for (n, (key, value)) in entries.iter().enumerate() {
            let at = [Step::Value(n)];
            let word = match key {
                Yaml::Text(text) => text.as_str(),
                _ => "",
            };
            let Some(&known) = KEYS.iter().find(|&&known| known == word) else {
                let near = nearest(word, KEYS);
                let help = near.map_or_else(
                    || "the keys are `a`, `b` and `carry_in`".to_owned(),
                    |near| format!("did you mean `{near}`?"),
                );
                let message = format!("expected a key, found {}", quote(word.as_bytes()));
                return self.fault(&[Step::Key(n)], message, &help);
            };
            if seen.contains(&known) {
                let message = format!("expected each key once, found `{known}` again");
                return self.fault(&[Step::Key(n)], message, "take one of the two out");
            }
            seen.push(known);
            match known {
                "a" => times.a = self.operand(value, &at)?,
                "b" => times.b = self.operand(value, &at)?,
                _ => times.carry_in = Some(self.time(value, &at)?),
            }
        }
        Ok(times)
    }

    /// One time for all bits, or a list of one each.
    fn operand(&self, value: &Yaml, at: &[Step]) -> Result<Vec<i32>, Box<Diagnostic>> {
        let Yaml::List(items) = value else {
            return Ok(vec![self.time(value, at)?; self.bits]);
        };
        if items.len() != self.bits {
            let message = format!("expected {} times, found {}", self.bits, items.len());
            let help = "give one time a bit, least significant first, or one for all";
            return self.fault(at, message, help);
        }
        let mut times = Vec::with_capacity(items.len());
        for (n, item) in items.iter().enumerate() {
            let mut at = at.to_vec();
            at.push(Step::Item(n));
            times.push(self.time(item, &at)?);
        }
        Ok(times)
    }

    fn time(&self, value: &Yaml, at: &[Step]) -> Result<i32, Box<Diagnostic>> {
        let per_unit = i64::from(self.per_unit);
        let ticks = match *value {
            Yaml::Whole(units) if (0..=LATEST).contains(&units) => Some(units * per_unit),
            Yaml::Number(units) if (0.0..=LATEST as f64).contains(&units) => {
                let ticks = units * per_unit as f64;
                // A model of whole units has no fraction of one.
                let whole = ticks.round();
                ((ticks - whole).abs() < 1e-6).then_some(whole as i64)
            }
            _ => None,
        };
        match ticks.and_then(|ticks| i32::try_from(ticks).ok()) {
            Some(ticks) => Ok(ticks),
            None => {
                let found = match value {
                    Yaml::Text(text) => quote(text.as_bytes()),
                    Yaml::Whole(number) => number.to_string(),
                    Yaml::Number(number) => number.to_string(),
                    other => other.kind().to_owned(),
                };
                let message = format!("expected a time from 0 to {LATEST}, found {found}");
                let help = if self.per_unit == 1 {
                    "this delay model counts whole units"
                } else {
                    "give it in units of the delay model, to three places at most"
                };
                self.fault(at, message, help)
            }
        }
    }
}
