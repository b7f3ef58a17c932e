//! The geometric law: failures before the first success, P(X = k) = p(1 − p)^k. It is the negative binomial
//! law of size 1.

use super::negative_binomial;
use crate::law::checks::Checks;
use crate::law::form::Form;

pub(super) fn compile(p: f64, checks: &mut Checks) -> Option<Form> {
    negative_binomial::compile(1.0, p, checks)
}
