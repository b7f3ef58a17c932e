//! The discrete uniform law: each integer from low to high with the same probability.

use crate::law::Atom;
use crate::law::checks::Checks;
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
    Some(Form::atoms((low..=high).map(|value| Atom { value: value as f64, mass }).collect(), 0.0))
}
