//! The claim `threshold`: the chance that the statistic is at most (at least) a value.
//!
//! With z the standardized value, the actual probability is P(Z ≤ z) (or P(Z ≥ z)), and the normal one Φ(z) (or
//! 1 − Φ(z)), without continuity correction. A value at which the statistic has an atom includes it.
//!
//! Example: 100 faults-or-not with p = 0.2, chance of at most 14 faults: z = (14 − 20)/4 = −1.5, normal 0.0668,
//! actual (binomial) 0.0804.

use super::{at_rounded_z, compared};
use crate::prepared::Scale;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Direction, Tolerance};
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::StandardizedSum;

/// Computes the claim from the law of the standardized sum.
pub(super) fn evaluate(
    sum: &dyn StandardizedSum,
    scale: &Scale,
    at: f64,
    direction: Direction,
    tolerance: &Tolerance,
) -> ClaimFacts {
    let (z, rounding) = scale.z_of(at);
    let (actual, nominal) = match direction {
        Direction::AtMost => (sum.at_or_below(z), normal::at_or_below(z)),
        Direction::AtLeast => (sum.at_or_above(z), normal::above(z)),
    };
    let actual = at_rounded_z(actual, sum, z, rounding);
    compared(&Claim::Threshold { at, direction }, nominal, actual, tolerance)
}
