//! The table: given values with given weights on any positive scale.

use crate::law::Atom;
use crate::law::checks::{Checks, shares};
use crate::law::form::{Form, MOST_ATOMS};

pub(super) fn compile(values: &[f64], weights: &[f64], checks: &mut Checks) -> Option<Form> {
    if values.is_empty() {
        checks.problem("values", "must hold at least one value (got none)");
        return None;
    }
    if values.len() > MOST_ATOMS {
        checks.problem("values", format!("must hold at most {MOST_ATOMS} values (got {})", values.len()));
        return None;
    }
    if values.len() != weights.len() {
        checks.problem(
            "weights",
            format!(
                "must hold as many weights as there are values, {} (got {})",
                values.len(),
                weights.len()
            ),
        );
        return None;
    }
    let mut good = checks.weights("weights", weights);
    for (index, &value) in values.iter().enumerate() {
        good &= checks.finite(&format!("values/{index}"), value);
    }
    good.then(|| {
        let atoms = values.iter().zip(shares(weights)).map(|(&value, mass)| Atom { value, mass }).collect();
        Form::atoms(atoms, 0.0)
    })
}
