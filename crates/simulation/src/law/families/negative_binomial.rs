//! The negative binomial law: failures before the size-th success, each trial succeeding with probability p;
//! `size` may be any positive number. Sums of copies are negative binomial.
//!
//! With q = 1 − p: mean size·q/p, variance size·q/p², skewness (1 + q)/√(size·q), excess kurtosis
//! (6 + p²/q)/size.

use super::long_table::{Recipe, tabulate};
use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::Form;
use crate::law::{Atom, ClosedFamily};
use crate::special::discrete::negative_binomial_mass;

pub(super) fn compile(size: f64, p: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.within("size", size, 1e-6, 1e12) & checks.positive_probability("p", p)) {
        return None;
    }
    if p == 1.0 {
        return Some(Form::atoms(vec![Atom { value: 0.0, mass: 1.0 }], 0.0));
    }
    if p < 1e-12 || size / p > 1e15 {
        checks.problem("p", format!("must be at least 1e-12 and give a mean of at most 1e15 (got {p:e})"));
        return None;
    }
    let q = 1.0 - p;
    let ratio = |k: u64| (k as f64 + size) / (k + 1) as f64 * q;
    Some(tabulate(&Recipe {
        family: ClosedFamily::NegativeBinomial { size, p },
        mode: if size > 1.0 { ((size - 1.0) * q / p).floor() as u64 } else { 0 },
        largest: None,
        mass: &|k| negative_binomial_mass(size, p, k),
        ratio: &ratio,
        // The ratios fall towards q for sizes above 1 and rise towards q below.
        ratio_bound: &|k| ratio(k).max(q),
        moments: StandardMoments::finite(
            size * q / p,
            (size * q).sqrt() / p,
            (1.0 + q) / (size * q).sqrt(),
            (6.0 + p * p / q) / size,
        ),
    }))
}
