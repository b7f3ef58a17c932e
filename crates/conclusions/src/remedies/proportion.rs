//! Intervals for a proportion, where the summand takes two values: score (Wilson), Agresti–Coull, Clopper–Pearson
//! and Jeffreys, with their exact coverage.
//!
//! With K ~ binomial(n, p) the count of the larger value, each interval's limits grow with k, so that the interval
//! covers p exactly for k in a range [first, last], found by bisection; the misses are binomial tails. Sources:
//! Wilson 1927; Agresti and Coull 1998; Clopper and Pearson 1934; Brown, Cai and DasGupta 2001 (Jeffreys, with the
//! lower limit 0 at k = 0 and the upper limit 1 at k = n).

use super::near;
use crate::bounds::two_valued;
use crate::claims::{covered, critical_value, tail_probability};
use crate::figures::NEVER;
use crate::prepared::Prepared;
use crate::report::{ClaimFacts, Remedy};
use crate::scenario::{Claim, Sides, Source};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::special::{beta, discrete};

/// What an interval's limits say of one k.
struct Method {
    name: &'static str,
    note: &'static str,
    /// Whether the lower limit for k successes is at most p.
    lower_reaches: fn(&Case, u64) -> bool,
    /// Whether the upper limit for k successes is at least p.
    upper_reaches: fn(&Case, u64) -> bool,
}

/// One proportion: n trials, success probability p, nominal tail α and its normal quantile z.
struct Case {
    n: u64,
    p: f64,
    tail: f64,
    z: f64,
}

const METHODS: &[Method] = &[
    Method {
        name: "score interval (Wilson)",
        note: "the spread at the candidate value instead of the estimated one",
        lower_reaches: |case, k| case.score(k) <= case.z,
        upper_reaches: |case, k| case.score(k) >= -case.z,
    },
    Method {
        name: "Agresti–Coull interval",
        note: "adds z²/2 successes and failures first",
        lower_reaches: |case, k| case.agresti_coull(k).0 <= case.p,
        upper_reaches: |case, k| case.agresti_coull(k).1 >= case.p,
    },
    Method {
        name: "Jeffreys interval",
        note: "beta quantiles with half a success and half a failure added",
        lower_reaches: |case, k| k == 0 || case.jeffreys_below(k) >= case.tail,
        upper_reaches: |case, k| k == case.n || case.jeffreys_above(k) >= case.tail,
    },
    Method {
        name: "Clopper–Pearson interval",
        note: "never covers less than it promises, usually more",
        lower_reaches: |case, k| k == 0 || case.at_least(k) >= case.tail,
        upper_reaches: |case, k| case.at_most(k) >= case.tail,
    },
];

impl Case {
    fn score(&self, k: u64) -> f64 {
        let n = self.n as f64;
        (k as f64 - n * self.p) / (n * self.p * (1.0 - self.p)).sqrt()
    }

    fn agresti_coull(&self, k: u64) -> (f64, f64) {
        let size = self.n as f64 + self.z * self.z;
        let centre = (k as f64 + self.z * self.z / 2.0) / size;
        let half = self.z * (centre * (1.0 - centre) / size).max(0.0).sqrt();
        (centre - half, centre + half)
    }

    fn jeffreys_below(&self, k: u64) -> f64 {
        beta::below(k as f64 + 0.5, (self.n - k) as f64 + 0.5, self.p)
    }

    fn jeffreys_above(&self, k: u64) -> f64 {
        beta::above(k as f64 + 0.5, (self.n - k) as f64 + 0.5, self.p)
    }

    fn at_least(&self, k: u64) -> f64 {
        if k == 0 { 1.0 } else { discrete::binomial_above(self.n, self.p, k - 1) }
    }

    fn at_most(&self, k: u64) -> f64 {
        discrete::binomial_at_or_below(self.n, self.p, k)
    }

    /// The first k whose upper limit reaches p, by bisection (the limits grow with k); n + 1 if none does.
    fn first(&self, method: &Method) -> u64 {
        first_true(self.n, |k| (method.upper_reaches)(self, k))
    }

