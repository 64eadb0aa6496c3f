//! The rows of one `.names` block and the function they state.
//!
//! Rows are kept as the bytes of the file until the block is closed. Most blocks
//! of a netlist repeat a few covers, so short ones are looked up by those bytes
//! and turned into a function only once.

use crate::netlist::{Cover, Function, FunctionId, NetlistBuilder};
use rustc_hash::FxHashMap;

/// Longest cover, in bytes of its rows, that is remembered.
const REMEMBERED: usize = 256;

/// Rows collected for the block that is open.
#[derive(Default)]
pub(super) struct Rows {
    inputs: usize,
    /// Planes one after the other, all of the same width.
    planes: Vec<u8>,
    count: usize,
    /// Output column and line of the first row.
    column: Option<(bool, u32)>,
}

impl Rows {
    /// Begins a block with `inputs` inputs.
    pub(super) fn open(&mut self, inputs: usize) {
        self.inputs = inputs;
        self.planes.clear();
        self.count = 0;
        self.column = None;
    }

    pub(super) fn inputs(&self) -> usize {
        self.inputs
    }

    pub(super) fn is_empty(&self) -> bool {
        self.count == 0
    }

    /// Adds a row.
    ///
    /// # Errors
    /// The first row's line, when its output column differs.
    pub(super) fn add(&mut self, plane: &[u8], column: bool, line: u32) -> Result<(), u32> {
        match self.column {
            Some((first, first_line)) if first != column => return Err(first_line),
            Some(_) => {}
            None => self.column = Some((column, line)),
        }
        self.planes.extend_from_slice(plane);
        self.count += 1;
        Ok(())
    }

    fn cover(&self) -> Cover {
        // Rows with output 0 list the off-set: the function is their complement.
        let complemented = self.column.is_some_and(|(column, _)| !column);
        let cubes = (0..self.count).map(|i| {
            let plane = &self.planes[i * self.inputs..(i + 1) * self.inputs];
            plane
                .iter()
                .enumerate()
                .filter(|&(_, &b)| b != b'-')
                .map(|(pin, &b)| (pin, b == b'0'))
        });
        Cover::new(self.inputs, complemented, cubes)
    }
}

/// Functions by the bytes of their rows.
#[derive(Default)]
pub(super) struct Remembered {
    by_rows: FxHashMap<Vec<u8>, FunctionId>,
    key: Vec<u8>,
}

impl Remembered {
    /// The function of a closed block.
    pub(super) fn function(&mut self, rows: &Rows, builder: &mut NetlistBuilder) -> FunctionId {
        if rows.planes.len() > REMEMBERED || rows.count > REMEMBERED {
            return builder.function(Function::from_cover(rows.cover()));
        }
        self.key.clear();
        self.key.extend_from_slice(&rows.planes);
        let column = rows.column.is_some_and(|(column, _)| column);
        self.key.push(u8::from(column));
        // Both stay within their bounds: planes and rows are at most 256.
        self.key
            .extend_from_slice(&(rows.count as u16).to_le_bytes());
        self.key
            .extend_from_slice(&(rows.inputs as u64).to_le_bytes());
        if let Some(&id) = self.by_rows.get(&self.key) {
            return id;
        }
        let id = builder.function(Function::from_cover(rows.cover()));
        self.by_rows.insert(self.key.clone(), id);
        id
    }
}
