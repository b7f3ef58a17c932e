//! The claim `quantile`: the p-quantile of the statistic is where the normal curve puts it.
//!
//! Compared in standard deviations of the statistic: the smallest z with P(Z ≤ z) ≥ p against Φ⁻¹(p). The same two
//! numbers in the quantity's unit are reported beside them. A relative tolerance is a share of the normal quantile
//! in the quantity's unit.
//!
//! Example: the 0.99-quantile of the sum of 10 exponential values of mean 1: the gamma quantile 18.783 is at
//! z = (18.783 − 10)/√10 = 2.777, against 2.326.

use super::compared;
use crate::prepared::Scale;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Tolerance};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::StandardizedSum;

/// Computes the claim from the law of the standardized sum.
pub(super) fn evaluate(
    sum: &dyn StandardizedSum,
    scale: &Scale,
    p: f64,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let nominal = normal::quantile(p);
    let actual = sum.quantile(p);
    let normal_quantile = scale.value_of(nominal);
    let allowed = match tolerance {
        Tolerance::Absolute(size) => *size,
        Tolerance::Relative(share) => share * normal_quantile.abs() / scale.sd(),
    };
    let in_units = Figure {
        value: scale.value_of(actual.value),
        error: actual.error * scale.sd() + scale.value_rounding(actual.value),
        basis: actual.basis,
    };
    ClaimFacts {
        allowed,
        normal_quantile: Some(normal_quantile),
        actual_quantile: Some(in_units),
        ..compared(&Claim::Quantile { p }, nominal, actual, tolerance)
    }
}
