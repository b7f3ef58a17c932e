//! The Poisson law: P(X = k) = e^{−rate} rate^k/k!. Sums are Poisson.
//!
//! Mean and variance are the rate, skewness 1/√rate, excess kurtosis 1/rate.

use super::long_table::{Recipe, tabulate};
use crate::law::ClosedFamily;
use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::Form;
use crate::special::discrete::poisson_mass;

pub(super) fn compile(rate: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.within("rate", rate, 1e-300, 1e15) {
        return None;
    }
    let ratio = |k: u64| rate / (k + 1) as f64;
    Some(tabulate(&Recipe {
        family: ClosedFamily::Poisson { rate },
        mode: rate.floor() as u64,
        largest: None,
        mass: &|k| poisson_mass(rate, k),
        ratio: &ratio,
        ratio_bound: &ratio,
        moments: StandardMoments::finite(rate, rate.sqrt(), 1.0 / rate.sqrt(), 1.0 / rate),
    }))
}
