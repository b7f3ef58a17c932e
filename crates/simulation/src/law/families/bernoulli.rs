//! The Bernoulli law: 1 with probability p, else 0. Sums are binomial.

use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::Form;
use crate::law::{Atom, ClosedFamily};

pub(super) fn compile(p: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.probability("p", p) {
        return None;
    }
    let atoms = vec![Atom { value: 0.0, mass: 1.0 - p }, Atom { value: 1.0, mass: p }];
    Some(
        Form::atoms(atoms, 0.0)
            .with_closed_form(ClosedFamily::Binomial { trials: 1, p }, 0.0, 1.0)
            .with_moments(moments(p)),
    )
}

/// Mean p, variance pq, skewness (q − p)/√(pq), excess kurtosis (1 − 6pq)/(pq), with q = 1 − p.
pub(in crate::law) fn moments(p: f64) -> StandardMoments {
    let q = 1.0 - p;
    if p * q == 0.0 {
        return StandardMoments::finite(p, 0.0, 0.0, -3.0);
    }
    let sd = (p * q).sqrt();
    StandardMoments::finite(p, sd, (q - p) / sd, (1.0 - 6.0 * p * q) / (p * q))
}
