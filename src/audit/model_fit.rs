//! Whether a delay model fits what the netlist is made of.
//!
//! Logical effort describes static CMOS gates. Look-up tables take the same time
//! whatever function is in them, so where a netlist is made of functions that no
//! common cell has, its figures say little; that is told wherever they are told.

use super::words::{counted, grouped};
use crate::netlist::{FunctionId, Netlist};
use crate::timing::{DelayModel, effort};

/// One gate in so many has a function that no common cell has: then it is told.
/// No source: a share that a few hand-made covers do not reach.
const ONE_IN: usize = 10;

/// What does not fit, as a clause; `None` where the model fits.
pub fn misfit(netlist: &Netlist, model: DelayModel) -> Option<String> {
    if model != DelayModel::LogicalEffort {
        return None;
    }
    let odd: Vec<bool> = (0..netlist.function_count())
        .map(|id| !effort::is_common_cell(netlist.function_of(FunctionId::new(id))))
        .collect();
    let is_odd = |gate: &_| odd[netlist.function_id(*gate).index()];
    let count = netlist.gates().filter(is_odd).count();
    (count > 0 && count * ONE_IN >= netlist.gate_count()).then(|| {
        format!(
            "logical effort is about static CMOS gates, and {} of {} no common cell's function, \
             as look-up tables do; those are priced as NAND–NAND, and for look-up tables the \
             figures mean nothing",
            grouped(count as u64),
            match netlist.gate_count() {
                1 => "1 gate has".to_owned(),
                n => format!("{} have", counted(n as u64, "gate", "gates")),
            }
        )
    })
}
