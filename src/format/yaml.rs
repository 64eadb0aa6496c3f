//! YAML texts as plain trees, and where a piece of one stands.
//!
//! The only place that reads YAML, so that another library would be a change to
//! this file: the author of the one used has declared it finished. The library
//! tells places only in its errors; so a tree holds none, and [`place`] finds the
//! line and column of a piece by reading the text again and failing on purpose
//! there. That costs nothing until a message needs it.
//!
//! Invariants: a map keeps the order of the text; nesting is bounded by the
//! library (128 levels), and so is what aliases may repeat.

use crate::source::{Diagnostic, Place, Source, escape};
use serde::de::{
    Deserialize, DeserializeSeed, Deserializer, Error as _, IgnoredAny, MapAccess, SeqAccess,
    Visitor,
};
use std::fmt;

/// Most bytes of a text that is read as YAML.
const MOST_BYTES: usize = 16 << 20;

/// A YAML value.
#[derive(Clone, PartialEq, Debug)]
pub(super) enum Yaml {
    /// Nothing, or `null`.
    Null,
    /// `true` or `false`.
    Bool(bool),
    /// A whole number.
    Whole(i64),
    /// Any other number.
    Number(f64),
    /// A text.
    Text(String),
    /// A list.
    List(Vec<Yaml>),
    /// Keys and values in the order of the text.
    Map(Vec<(Yaml, Yaml)>),
}

impl Yaml {
    /// What it is, for messages.
    pub(super) fn kind(&self) -> &'static str {
        match self {
            Self::Null => "nothing",
            Self::Bool(_) => "`true` or `false`",
            Self::Whole(_) | Self::Number(_) => "a number",
            Self::Text(_) => "a text",
            Self::List(_) => "a list",
            Self::Map(_) => "keys with values",
        }
    }
}

/// One step down a tree.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Step {
    /// The n-th item of a list.
    Item(usize),
    /// The key of the n-th entry of a map.
    Key(usize),
    /// The value of the n-th entry of a map.
    Value(usize),
}

/// Reads one YAML document.
pub(super) fn parse(source: &Source) -> Result<Yaml, Diagnostic> {
    let fault =
        |place, message: String, help: &str| Diagnostic::error(&source.name, place, message, help);
    if source.bytes.len() > MOST_BYTES {
        return Err(fault(
            Place::File,
            format!("expected at most {MOST_BYTES} bytes of YAML, found more"),
            "check that this is the file that was meant",
        ));
    }
    let text = std::str::from_utf8(&source.bytes).map_err(|error| {
        let before = &source.bytes[..error.valid_up_to()];
        let line = 1 + before.iter().filter(|&&b| b == b'\n').count();
        fault(
            Place::line(u32::try_from(line).unwrap_or(u32::MAX)),
            "expected UTF-8, found other bytes".to_owned(),
            "write the file in UTF-8",
        )
    })?;
    serde_yaml::from_str(text).map_err(|error| {
        let place = place_of(text, &error);
        let whole = error.to_string();
        let said = without_place(&whole);
        fault(
            place,
            format!("expected YAML, found a fault: {}", escape(said.as_bytes())),
            "quote texts that begin with `*`, `[`, `{`, `&`, `!` or `%`",
        )
    })
}

/// Where the piece at `path` stands.
#[cold]
pub(super) fn place(source: &Source, path: &[Step]) -> Place {
    let Ok(text) = std::str::from_utf8(&source.bytes) else {
        return Place::File;
    };
    match (Stop { path }).deserialize(serde_yaml::Deserializer::from_str(text)) {
        Err(error) => place_of(text, &error),
        Ok(()) => Place::File,
    }
}

fn place_of(text: &str, error: &serde_yaml::Error) -> Place {
    let Some(location) = error.location() else {
        return Place::File;
    };
    let line = text.lines().nth(location.line() - 1).unwrap_or_default();
    // The library counts characters; a place counts bytes.
    let before = line.chars().take(location.column() - 1);
    let column: usize = 1 + before.map(char::len_utf8).sum::<usize>();
    let rest = line.get(column - 1..).unwrap_or_default();
    let word = rest.find([':', ',', '}', ']', ' ']).unwrap_or(rest.len());
    Place::Line {
        line: u32::try_from(location.line()).unwrap_or(u32::MAX),
        column: u32::try_from(column).ok(),
        length: u32::try_from(word).unwrap_or(1),
    }
}