    /// How many k have a lower limit that is at most p.
    fn reaching(&self, method: &Method) -> u64 {
        first_true(self.n, |k| !(method.lower_reaches)(self, k))
    }
}

/// The first k in 0..=n with a property that all larger k have; n + 1 if none has it.
fn first_true(n: u64, has: impl Fn(u64) -> bool) -> u64 {
    let (mut low, mut high) = (0, n + 1);
    while low < high {
        let middle = low + (high - low) / 2;
        if has(middle) { high = middle } else { low = middle + 1 }
    }
    low
}

/// The rows, for an interval about the mean (or total) of a two-valued law.
pub(super) fn remedies(prepared: &Prepared, claim: &ClaimFacts) -> Vec<Remedy> {
    let (Claim::Interval { level, sides, .. }, Source::Like { n, .. }, [law]) =
        (prepared.scenario.claim, &prepared.scenario.source, prepared.laws.as_slice())
    else {
        return Vec::new();
    };
    let Some(p) = two_valued(law) else { return Vec::new() };
    let tail = tail_probability(1.0 - level, sides);
    let case = Case { n: *n, p, tail, z: critical_value(1.0 - level, sides) };
    METHODS
        .iter()
        .map(|method| {
            let (low, high) = misses(&case, method, sides);
            near(prepared, method.name, covered(low, high), claim, method.note)
        })
        .collect()
}

/// How often the whole interval lies below p, and above it. The binomial tails are accurate to 1e-12.
fn misses(case: &Case, method: &Method, sides: Sides) -> (Figure, Figure) {
    let tail = |value: f64| Figure::bound(value, 1e-12);
    let low = match (sides, case.first(method)) {
        (Sides::Lower, _) | (_, 0) => NEVER,
        (_, first) => tail(case.at_most(first - 1)),
    };
    let high = match (sides, case.reaching(method)) {
        (Sides::Upper, _) => NEVER,
        (_, reaching) if reaching > case.n => NEVER,
        (_, reaching) => tail(case.at_least(reaching)),
    };
    (low, high)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Coverage by summing the mass over every k whose interval contains p: the slow obvious twin.
    fn slow(case: &Case, method: &Method) -> f64 {
        (0..=case.n)
            .filter(|k| (method.lower_reaches)(case, *k) && (method.upper_reaches)(case, *k))
            .map(|k| discrete::binomial_mass(case.n, case.p, k))
            .sum()
    }

    #[test]
    fn bisection_agrees_with_enumeration() {
        for (n, p) in [(17, 0.5), (30, 0.2), (98, 0.2), (100, 0.106), (591, 0.005), (5, 0.02), (1, 0.3)] {
            let case = Case { n, p, tail: 0.025, z: critical_value(0.05, Sides::Two) };
            for method in METHODS {
                let (low, high) = misses(&case, method, Sides::Two);
                let found = covered(low, high).value;
                assert!((found - slow(&case, method)).abs() < 1e-12, "{} n {n} p {p}: {found}", method.name);
            }
        }
    }

    /// Coverage at n, p for Wilson, Agresti–Coull, Jeffreys, Clopper–Pearson from the limits of
    /// `scipy.stats.binomtest` and `scipy.stats.beta` (SciPy 1.17.1), written by `references/claims.py`.
    #[test]
    fn coverage_agrees_with_scipy() {
        let references: &[(u64, f64, [f64; 4])] = include!("../../references/proportion.in");
        for (n, p, expected) in references {
            let case = Case { n: *n, p: *p, tail: 0.025, z: critical_value(0.05, Sides::Two) };
            for (method, expected) in METHODS.iter().zip(expected) {
                let (low, high) = misses(&case, method, Sides::Two);
                let found = covered(low, high).value;
                assert!((found - expected).abs() < 1e-10, "{} n {n} p {p}: {found} {expected}", method.name);
            }
        }
    }
}
