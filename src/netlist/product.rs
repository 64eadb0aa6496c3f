//! The polarities of a product: which pins an AND reads inverted, and whether its
//! result is complemented. An OR is read as the complement of the AND of its
//! complements, so every one-operator AND/OR gate has exactly one such form.

use super::function::Function;

impl Function {
    /// Input polarities of a product, and whether its result is complemented;
    /// `None` for a table that is no product.
    pub fn product_polarities(&self) -> Option<(Vec<bool>, bool)> {
        match self {
            Self::Table(table) => {
                let n = table.inputs();
                let complemented = table.bits().count_ones() != 1;
                let column = if complemented {
                    table.complement()
                } else {
                    *table
                };
                let minterm = column.bits().trailing_zeros();
                (column.bits().count_ones() == 1).then(|| {
                    (
                        (0..n).map(|pin| minterm >> pin & 1 == 0).collect(),
                        complemented,
                    )
                })
            }
            Self::Cover(cover) => {
                let mut inverted = vec![false; cover.inputs()];
                for (pin, literal) in cover.cubes().flatten() {
                    inverted[pin] = literal;
                }
                if cover.cube_count() == 1 {
                    return Some((inverted, cover.is_complemented()));
                }
                // An OR of single literals: the complement of the product of
                // their complements.
                for flag in &mut inverted {
                    *flag = !*flag;
                }
                Some((inverted, !cover.is_complemented()))
            }
        }
    }
}
