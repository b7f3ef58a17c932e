//! The claim `curve`: the whole law of the standardized sum is the normal one, within the tolerance.
//!
//! Compared: sup over z of |P(Z ≤ z) − Φ(z)| against 0. Example: 30 exponential summands have distance 0.0243, so
//! a tolerance of 0.03 holds and one of 0.02 fails. By hand for one exponential summand: P(Z ≤ z) = 1 − e^(−1−z) from
//! z = −1 on and 0 before, so the largest gap is Φ(−1) − 0 = 0.1587, just at z = −1.

use super::compared;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Tolerance};
use gaussgap_simulation::sum::StandardizedSum;

/// Computes the claim from the distance.
pub(super) fn evaluate(sum: &dyn StandardizedSum, tolerance: &Tolerance) -> ClaimFacts {
    compared(&Claim::Curve, 0.0, sum.kolmogorov().kolmogorov, tolerance)
}
