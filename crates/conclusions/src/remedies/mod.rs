//! Remedies: what else could be done at the planned n, each with its actual figure, the cheapest first.
//!
//! A remedy's figure is computed the way the claim's own is: the real coverage or size of a corrected interval or
//! test; for a claim about one number (threshold, quantile, deviation) the true number, with what the remedy gives
//! in its note; for the whole curve the distance that is left. The note of every row says in words what its figure
//! is.

mod allocation;
mod capping;
mod critical;
mod curve;
mod numbers;
mod proportion;
mod skewness;

use crate::claims::{self, StudentizedBudget, evaluate_studentized, is_studentized, state};
use crate::prepared::Prepared;
use crate::report::{ClaimFacts, Remedy, State, Verdict};
use crate::scenario::{Claim, Source, Statistic};
use crate::words::finding::outcome;
use crate::words::numbers::whole;
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::Law;
use gaussgap_simulation::sum::{Method, StandardizedSum, SumError, build_exact};
use gaussgap_simulation::work::{Cancelled, Work};

/// Share of the allowed probability of error spent on all simulated remedies together.
const REMEDY_SHARE: f64 = 0.1;

/// At most this many simulated remedies; the share is divided among them.
const MOST_SIMULATED: u32 = 12;

/// Simulated summands of one remedy.
const SUMMANDS: u64 = 12_000_000;

/// Simulated summands to confirm one larger n.
const CONFIRM: u64 = 40_000_000;

/// Every remedy for the claim, the cheapest for the user first: those that change only the arithmetic, then those
/// that change the plan, then those that change what is estimated.
pub(crate) fn remedies(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    claim: &ClaimFacts,
    verdict: &Verdict,
    work: &Work,
) -> Result<Vec<Remedy>, Cancelled> {
    let mut found = Vec::new();
    match prepared.scenario.claim {
        Claim::Curve => found.extend(curve::remedies(prepared, sum)),
        Claim::Threshold { .. } | Claim::Deviation { .. } | Claim::Quantile { .. } => {
            found.extend(numbers::remedies(prepared, sum, claim));
        }
        Claim::Interval { .. } | Claim::Test { .. } => {
            if !is_studentized(&prepared.scenario.claim) {
                found.extend(critical::remedies(prepared, sum, claim));
            }
            found.extend(proportion::remedies(prepared, claim));
            found.extend(skewness::remedies(prepared, claim, work)?);
        }
    }
    work.check()?;
    found.extend(allocation::remedy(prepared, work)?);
    found.extend(more(prepared, verdict, work)?);
    // A cap changes what is estimated: no remedy where the claim holds as it is.
    if verdict.state != State::Holds {
        found.extend(capping::remedies(prepared, work)?);
    }
    Ok(found)
}

/// What can be done about a law without a finite variance: cap it.
pub(crate) fn without_variance(prepared: &Prepared, work: &Work) -> Result<Vec<Remedy>, Cancelled> {
    capping::remedies(prepared, work)
}

/// A remedy whose figure is the claim's compared number for a changed plan; the note ends with what it is.
fn from_facts(prepared: &Prepared, name: String, facts: &ClaimFacts, note: &str) -> Remedy {
    let state = state(facts);
    let note = match outcome(prepared.scenario, facts, state) {
        Some(outcome) => format!("{note}; {outcome}"),
        None => note.to_owned(),
    };
    Remedy { name, actual: facts.actual, holds: state == State::Holds, note }
}

/// A remedy of the planned claim whose figure is to stay near the nominal number.
fn near(prepared: &Prepared, name: &str, actual: Figure, claim: &ClaimFacts, note: &str) -> Remedy {
    let facts =
        ClaimFacts { actual: Some(actual), difference: Some(actual.value - claim.nominal), ..claim.clone() };
    from_facts(prepared, name.to_owned(), &facts, note)
}

/// The claim computed for other laws or other counts; `None` where no route reaches it.
fn claim_with(
    prepared: &Prepared,
    laws: &[Law],
    counts: &[u64],
    work: &Work,
) -> Result<Option<ClaimFacts>, Cancelled> {
    claim_spending(SUMMANDS, prepared, laws, counts, work)
}

/// Whether what is summed grows with n, so that a claim about a fixed value asks something else at another n.
pub(crate) fn asks_a_total(prepared: &Prepared) -> bool {
    let total = matches!(prepared.scenario.source, Source::Parts { .. })
        || matches!(prepared.scenario.source, Source::Like { .. })
            && prepared.scenario.statistic == Statistic::Sum;
    total && matches!(prepared.scenario.claim, Claim::Threshold { .. } | Claim::Deviation { .. })
}

/// The same with another budget of simulated summands.
fn claim_spending(
    summands: u64,
    prepared: &Prepared,
    laws: &[Law],
    counts: &[u64],
    work: &Work,
) -> Result<Option<ClaimFacts>, Cancelled> {
    let changed = Prepared { scenario: prepared.scenario, laws: laws.to_vec(), planned: counts.to_vec() };
    let result = if is_studentized(&prepared.scenario.claim) {
        let n = counts.iter().sum::<u64>().max(1);
        let budget = StudentizedBudget {
            draws: prepared.scenario.method.draws.min((summands / n).max(2000)),
            share: REMEDY_SHARE / f64::from(MOST_SIMULATED),
            precision: 1.0,
        };
        evaluate_studentized(&changed, laws, counts, &budget, work).map(|(facts, _)| facts)
    } else {
        build_exact(&changed.sum_spec(counts), &Method::default(), work)
            .map(|sum| claims::evaluate(&changed, counts, sum.as_ref()))
    };
    match result {
        Ok(facts) => Ok(Some(facts)),
        Err(SumError::Cancelled(cancelled)) => Err(cancelled),
        Err(_) => Ok(None),
    }
}

/// Simply more: the smallest n from which on the claim holds, as found by the search; where the figure there is too
/// uncertain to confirm that, a somewhat larger n that does.
///
/// None for a claim about a total and a fixed value: at another n that is another question.
fn more(prepared: &Prepared, verdict: &Verdict, work: &Work) -> Result<Option<Remedy>, Cancelled> {
    if asks_a_total(prepared) || verdict.state == State::Holds {
        return Ok(None);
    }
    let Some(safe) = verdict.safe_from.filter(|safe| *safe > prepared.total()) else { return Ok(None) };
    for extra in [0.0, 0.1, 0.3] {
        let n = safe + (extra * safe as f64).ceil() as u64;
        if n > prepared.scenario.search.up_to {
            break;
        }
        let Some(counts) = prepared.counts_at(n) else { break };
        let Some(facts) = claim_spending(CONFIRM, prepared, &prepared.laws, &counts, work)? else { break };
        if state(&facts) != State::Holds {
            continue;
        }
        let what = match prepared.scenario.source {
            Source::Like { .. } => format!("take n = {}", whole(n)),
            _ => format!("take {} in all, in the same proportions", whole(n)),
        };
        let note = format!("{} more than planned", whole(n - prepared.total()));
        return Ok(Some(from_facts(prepared, what, &facts, &note)));
    }
    Ok(None)
}
