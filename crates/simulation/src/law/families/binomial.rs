//! The binomial law: successes in `trials` independent trials of probability p. Sums are binomial.
//!
//! With q = 1 − p: mean trials·p, variance trials·p·q, skewness (q − p)/sd, excess kurtosis (1 − 6pq)/variance.

use super::long_table::{Recipe, tabulate};
use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::Form;
use crate::law::{Atom, ClosedFamily};
use crate::special::discrete::binomial_mass;

pub(super) fn compile(trials: u64, p: f64, checks: &mut Checks) -> Option<Form> {
    let mut good = checks.probability("p", p);
    if trials == 0 || trials > 1_000_000_000_000_000 {
        checks.problem("trials", format!("must lie between 1 and 1000000000000000 (got {trials})"));
        good = false;
    }
    if !good {
        return None;
    }
    if p == 0.0 || p == 1.0 {
        return Some(Form::atoms(vec![Atom { value: trials as f64 * p, mass: 1.0 }], 0.0));
    }
    let (n, q) = (trials as f64, 1.0 - p);
    let odds = p / q;
    let ratio = |k: u64| ((trials - k) as f64 / (k + 1) as f64) * odds;
    let variance = n * p * q;
    Some(tabulate(&Recipe {
        family: ClosedFamily::Binomial { trials, p },
        mode: (((n + 1.0) * p).floor() as u64).min(trials),
        largest: Some(trials),
        mass: &|k| binomial_mass(trials, p, k),
        ratio: &ratio,
        ratio_bound: &ratio,
        moments: StandardMoments::finite(
            n * p,
            variance.sqrt(),
            (q - p) / variance.sqrt(),
            (1.0 - 6.0 * p * q) / variance,
        ),
    }))
}
