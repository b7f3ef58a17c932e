//! The claims `interval` and `test` with estimated spread: the t-interval and the t-test (Welch's for groups).
//!
//! T = √n (x̄ − μ)/s with s² = Σ(xᵢ − x̄)²/(n − 1), compared with Student's t(n − 1); for two groups T = (x̄₂ − x̄₁ −
//! (μ₂ − μ₁))/√(s₁²/n₁ + s₂²/n₂), compared with Student's t at Welch's degrees of freedom. The whole interval lies
//! below the true value when T < −t and above it when T > t; a `lower` limit misses high, an `upper` limit misses
//! low, as for known spread. A sample whose values are all equal has s = 0: its interval is a point, which misses
//! unless it hits. A single observation has no s, hence no interval: the claim fails.
//!
//! Example: three Bernoulli(1/2) values, two-sided 95 %, t = 4.303. With one or two ones among three, x̄ is 1/3 or 2/3
//! and s = 0.577, so that |T| = √3·(1/6)/0.577 = 0.5: covered. With none or three s = 0 and the point misses. So the
//! interval covers with probability 6/8 = 0.75 and misses low and high with 1/8 = 0.125 each. The test rejects
//! with probability 1/4.

use super::interval::tail_probability;
use super::noncentral::noncentral_above;
use super::test::{Planned, group_ratio};
use super::{interval, test, without_figure};
use crate::figures::{NEVER, complement};
use crate::prepared::{Prepared, share_of_confidence};
use crate::report::{ClaimFacts, State};
use crate::scenario::{Claim, Sides, Source, Spread};
use gaussgap_simulation::law::Law;
use gaussgap_simulation::monte_carlo::studentized::{Misses, Studentized, StudentizedRequest, misses};
use gaussgap_simulation::special::student;
use gaussgap_simulation::sum::SumError;
use gaussgap_simulation::work::Work;

/// Simulated summands after which a decided figure is sharp enough.
const PLENTY: u64 = 160_000_000;

/// How much a studentized figure may cost.
#[derive(Debug, Clone, Copy)]
pub(crate) struct StudentizedBudget {
    /// Simulated samples.
    pub draws: u64,
    /// Share of the allowed probability of a wrong band.
    pub share: f64,
    /// Draw on until the error is this share of what the tolerance allows, or [`PLENTY`] is spent, and the verdict is
    /// decided.
    pub precision: f64,
}

/// Computes a studentized claim, with what was done to compute it (nothing where no interval exists).
pub(crate) fn evaluate_studentized(
    prepared: &Prepared,
    laws: &[Law],
    counts: &[u64],
    budget: &StudentizedBudget,
    work: &Work,
) -> Result<(ClaimFacts, Option<Misses>), SumError> {
    let scenario = prepared.scenario;
    let claim = scenario.claim;
    let (missing, sides) = match claim {
        Claim::Interval { level, sides, .. } => (1.0 - level, sides),
        Claim::Test { significance, sides, .. } => (significance, sides),
        _ => (0.5, Sides::Two),
    };
    let tail = tail_probability(missing, sides);
    if counts.iter().any(|count| *count < 2) {
        return Ok((without_figure(&claim, &scenario.tolerance, None), None));
    }
    let statistic = match (laws, counts) {
        ([first, second], [n_first, n_second]) => {
            Studentized::Difference { first, n_first: *n_first, second, n_second: *n_second }
        }
        _ => Studentized::Mean { law: &laws[0], n: counts.iter().sum() },
    };
    // A mean is shifted in units of σ, a difference in units of its own standard deviation.
    let shift = match (claim, statistic) {
        (Claim::Test { shift: Some(shift), .. }, Studentized::Mean { .. }) => shift,
        (Claim::Test { shift: Some(shift), .. }, _) => shift * group_ratio(prepared, counts),
        _ => 0.0,
    };
    let request = StudentizedRequest {
        statistic,
        tail_probability: tail,
        shift,
        draws: budget.draws,
        seed: scenario.method.seed,
        confidence: share_of_confidence(scenario.method.confidence, budget.share),
    };
    let facts = |found: &Misses| facts_of(prepared, counts, found, tail);
    let enough = |found: &Misses| {
        let facts = facts(found);
        let error = facts.actual.map_or(0.0, |actual| actual.error);
        let spent = found.draws.unwrap_or(0).saturating_mul(counts.iter().sum());
        super::state(&facts) != State::Undecided
            && (error <= budget.precision * facts.allowed || spent >= PLENTY)
    };
    let found = misses(&request, &enough, work)?;
    Ok((facts(&found), Some(found)))
}

/// The claim from the misses of its statistic.
fn facts_of(prepared: &Prepared, counts: &[u64], found: &Misses, tail: f64) -> ClaimFacts {
    let tolerance = &prepared.scenario.tolerance;
    match prepared.scenario.claim {
        Claim::Test { significance, sides, shift, .. } => {
            let low = if sides == Sides::Upper { NEVER } else { found.low };
            let high = if sides == Sides::Lower { NEVER } else { found.high };
            let planned = match shift {
                None => Planned { nominal: significance, low: tail, high: tail },
                Some(shift) => planned_power(prepared, counts, shift, tail, sides),
            };
            let facts = test::facts(significance, sides, Spread::Estimated, &planned, low, high, tolerance);
            if sides != Sides::Two {
                return facts;
            }
            // What does not stay inside rejects: sharper than adding the two sides' errors.
            let rejected = complement(found.covered);
            let difference = Some(rejected.value - facts.nominal);
            ClaimFacts { actual: Some(rejected), difference, ..facts }
        }
        Claim::Interval { level, sides, .. } => match sides {
            Sides::Two => interval::facts(
                level,
                sides,
                Spread::Estimated,
                found.low,
                found.high,
                found.covered,
                tolerance,
            ),
            Sides::Lower => {
                let covered = complement(found.high);
                interval::facts(level, sides, Spread::Estimated, NEVER, found.high, covered, tolerance)
            }
            Sides::Upper => {
                let covered = complement(found.low);
                interval::facts(level, sides, Spread::Estimated, found.low, NEVER, covered, tolerance)
            }
        },
        claim => without_figure(&claim, tolerance, None),
    }
}

/// The power that normal theory plans: noncentral t with n − 1 degrees of freedom, for groups with Welch's degrees
/// of freedom at the true variances.
fn planned_power(prepared: &Prepared, counts: &[u64], shift: f64, tail: f64, sides: Sides) -> Planned {
    let (degrees, delta) = match (&prepared.scenario.source, counts) {
        (Source::Groups { .. }, [n_first, n_second]) => {
            let variances =
                prepared.laws.iter().map(|law| law.moments.variance.unwrap_or(0.0)).collect::<Vec<_>>();
            let largest = variances.iter().copied().fold(f64::MIN_POSITIVE, f64::max);
            let first = variances[0] / largest / *n_first as f64;
            let second = variances[1] / largest / *n_second as f64;
            let degrees = (first + second).powi(2)
                / (first * first / (*n_first as f64 - 1.0) + second * second / (*n_second as f64 - 1.0));
            (degrees, shift * group_ratio(prepared, counts))
        }
        _ => {
            let n = counts.iter().sum::<u64>() as f64;
            (n - 1.0, shift * n.sqrt())
        }
    };
    let t = student::quantile_above(degrees, tail);
    let low = if sides == Sides::Upper { 0.0 } else { noncentral_above(degrees, t, -delta) };
    let high = if sides == Sides::Lower { 0.0 } else { noncentral_above(degrees, t, delta) };
    Planned { nominal: low + high, low, high }
}
