//! The prime implicants of a gate's function and of its complement.

use crate::netlist::{Function, Shape, TruthTable};

/// One product: pins and whether they are read inverted.
pub(super) type Cube = Vec<(usize, bool)>;

/// The primes of the complement and of the function.
pub(super) struct Primes(pub(super) [Vec<Cube>; 2]);

impl Primes {
    /// All primes of a function of up to six inputs; of a wider one only where it
    /// is one product or one sum of single literals, complemented or not.
    pub(super) fn of(function: &Function) -> Option<Self> {
        let cover = match function {
            Function::Table(table) => {
                let off = table_primes(table.complement());
                return Some(Self([off, table_primes(*table)]));
            }
            Function::Cover(cover) => cover,
        };
        if function.shape() != Shape::Product {
            return None;
        }
        let cubes: Vec<Cube> = cover.cubes().map(Iterator::collect).collect();
        // Either one cube, or one literal a cube.
        let literals: Cube = cubes.iter().flatten().copied().collect();
        let alone = |invert: bool| {
            let single = |&(pin, inverted): &(usize, bool)| vec![(pin, inverted != invert)];
            literals.iter().map(single).collect::<Vec<Cube>>()
        };
        let together = |invert: bool| {
            let each = |&(pin, inverted): &(usize, bool)| (pin, inverted != invert);
            vec![literals.iter().map(each).collect::<Cube>()]
        };
        let mut primes = if cubes.len() == 1 {
            [alone(true), together(false)]
        } else if cubes.iter().all(|cube| cube.len() == 1) {
            [together(true), alone(false)]
        } else {
            return None;
        };
        if cover.is_complemented() {
            primes.swap(0, 1);
        }
        Some(Self(primes))
    }
}

/// Tries every product over the pins: three choices a pin, at most 729.
fn table_primes(table: TruthTable) -> Vec<Cube> {
    let pins = table.inputs();
    let minterms = |cared: usize, values: usize| {
        (0..1usize << pins).filter(move |minterm| minterm & cared == values)
    };
    let implies = |cared: usize, values: usize| {
        minterms(cared, values).all(|minterm| table.bits() >> minterm & 1 == 1)
    };
    let mut primes = Vec::new();
    for cared in 0..1usize << pins {
        for values in (0..1usize << pins).filter(|values| values & !cared == 0) {
            let is_prime = implies(cared, values)
                && (0..pins)
                    .filter(|pin| cared >> pin & 1 == 1)
                    .all(|pin| !implies(cared & !(1 << pin), values & !(1 << pin)));
            if is_prime {
                let literals = (0..pins).filter(|pin| cared >> pin & 1 == 1);
                primes.push(literals.map(|pin| (pin, values >> pin & 1 == 0)).collect());
            }
        }
    }
    primes
}
