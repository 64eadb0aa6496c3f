//! The header line: `aag M I L O A` or `aig M I L O A`, and up to four numbers
//! more in version 1.9 (`B C J F`).
//!
//! M is the largest variable, I inputs, L latches, O outputs, A ANDs, B bad
//! states, C invariant constraints, J justice sets, F fairness constraints. The
//! numbers are checked against each other here; whether the file holds as much as
//! they announce shows when it is read.

use super::tokens::Cursor;
use crate::source::Diagnostic;

/// The header's numbers.
#[derive(Clone, Copy, Debug)]
pub(super) struct Header {
    pub(super) largest: u32,
    pub(super) inputs: u32,
    pub(super) latches: u32,
    pub(super) outputs: u32,
    pub(super) ands: u32,
    pub(super) bad: u32,
    pub(super) constraints: u32,
    pub(super) justice: u32,
    pub(super) fairness: u32,
}

const NAMES: [&str; 9] = [
    "the largest variable (M)",
    "the number of inputs (I)",
    "the number of latches (L)",
    "the number of outputs (O)",
    "the number of ANDs (A)",
    "the number of bad states (B)",
    "the number of constraints (C)",
    "the number of justice sets (J)",
    "the number of fairness constraints (F)",
];

/// A binary file lists no inputs, so its bytes justify none. More than this many
/// are believed only when the file has at least as many bytes.
const INPUTS_ON_TRUST: u32 = 1 << 20;

impl Header {
    pub(super) fn read(cursor: &mut Cursor<'_>, binary: bool) -> Result<Self, Diagnostic> {
        cursor.skip(3);
        let mut numbers = [0u32; 9];
        let mut count = 0;
        let first = cursor.offset() + 1;
        while count < NAMES.len() {
            if count >= 5 && !cursor.at_blank() {
                break;
            }
            cursor.blank(NAMES[count])?;
            numbers[count] = cursor.number(NAMES[count])?;
            count += 1;
        }
        if count == NAMES.len() && cursor.at_blank() {
            return Err(cursor.fault(
                "the end of the line after nine numbers",
                "a header has five to nine numbers",
            ));
        }
        let [
            largest,
            inputs,
            latches,
            outputs,
            ands,
            bad,
            constraints,
            justice,
            fairness,
        ] = numbers;
        let header = Self {
            largest,
            inputs,
            latches,
            outputs,
            ands,
            bad,
            constraints,
            justice,
            fairness,
        };
        header.check(cursor, first, binary)?;
        cursor.line_end()?;
        Ok(header)
    }

    fn check(&self, cursor: &Cursor<'_>, first: usize, binary: bool) -> Result<(), Diagnostic> {
        let defined = self.defined();
        let largest = u64::from(self.largest);
        let fault = |message, help| Err(cursor.fault_at(first, message, help));
        if self.largest >= 1 << 31 {
            return fault(
                format!(
                    "expected a largest variable below {}, found {largest}",
                    1u32 << 31
                ),
                "a literal is twice its variable and has to fit 32 bits",
            );
        }
        if binary && largest != defined {
            return fault(
                format!("expected M to be I + L + A = {defined}, found {largest}"),
                "binary files number their variables without gaps",
            );
        }
        if largest < defined {
            return fault(
                format!("expected M of at least I + L + A = {defined}, found {largest}"),
                "M is the largest variable; inputs, latches and ANDs need one each",
            );
        }
        if binary && self.inputs > INPUTS_ON_TRUST && self.inputs as usize > cursor.size() {
            return fault(
                format!(
                    "expected fewer inputs than bytes, found {} inputs announced in {} bytes",
                    self.inputs,
                    cursor.size()
                ),
                "the file is cut short, or its header is wrong",
            );
        }
        Ok(())
    }

    /// I + L + A.
    pub(super) fn defined(&self) -> u64 {
        u64::from(self.inputs) + u64::from(self.latches) + u64::from(self.ands)
    }

    pub(super) fn largest_literal(&self) -> u32 {
        self.largest * 2 + 1
    }
}
