//! Ladner–Fischer: a few folds around Sklansky's network.
//!
//! With `l` extra levels the row is folded `l` times: each spends one level and
//! about halves the cells and the fan-out of the middle. `l` = 0 is Sklansky;
//! enough folds are Brent–Kung. This is the form the taxonomy of prefix networks
//! gives the name to, with levels L + l (D. Harris, "A Taxonomy of Parallel
//! Prefix Networks", Asilomar 2003).
//!
//! R. E. Ladner and M. J. Fischer, "Parallel Prefix Computation", Journal of the
//! ACM 27, 1980.

use super::fold::folded;
use super::{Growth, Scheme, Takes, VALENCY, items, set_carries, sklansky};

pub(super) const SCHEME: Scheme = Scheme {
    name: "ladner-fischer",
    source: "Ladner and Fischer 1980",
    growth: Growth::LogLinear,
    takes: Takes {
        extra_levels: true,
        ..VALENCY
    },
    shape: |network, settings, _| {
        let items = items(network);
        let (valency, folds) = (settings.valency, settings.extra_levels);
        let prefixes = folded(network, &items, valency, folds, sklansky::prefixes);
        set_carries(network, &prefixes);
    },
};
