//! The delay of a path whose gates may be sized: D = N·F^(1/N) + P.
//!
//! With G the product of the gates' logical efforts, B that of the branching
//! efforts and H the load over the input capacitance, the path effort is
//! F = G·B·H; the path is fastest when every stage bears F^(1/N), and the sizes
//! follow from the load backwards: C_in = g·b·C_out/f (Sutherland, Sproull, Harris,
//! *Logical Effort*, 1999, chapter 1). Worked examples of the book and of Weste and
//! Harris, *CMOS VLSI Design*, chapter 4, are in `tests/logical_effort.rs`.

use super::cell::EffortCell;

/// What an inverter delays when it drives four like it: g·h + p = 4 + 1, in τ.
pub const FO4: f64 = 5.0;

/// One stage of a path.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Stage {
    /// The gate.
    pub cell: EffortCell,
    /// The input the path enters by.
    pub pin: usize,
    /// What the stage drives in all, over what it drives on the path: 1 without
    /// branches.
    pub branching: f64,
}

impl Stage {
    /// A stage without branches, entered by the first input.
    pub fn new(cell: EffortCell) -> Self {
        Self {
            cell,
            pin: 0,
            branching: 1.0,
        }
    }

    /// The same with a branching effort.
    #[must_use]
    pub fn branching(self, branching: f64) -> Self {
        Self { branching, ..self }
    }
}

/// The least delay of a path.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PathEffort {
    /// F = G·B·H.
    pub effort: f64,
    /// F^(1/N), the same for every stage.
    pub stage_effort: f64,
    /// P, the sum of the parasitic delays, in τ.
    pub parasitic: f64,
    /// D = N·F^(1/N) + P, in τ.
    pub delay: f64,
}

impl PathEffort {
    /// The least delay of `stages` when the path's load is `electrical` times its
    /// input capacitance. A path without stages takes no time.
    pub fn of(stages: &[Stage], electrical: f64) -> Self {
        let own = |stage: &Stage| stage.cell.effort(stage.pin) * stage.branching;
        let effort = stages.iter().map(own).product::<f64>() * electrical;
        let parasitic: f64 = stages
            .iter()
            .map(|stage| f64::from(stage.cell.parasitic()))
            .sum();
        let count = stages.len() as f64;
        let stage_effort = if stages.is_empty() {
            0.0
        } else {
            effort.powf(1.0 / count)
        };
        Self {
            effort,
            stage_effort,
            parasitic,
            delay: count * stage_effort + parasitic,
        }
    }

    /// The delay in inverters that drive four like them.
    pub fn in_fo4(&self) -> f64 {
        self.delay / FO4
    }

    /// The input capacitance of every stage, in the unit of `load`, that gives the
    /// least delay; `stages` are those the value was made of.
    pub fn sizes(&self, stages: &[Stage], load: f64) -> Vec<f64> {
        let mut sizes = vec![0.0; stages.len()];
        let mut behind = load;
        for (size, stage) in sizes.iter_mut().zip(stages).rev() {
            let effort = stage.cell.effort(stage.pin) * stage.branching;
            behind = effort * behind / self.stage_effort;
            *size = behind;
        }
        sizes
    }
}

/// The stage effort of the fastest path to a given effort when stages can be added:
/// the root of p + f·(1 − ln f) = 0 for inverters of parasitic delay `parasitic`;
/// 3.59 for 1, e for 0.
pub fn best_stage_effort(parasitic: f64) -> f64 {
    let mut low = 1.0_f64.exp();
    let mut high = low + 2.0 * parasitic.max(0.0) + 1.0;
    for _ in 0..60 {
        let middle = f64::midpoint(low, high);
        if parasitic + middle * (1.0 - middle.ln()) > 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    low
}
