//! Planning: what a lookahead rebuild of a proven chain would bring and cost.
//!
//! In come a netlist, its timing and a chain; out comes a [`ChainPlan`]: the
//! candidate schemes dry-run in a scratch overlay, the trade-off front, the
//! recommended proposal and its reason. This room proposes and never edits, and
//! it cannot fail on a valid netlist: a chain it cannot plan is said so.
//! [`materialise`] makes a dry run real, for whoever writes or recounts it.

mod bound;
mod choose;
mod cone;
mod dry_run;
mod fold;
mod free_carry;
mod ground;
mod holds_under;
mod made;
mod materialise;
mod new_gates;
mod overlay;
mod profile;
mod propose;
mod retime;
mod reuse;
mod saving;
mod set_run;
mod set_site;
mod settings;
mod site;
mod tables;
mod together;
mod trace;
pub mod tradeoff;

pub use bound::{earliest, earliest_at_cost};
pub use dry_run::{DryRun, Estimate, KindChange, TakesOver};
pub use free_carry::depth_with_free_carry;
pub use ground::Ground;
pub use holds_under::{HoldsUnder, MOST_ASKED, holds_under};
pub use materialise::{Rebuilt, materialise, materialise_set};
pub use overlay::{GateStyle, Literal, Overlay};
pub use propose::{ChainPlan, MOST_PLANNED, NotPlanned, Proposal, as_it_is, plan, plan_all};
pub use saving::{MOST_SAVINGS, note_savings};
pub use set_run::{SetEstimate, SetRun};
pub use set_site::{MOST_TOGETHER, SetSite};
pub use settings::{DEFAULT_MARGIN_PERCENT, NewGates, Request, Settings, SettingsError};
pub use site::{Refused, Site};
pub use together::{Together, choose_together};
