//! The claim `deviation`: P(|statistic − its expectation| > ε), actual, normal, and as guaranteed.
//!
//! With e = ε/sd of the statistic the actual probability is P(Z < −e) + P(Z > e) and the normal one 2(1 − Φ(e)). A
//! statistic at exactly ε from its expectation does not count. The statistic is the mean, the total or the
//! difference of means, as in the scenario.
//!
//! Example: 100 Bernoulli(1/2) values, ε = 0.1: e = 2, normal 0.0455, actual P(|S − 50| > 10) = 0.0352;
//! Chebyshev 0.25/(100·0.01) = 1/4, Hoeffding 2e^(−2·100·0.01) = 2e⁻² = 0.2707.

use super::guarantees::{METHODS, Sizes, guarantee, normal_probability, smallest_n};
use super::{at_rounded_z, compared};
use crate::figures::plus;
use crate::prepared::{Prepared, Scale};
use crate::report::{ClaimFacts, Guarantee};
use crate::scenario::{Claim, Source, Statistic, Tolerance};
use gaussgap_simulation::sum::StandardizedSum;
use std::collections::BTreeMap;

/// Computes the claim from the law of the standardized sum.
pub(super) fn evaluate(
    sum: &dyn StandardizedSum,
    scale: &Scale,
    epsilon: f64,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let e = epsilon / scale.sd();
    let rounding = 8.0 * f64::EPSILON * e + scale.z_of(scale.value_of(0.0)).1;
    let low = at_rounded_z(sum.below(-e), sum, e, rounding);
    let high = at_rounded_z(sum.above(e), sum, e, rounding);
    let claim = Claim::Deviation { epsilon, probability: None };
    compared(&claim, normal_probability(e), plus(low, high), tolerance)
}

/// Adds what the classical inequalities guarantee at the planned size.
pub(crate) fn add_guarantees(prepared: &Prepared, epsilon: f64, facts: &mut ClaimFacts) {
    let sizes = Sizes::new(prepared, &prepared.planned, epsilon);
    let rows = METHODS.iter().map(|method| Guarantee {
        name: method.name.to_owned(),
        value: sizes.as_ref().and_then(|sizes| guarantee(method.kind, sizes)),
        conditions: method.conditions.to_owned(),
        source: method.source.to_owned(),
    });
    facts.guarantees = Some(rows.collect());
}

/// The n that the normal approximation and every guarantee need for P(|statistic − expectation| > ε) ≤ δ, by
/// name; `None` where a larger n does not help (a total strays ever farther).
pub(crate) fn needed_n_of(
    prepared: &Prepared,
    epsilon: f64,
    probability: f64,
) -> Option<BTreeMap<String, Option<u64>>> {
    let shrinks = matches!(
        (&prepared.scenario.source, prepared.scenario.statistic),
        (Source::Groups { .. }, _) | (Source::Like { .. }, Statistic::Mean)
    );
    if !shrinks {
        return None;
    }
    let sizes = |n: u64| Sizes::new(prepared, &prepared.counts_at(n)?, epsilon);
    let mut needed = BTreeMap::new();
    let normal = smallest_n(prepared.smallest_n(), |n| {
        sizes(n).is_some_and(|sizes| normal_probability(sizes.standardized()) <= probability)
    });
    needed.insert("normal".to_owned(), normal);
    for method in METHODS {
        let smallest = smallest_n(prepared.smallest_n(), |n| {
            sizes(n)
                .and_then(|sizes| guarantee(method.kind, &sizes))
                .is_some_and(|value| value <= probability)
        });
        needed.insert(method.name.to_owned(), smallest);
    }
    Some(needed)
}
