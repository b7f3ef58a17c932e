//! The claim `interval` with known spread: mean ± c·σ/√n really covers as often as it promises.
//!
//! With Z the standardized statistic and c the normal critical value, the whole interval lies *below* the true
//! value (`miss_low`) when Z < −c, and *above* it (`miss_high`) when Z > c; |Z| = c exactly covers.
//!
//! - two-sided: c = z(1 − (1 − level)/2); both misses count;
//! - `lower`: only a lower limit, statistic − c·sd with c = z(level). It fails by lying above the true value, so it
//!   misses high, when Z > c; it cannot miss low;
//! - `upper`: only an upper limit, statistic + c·sd. It fails by lying below the true value: it misses low.
//!
//! Example: 40 Bernoulli(1/2) values, level 0.95: c·√10 = 6.198, so the interval covers when the number of ones is
//! from 14 to 26, with probability 0.9615.

use super::{compared, covered};
use crate::figures::NEVER;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Sides, Spread, Tolerance};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::StandardizedSum;

/// The nominal probability of missing on one side.
pub(crate) fn tail_probability(missing: f64, sides: Sides) -> f64 {
    match sides {
        Sides::Two => missing / 2.0,
        Sides::Lower | Sides::Upper => missing,
    }
}

/// The normal critical value of an interval or test that is wrong with probability `missing`.
pub(crate) fn critical_value(missing: f64, sides: Sides) -> f64 {
    normal::quantile_above(tail_probability(missing, sides))
}

/// Computes the claim from the law of the standardized statistic.
pub(super) fn evaluate(
    sum: &dyn StandardizedSum,
    level: f64,
    sides: Sides,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let c = critical_value(1.0 - level, sides);
    let low = if sides == Sides::Lower { NEVER } else { sum.below(-c) };
    let high = if sides == Sides::Upper { NEVER } else { sum.above(c) };
    facts(level, sides, Spread::Known, low, high, covered(low, high), tolerance)
}

/// The claim from its misses; a side that an interval does not have never misses.
pub(super) fn facts(
    level: f64,
    sides: Sides,
    spread: Spread,
    low: Figure,
    high: Figure,
    covered: Figure,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let tail = tail_probability(1.0 - level, sides);
    let claim = Claim::Interval { level, sides, spread };
    ClaimFacts {
        miss_low: Some(low),
        miss_high: Some(high),
        nominal_miss_low: Some(if sides == Sides::Lower { 0.0 } else { tail }),
        nominal_miss_high: Some(if sides == Sides::Upper { 0.0 } else { tail }),
        ..compared(&claim, level, covered, tolerance)
    }
}
