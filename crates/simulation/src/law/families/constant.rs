//! The constant: one value with probability 1.

use crate::law::Atom;
use crate::law::checks::Checks;
use crate::law::form::Form;

pub(super) fn compile(value: f64, checks: &mut Checks) -> Option<Form> {
    checks.finite("value", value).then(|| Form::atoms(vec![Atom { value, mass: 1.0 }], 0.0))
}
