//! Balanced allocation: the same total, split evenly between the two groups, so that their skewnesses cancel.

use super::{claim_with, from_facts};
use crate::prepared::Prepared;
use crate::report::Remedy;
use crate::scenario::Source;
use crate::words::numbers::whole;
use gaussgap_simulation::work::{Cancelled, Work};

/// The remedy, for two groups that are not balanced yet.
pub(super) fn remedy(prepared: &Prepared, work: &Work) -> Result<Option<Remedy>, Cancelled> {
    let (Source::Groups { .. }, [first, second]) = (&prepared.scenario.source, prepared.planned.as_slice())
    else {
        return Ok(None);
    };
    let total = first + second;
    let balanced = [total / 2, total - total / 2];
    if first.abs_diff(*second) <= 1 {
        return Ok(None);
    }
    let Some(facts) = claim_with(prepared, &prepared.laws, &balanced, work)? else { return Ok(None) };
    let name = format!("split evenly: {} and {}", whole(balanced[0]), whole(balanced[1]));
    Ok(Some(from_facts(prepared, name, &facts, "the same total; the skewnesses of like groups cancel")))
}
