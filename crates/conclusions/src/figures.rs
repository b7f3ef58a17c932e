//! Arithmetic with figures: the error of a combination of numbers that carry errors.

use gaussgap_simulation::figure::{Basis, Figure};

/// The weaker of two bases: a combination is only as certain as its least certain part.
pub(crate) fn weaker(first: Basis, second: Basis) -> Basis {
    if first == Basis::Confidence || second == Basis::Confidence { Basis::Confidence } else { Basis::Bound }
}

/// first + second; the errors add, and so does the rounding.
pub(crate) fn plus(first: Figure, second: Figure) -> Figure {
    let value = first.value + second.value;
    Figure {
        value,
        error: first.error + second.error + f64::EPSILON * value.abs(),
        basis: weaker(first.basis, second.basis),
    }
}

/// 1 − p.
pub(crate) fn complement(p: Figure) -> Figure {
    Figure { value: 1.0 - p.value, error: p.error + f64::EPSILON, basis: p.basis }
}

/// A probability that is exactly 0.
pub(crate) const NEVER: Figure = Figure::bound(0.0, 0.0);
