//! Times in a record: a whole number where there is nothing behind the point,
//! else a decimal number exact to a thousandth. Read back they are the same.

use crate::timing::Time;
use serde::de::{Error, Visitor};
use serde::{Deserialize, Deserializer, Serialize, Serializer};
use std::fmt;

/// Beyond this no time of a netlist lies, and a thousandth of it is exact.
const MOST_UNITS: i64 = 1 << 40;

impl Serialize for Time {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self.as_whole() {
            Some(units) => serializer.serialize_i64(units),
            None => serializer.serialize_f64(self.in_thousandths() as f64 / 1000.0),
        }
    }
}

impl<'de> Deserialize<'de> for Time {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        deserializer.deserialize_any(Number)
    }
}

struct Number;

impl Visitor<'_> for Number {
    type Value = Time;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a time")
    }
    fn visit_i64<E: Error>(self, units: i64) -> Result<Time, E> {
        if units.unsigned_abs() > MOST_UNITS.unsigned_abs() {
            return Err(E::custom("a time beyond any netlist"));
        }
        Ok(Time::whole(units))
    }
    fn visit_u64<E: Error>(self, units: u64) -> Result<Time, E> {
        self.visit_i64(i64::try_from(units).unwrap_or(i64::MAX))
    }
    fn visit_f64<E: Error>(self, units: f64) -> Result<Time, E> {
        if units.is_nan() || units.abs() > MOST_UNITS as f64 {
            return Err(E::custom("a time beyond any netlist"));
        }
        Ok(Time::thousandths((units * 1000.0).round() as i64))
    }
}
