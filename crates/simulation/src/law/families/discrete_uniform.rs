//! The discrete uniform law: each of the N integers from low to high with the same probability.
//!
//! Variance (N² − 1)/12, skewness 0, excess kurtosis −(6/5)(N² + 1)/(N² − 1).

use crate::law::Atom;
use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::{Form, MOST_ATOMS};

pub(super) fn compile(low: i64, high: i64, checks: &mut Checks) -> Option<Form> {
    if low > high {
        checks.problem("high", format!("must be at least `low` = {low} (got {high})"));
        return None;
    }
    for (name, value) in [("low", low), ("high", high)] {
        if value.unsigned_abs() > 1 << 53 {
            checks.problem(name, format!("must lie between -2^53 and 2^53 (got {value})"));
            return None;
        }
    }
    let count = (high - low) as u64 + 1;
    if count > MOST_ATOMS as u64 {
        checks.problem(
            "high",
            format!("must leave at most {MOST_ATOMS} values (got {count}); use `uniform` for finer ones"),
        );
        return None;
    }
    let mass = 1.0 / count as f64;
    let n = count as f64;
    let moments = StandardMoments::finite(
        0.5 * (low as f64 + high as f64),
        ((n * n - 1.0) / 12.0).sqrt(),
        0.0,
        if count == 1 { -3.0 } else { -1.2 * (n * n + 1.0) / (n * n - 1.0) },
    );
    let atoms = (low..=high).map(|value| Atom { value: value as f64, mass }).collect();
    Some(Form::atoms(atoms, 0.0).with_moments(moments))
}