/// The library's message without the place it appends.
fn without_place(message: &str) -> &str {
    message.split(" at line ").next().unwrap_or(message)
}

struct Whole;

impl<'de> Deserialize<'de> for Yaml {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        deserializer.deserialize_any(Whole)
    }
}

impl<'de> Visitor<'de> for Whole {
    type Value = Yaml;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a YAML value")
    }
    fn visit_bool<E>(self, value: bool) -> Result<Yaml, E> {
        Ok(Yaml::Bool(value))
    }
    fn visit_i64<E>(self, value: i64) -> Result<Yaml, E> {
        Ok(Yaml::Whole(value))
    }
    fn visit_u64<E>(self, value: u64) -> Result<Yaml, E> {
        Ok(i64::try_from(value).map_or(Yaml::Number(value as f64), Yaml::Whole))
    }
    fn visit_f64<E>(self, value: f64) -> Result<Yaml, E> {
        Ok(Yaml::Number(value))
    }
    fn visit_str<E>(self, value: &str) -> Result<Yaml, E> {
        Ok(Yaml::Text(value.to_owned()))
    }
    fn visit_unit<E>(self) -> Result<Yaml, E> {
        Ok(Yaml::Null)
    }
    fn visit_none<E>(self) -> Result<Yaml, E> {
        Ok(Yaml::Null)
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut items: A) -> Result<Yaml, A::Error> {
        let mut list = Vec::new();
        while let Some(item) = items.next_element()? {
            list.push(item);
        }
        Ok(Yaml::List(list))
    }
    fn visit_map<A: MapAccess<'de>>(self, mut entries: A) -> Result<Yaml, A::Error> {
        let mut map = Vec::new();
        while let Some(entry) = entries.next_entry()? {
            map.push(entry);
        }
        Ok(Yaml::Map(map))
    }
}

/// Fails at the piece that `path` leads to.
#[derive(Clone, Copy)]
struct Stop<'p> {
    path: &'p [Step],
}

impl Stop<'_> {
    fn here<T, E: serde::de::Error>(self) -> Result<T, E> {
        Err(E::custom("here"))
    }
}

impl<'de> DeserializeSeed<'de> for Stop<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_any(self)
    }
}

impl<'de> Visitor<'de> for Stop<'_> {
    type Value = ();

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a YAML value")
    }
    fn visit_bool<E: serde::de::Error>(self, _: bool) -> Result<(), E> {
        self.here()
    }
    fn visit_i64<E: serde::de::Error>(self, _: i64) -> Result<(), E> {
        self.here()
    }
    fn visit_u64<E: serde::de::Error>(self, _: u64) -> Result<(), E> {
        self.here()
    }
    fn visit_f64<E: serde::de::Error>(self, _: f64) -> Result<(), E> {
        self.here()
    }
    fn visit_str<E: serde::de::Error>(self, _: &str) -> Result<(), E> {
        self.here()
    }
    fn visit_unit<E: serde::de::Error>(self) -> Result<(), E> {
        self.here()
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut items: A) -> Result<(), A::Error> {
        let Some((&Step::Item(wanted), rest)) = self.path.split_first() else {
            return Err(A::Error::custom("here"));
        };
        for _ in 0..wanted {
            items.next_element::<IgnoredAny>()?;
        }
        items.next_element_seed(Stop { path: rest })?;
        self.here()
    }
    fn visit_map<A: MapAccess<'de>>(self, mut entries: A) -> Result<(), A::Error> {
        let (wanted, key, rest) = match self.path.split_first() {
            Some((&Step::Key(n), rest)) => (n, true, rest),
            Some((&Step::Value(n), rest)) => (n, false, rest),
            _ => return self.here(),
        };
        for _ in 0..wanted {
            entries.next_entry::<IgnoredAny, IgnoredAny>()?;
        }
        if key {
            entries.next_key_seed(Stop { path: rest })?;
        } else {
            entries.next_key::<IgnoredAny>()?;
            entries.next_value_seed(Stop { path: rest })?;
        }
        self.here()
    }
}
