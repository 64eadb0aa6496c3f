//! Names for writing: every net and port gets one that the format can hold, and no
//! two the same.
//!
//! Ports and nets of the top keep their names wherever possible, so what is written
//! can be read beside the original. A name is changed only when the format cannot
//! hold it or another net has it already; then it gets a number at its end.
//!
//! Invariant: the order of asking decides, and it is the order of the netlist, so
//! the same netlist is always written the same way.

use crate::netlist::{NetId, Netlist};
use rustc_hash::{FxHashMap, FxHashSet};

/// The whole name of a net as bytes: instance path, `/`, own name; `None` for nets
/// without a name.
pub(super) fn full_name(netlist: &Netlist, net: NetId) -> Option<Vec<u8>> {
    let own = netlist.local_name(net)?;
    let mut name = Vec::new();
    for part in netlist.scope_path(netlist.net_scope(net)) {
        name.extend_from_slice(netlist.names().bytes(part));
        name.push(b'/');
    }
    name.extend_from_slice(netlist.names().bytes(own));
    Some(name)
}

/// Names given away so far.
#[derive(Default)]
pub(super) struct Taken {
    names: FxHashSet<Vec<u8>>,
    /// By wished name: the number to try next.
    next: FxHashMap<Vec<u8>, u64>,
}

impl Taken {
    /// Gives `wish` away, or `wish` with a number when it is gone.
    pub(super) fn give(&mut self, wish: Vec<u8>) -> Vec<u8> {
        if self.names.insert(wish.clone()) {
            return wish;
        }
        let next = self.next.entry(wish.clone()).or_insert(2);
        loop {
            let mut name = wish.clone();
            name.extend_from_slice(format!("_{next}").as_bytes());
            *next += 1;
            if self.names.insert(name.clone()) {
                return name;
            }
        }
    }
}
