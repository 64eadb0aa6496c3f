//! Names for writing: every net and port gets one that the format can hold, and no
//! two the same.
//!
//! Ports and nets of the top keep their names wherever possible, so what is written
//! can be read beside the original. A name is changed only when the format cannot
//! hold it or another net has it already; then it gets a number at its end.
//!
//! Invariant: the order of asking decides, and it is the order of the netlist, so
//! the same netlist is always written the same way.

use crate::netlist::{NameId, Names, NetId, Netlist};
use rustc_hash::FxHashMap;

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

/// Names given away so far, in one arena.
#[derive(Default)]
pub(super) struct Taken {
    names: Names,
    /// By wished name: the number to try next.
    next: FxHashMap<NameId, u64>,
}

impl Taken {
    /// Gives `wish` away, or `wish` with a number when it is gone.
    pub(super) fn give(&mut self, wish: &[u8]) -> NameId {
        let count = self.names.len();
        let wished = self.names.intern(wish);
        if self.names.len() > count {
            return wished;
        }
        let next = self.next.entry(wished).or_insert(2);
        loop {
            let name = [wish, format!("_{next}").as_bytes()].concat();
            *next += 1;
            let count = self.names.len();
            let given = self.names.intern(&name);
            if self.names.len() > count {
                return given;
            }
        }
    }

    /// The bytes of a name that was given away.
    #[inline]
    pub(super) fn bytes(&self, name: NameId) -> &[u8] {
        self.names.bytes(name)
    }
}
