//! Times as people read them: in units of a delay model, exact to a thousandth.
//!
//! Passes count whole ticks in `i32`; what leaves them for a record or a sentence
//! is a [`Time`], so that a figure can never be told in ticks by mistake. Whole
//! times print as whole numbers; others with as many places as make three or
//! more digits that mean something. Invariant: no arithmetic on floating point,
//! so the same netlist gives the same figures everywhere.

use std::fmt;
use std::iter::Sum;
use std::ops::{Add, Neg, Sub};

/// A time or a depth.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Time {
    thousandths: i64,
}

impl Time {
    /// No time at all.
    pub const ZERO: Self = Self { thousandths: 0 };

    /// Whole units.
    pub const fn whole(units: i64) -> Self {
        Self {
            thousandths: units * 1000,
        }
    }

    /// Thousandths of a unit.
    pub const fn thousandths(thousandths: i64) -> Self {
        Self { thousandths }
    }

    /// In thousandths of a unit.
    pub const fn in_thousandths(self) -> i64 {
        self.thousandths
    }

    /// Ticks, of which `per_unit` make a unit: 1 or 1000.
    pub fn of_ticks(ticks: i32, per_unit: i32) -> Self {
        Self {
            thousandths: i64::from(ticks) * 1000 / i64::from(per_unit),
        }
    }

    /// The whole units, when nothing is left over.
    pub fn as_whole(self) -> Option<i64> {
        (self.thousandths % 1000 == 0).then_some(self.thousandths / 1000)
    }

    /// Without its sign.
    #[must_use]
    pub fn abs(self) -> Self {
        Self::thousandths(self.thousandths.abs())
    }
}

impl fmt::Display for Time {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let size = self.thousandths.unsigned_abs();
        let (places, step) = match size {
            _ if size.is_multiple_of(1000) => (0, 1000),
            10_000.. => (1, 100),
            1_000.. => (2, 10),
            _ => (3, 1),
        };
        let rounded = (size + step / 2) / step * step;
        if self.thousandths < 0 && rounded > 0 {
            f.write_str("-")?;
        }
        let units = (rounded / 1000).to_string();
        for (i, digit) in units.char_indices() {
            if i > 0 && (units.len() - i).is_multiple_of(3) {
                f.write_str(",")?;
            }
            write!(f, "{digit}")?;
        }
        match places {
            0 => Ok(()),
            _ => write!(f, ".{:0places$}", rounded % 1000 / step),
        }
    }
}

impl PartialEq<i64> for Time {
    fn eq(&self, units: &i64) -> bool {
        *self == Self::whole(*units)
    }
}

impl PartialOrd<i64> for Time {
    fn partial_cmp(&self, units: &i64) -> Option<std::cmp::Ordering> {
        self.partial_cmp(&Self::whole(*units))
    }
}

impl Add for Time {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        Self::thousandths(self.thousandths + other.thousandths)
    }
}

impl Sub for Time {
    type Output = Self;
    fn sub(self, other: Self) -> Self {
        Self::thousandths(self.thousandths - other.thousandths)
    }
}

impl Neg for Time {
    type Output = Self;
    fn neg(self) -> Self {
        Self::thousandths(-self.thousandths)
    }
}

impl Sum for Time {
    fn sum<I: Iterator<Item = Self>>(times: I) -> Self {
        times.fold(Self::ZERO, Add::add)
    }
}
