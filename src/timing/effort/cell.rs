//! The static gates of logical effort and what is published of each.
//!
//! Values of Sutherland, Sproull and Harris, *Logical Effort: Designing Fast CMOS
//! Circuits* (1999), for a pMOS/nMOS ratio of 2 and a parasitic delay of 1 for the
//! inverter. Efforts are kept in thirds, in which all of them are whole, so that a
//! price is the same on every machine. Series stacks beyond about four devices are
//! slower than these linear rules say (the same book).

/// A static gate.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum EffortCell {
    /// An inverter: effort 1, parasitic 1.
    Inverter,
    /// A NAND of n inputs: effort (n + 2)/3, parasitic n.
    Nand(u32),
    /// A NOR of n inputs: effort (2n + 1)/3, parasitic n.
    Nor(u32),
    /// An exclusive-or, or its complement, of 2, 3 or 4 inputs: efforts 4, 4;
    /// 6, 12, 6; 8, 16, 16, 8; parasitic 4, 6, 8.
    Xor(u32),
    /// A multiplexer of n data inputs: effort 2 for each of its inputs,
    /// parasitic 2n.
    Multiplexer(u32),
}

impl EffortCell {
    /// The logical effort of input `pin` in thirds; pins of one gate differ only
    /// in wide exclusive-ors.
    pub fn effort_in_thirds(self, pin: usize) -> u32 {
        match self {
            Self::Inverter => 3,
            Self::Nand(inputs) => inputs + 2,
            Self::Nor(inputs) => 2 * inputs + 1,
            Self::Xor(inputs) => {
                let outermost = pin == 0 || pin + 1 >= inputs as usize;
                match (inputs, outermost) {
                    (..=2, _) => 12,
                    (_, true) => 6 * inputs,
                    (_, false) => 12 * inputs,
                }
            }
            Self::Multiplexer(_) => 6,
        }
    }

    /// The logical effort g of input `pin`.
    pub fn effort(self, pin: usize) -> f64 {
        f64::from(self.effort_in_thirds(pin)) / 3.0
    }

    /// The parasitic delay p, in τ.
    pub fn parasitic(self) -> u32 {
        match self {
            Self::Inverter => 1,
            Self::Nand(inputs) | Self::Nor(inputs) => inputs,
            Self::Xor(inputs) | Self::Multiplexer(inputs) => 2 * inputs,
        }
    }

    /// The delay d = g·h + p of input `pin` at the electrical effort `h`, in τ.
    pub fn delay(self, pin: usize, h: f64) -> f64 {
        self.effort(pin) * h + f64::from(self.parasitic())
    }
}
