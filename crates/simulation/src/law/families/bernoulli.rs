//! The Bernoulli law: 1 with probability p, else 0. Sums are binomial.

use crate::law::checks::Checks;
use crate::law::form::Form;
use crate::law::{Atom, ClosedFamily};

pub(super) fn compile(p: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.probability("p", p) {
        return None;
    }
    let atoms = vec![Atom { value: 0.0, mass: 1.0 - p }, Atom { value: 1.0, mass: p }];
    Some(Form::atoms(atoms, 0.0).with_closed_form(ClosedFamily::Binomial { trials: 1, p }, 0.0, 1.0))
}
