//! The claim `test` with known spread: the test really rejects as often as planned.
//!
//! With Z the standardized statistic and c the normal critical value, a two-sided test rejects when |Z| > c, a
//! `lower` one when Z < −c, an `upper` one when Z > c. Without a shift the compared number is the size. With a
//! shift of δ (true minus hypothesised mean, in units of σ) the statistic is Z + d with d = δ√n, and the compared
//! number is the power; the planned power is that of a normal Z. `miss_low` and `miss_high` are the rejections on
//! the low and on the high side.
//!
//! σ is the summand's own; with unlike parts the root mean square of their σ; with two groups √((σ₁² + σ₂²)/2), so
//! that d = δ √((σ₁² + σ₂²)/2)/√(σ₁²/n₁ + σ₂²/n₂).
//!
//! Example: 25 normal values, upper 5 % test, δ = 0.5: d = 2.5, power = P(Z > 1.645 − 2.5) = 0.8037.

use super::interval::{critical_value, tail_probability};
use super::{at_rounded_z, compared};
use crate::figures::{NEVER, plus};
use crate::prepared::Prepared;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Sides, Source, Spread, Tolerance};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::StandardizedSum;

/// The shift of the standardized statistic, d, for a shift of δ units of σ.
pub(super) fn shift_in_z(prepared: &Prepared, counts: &[u64], shift: f64) -> f64 {
    let n = counts.iter().sum::<u64>() as f64;
    match prepared.scenario.source {
        Source::Groups { .. } => shift * group_ratio(prepared, counts),
        _ => shift * n.sqrt(),
    }
}

/// √((σ₁² + σ₂²)/2)/√(σ₁²/n₁ + σ₂²/n₂).
pub(super) fn group_ratio(prepared: &Prepared, counts: &[u64]) -> f64 {
    let sds = prepared.laws.iter().map(|law| law.moments.variance.unwrap_or(0.0).sqrt()).collect::<Vec<_>>();
    match (sds.as_slice(), counts) {
        ([first, second], [n_first, n_second]) => {
            let pooled = first.hypot(*second) / std::f64::consts::SQRT_2;
            pooled / (first / (*n_first as f64).sqrt()).hypot(second / (*n_second as f64).sqrt())
        }
        _ => 0.0,
    }
}

/// Computes the claim from the law of the standardized statistic.
pub(super) fn evaluate(
    sum: &dyn StandardizedSum,
    significance: f64,
    sides: Sides,
    shift_z: Option<f64>,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let c = critical_value(significance, sides);
    let d = shift_z.unwrap_or(0.0);
    let rounding = 4.0 * f64::EPSILON * (c.abs() + d.abs());
    let low = match sides {
        Sides::Upper => NEVER,
        _ => at_rounded_z(sum.below(-c - d), sum, c + d, rounding),
    };
    let high = match sides {
        Sides::Lower => NEVER,
        _ => at_rounded_z(sum.above(c - d), sum, c - d, rounding),
    };
    let planned_low = if sides == Sides::Upper { 0.0 } else { normal::at_or_below(-c - d) };
    let planned_high = if sides == Sides::Lower { 0.0 } else { normal::above(c - d) };
    let tail = tail_probability(significance, sides);
    let planned = match shift_z {
        None => Planned { nominal: significance, low: tail, high: tail },
        Some(_) => Planned { nominal: planned_low + planned_high, low: planned_low, high: planned_high },
    };
    facts(significance, sides, Spread::Known, &planned, low, high, tolerance)
}

/// What the plan promises.
pub(super) struct Planned {
    /// Size, or power where there is a shift.
    pub nominal: f64,
    /// Rejections on the low side.
    pub low: f64,
    /// Rejections on the high side.
    pub high: f64,
}

/// The claim from its rejections on each side.
pub(super) fn facts(
    significance: f64,
    sides: Sides,
    spread: Spread,
    planned: &Planned,
    low: Figure,
    high: Figure,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let claim = Claim::Test { significance, sides, spread, shift: None };
    ClaimFacts {
        miss_low: Some(low),
        miss_high: Some(high),
        nominal_miss_low: Some(if sides == Sides::Upper { 0.0 } else { planned.low }),
        nominal_miss_high: Some(if sides == Sides::Lower { 0.0 } else { planned.high }),
        ..compared(&claim, planned.nominal, plus(low, high), tolerance)
    }
}
