//! What one input pin of a gate costs: how its delay follows the load on the
//! output, and how much the pin itself loads what drives it.
//!
//! Loads are whole numbers like times, in a scale that each model chooses.
//! Invariant: delay never falls as load grows within a line, and a curve is
//! followed as it is given; both are evaluated in whole numbers.

/// How the delay of a pin follows the load.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Curve {
    /// `fixed` ticks, and `slope` more for every 1000 of load.
    Line {
        /// Without load.
        fixed: i32,
        /// For every 1000 of load.
        slope: i32,
    },
    /// Straight between points of (load, ticks), and on past the outer ones; loads
    /// ascend.
    Points(Vec<(i32, i32)>),
}

impl Curve {
    /// The same curve, so many ticks later.
    #[must_use]
    pub fn later(&self, ticks: i32) -> Self {
        match self {
            Self::Line { fixed, slope } => Self::Line {
                fixed: fixed.saturating_add(ticks),
                slope: *slope,
            },
            Self::Points(points) => {
                let moved = points
                    .iter()
                    .map(|&(load, at)| (load, at.saturating_add(ticks)));
                Self::Points(moved.collect())
            }
        }
    }

    /// The delay in ticks at `load`, never below zero.
    pub fn at(&self, load: i32) -> i32 {
        let value = match self {
            Self::Line { fixed, slope } => {
                i64::from(*fixed) + rounded(i64::from(*slope) * i64::from(load), 1000)
            }
            Self::Points(points) => between(points, load),
        };
        i32::try_from(value.max(0)).unwrap_or(MOST)
    }
}

/// More than any gate delays.
const MOST: i32 = 1 << 30;

fn between(points: &[(i32, i32)], load: i32) -> i64 {
    let [first, rest @ ..] = points else {
        return 0;
    };
    if rest.is_empty() {
        return i64::from(first.1);
    }
    let after = points.partition_point(|&(at, _)| at <= load);
    let right = after.clamp(1, points.len() - 1);
    let ((x0, y0), (x1, y1)) = (points[right - 1], points[right]);
    let (x0, y0) = (i64::from(x0), i64::from(y0));
    let run = (i64::from(x1) - x0).max(1);
    y0 + rounded((i64::from(load) - x0) * (i64::from(y1) - y0), run)
}

/// The quotient to the nearest whole number, halves upwards.
fn rounded(number: i64, by: i64) -> i64 {
    (2 * number + by).div_euclid(2 * by)
}

/// What a pin costs.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct PinPrice {
    /// Delay from the pin to the output.
    pub delay: Curve,
    /// Load of the pin on what drives it.
    pub load: i32,
}

impl PinPrice {
    /// A pin whose delay depends on nothing and that loads nothing.
    pub fn without_load(delay: i32) -> Self {
        Self {
            delay: Curve::Line {
                fixed: delay,
                slope: 0,
            },
            load: 0,
        }
    }
}
