//! Claims: what the normal approximation promises for one use, and what really happens.

mod curve;
mod deviation;
mod guarantees;
mod interval;
mod noncentral;
mod quantile;
mod studentized;
mod test;
mod threshold;

pub(crate) use deviation::{add_guarantees, needed_n_of};
pub(crate) use interval::{critical_value, tail_probability};
pub(crate) use studentized::{StudentizedBudget, evaluate_studentized};

use crate::figures::weaker;
use crate::prepared::{Prepared, Scale};
use crate::report::{ClaimFacts, State};
use crate::scenario::{Claim, Spread, Tolerance};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::sum::StandardizedSum;

/// Whether a claim rests on a studentized statistic, which the law of the sum alone does not decide.
pub(crate) fn is_studentized(claim: &Claim) -> bool {
    claim.spread() == Some(Spread::Estimated)
}

/// Computes a claim that the law of the standardized sum decides (every claim but the studentized ones).
pub(crate) fn evaluate(prepared: &Prepared, counts: &[u64], sum: &dyn StandardizedSum) -> ClaimFacts {
    let scale = prepared.scale(&sum.moments());
    let tolerance = prepared.scenario.tolerance;
    match prepared.scenario.claim {
        Claim::Curve => curve::evaluate(sum, &tolerance),
        Claim::Interval { level, sides, .. } => interval::evaluate(sum, level, sides, &tolerance),
        Claim::Test { significance, sides, shift, .. } => {
            let shift_z = shift.map(|shift| test::shift_in_z(prepared, counts, shift));
            test::evaluate(sum, significance, sides, shift_z, &tolerance)
        }
        Claim::Threshold { at, direction } => threshold::evaluate(sum, &scale, at, direction, &tolerance),
        Claim::Quantile { p } => quantile::evaluate(sum, &scale, p, &tolerance),
        Claim::Deviation { epsilon, .. } => deviation::evaluate(sum, &scale, epsilon, &tolerance),
    }
}

/// A claim compared with its nominal number, without the fields of particular kinds.
pub(crate) fn compared(claim: &Claim, nominal: f64, actual: Figure, tolerance: &Tolerance) -> ClaimFacts {
    ClaimFacts {
        kind: claim.kind().to_owned(),
        nominal,
        actual: Some(actual),
        difference: Some(actual.value - nominal),
        allowed: tolerance.allowed(nominal),
        miss_low: None,
        miss_high: None,
        nominal_miss_low: None,
        nominal_miss_high: None,
        normal_quantile: None,
        actual_quantile: None,
        guarantees: None,
        needed_n: None,
    }
}

/// A claim whose actual number does not exist: no finite variance, or no interval from one observation.
pub(crate) fn without_figure(claim: &Claim, tolerance: &Tolerance, planned_power: Option<f64>) -> ClaimFacts {
    use gaussgap_simulation::special::normal;
    let nominal = match claim {
        Claim::Curve | Claim::Threshold { .. } | Claim::Deviation { .. } => 0.0,
        Claim::Interval { level, .. } => *level,
        Claim::Test { significance, .. } => planned_power.unwrap_or(*significance),
        Claim::Quantile { p } => normal::quantile(*p),
    };
    let facts = compared(claim, nominal, Figure::bound(0.0, 0.0), tolerance);
    ClaimFacts { actual: None, difference: None, ..facts }
}

/// The verdict on a computed claim: it holds only if the difference plus its error is within the tolerance, and
/// fails only if the difference minus its error is beyond it. A claim without a figure fails.
pub(crate) fn state(facts: &ClaimFacts) -> State {
    let (Some(actual), Some(difference)) = (facts.actual, facts.difference) else { return State::Fails };
    let rounding = f64::EPSILON * facts.nominal.abs();
    let error = actual.error + rounding;
    if difference.abs() + error <= facts.allowed {
        State::Holds
    } else if difference.abs() - error > facts.allowed {
        State::Fails
    } else {
        State::Undecided
    }
}

/// What covers when the two sides miss with these probabilities.
pub(crate) fn covered(low: Figure, high: Figure) -> Figure {
    let value = (1.0 - low.value - high.value).clamp(0.0, 1.0);
    let basis = weaker(low.basis, high.basis);
    Figure { value, error: low.error + high.error + 2.0 * f64::EPSILON, basis }
}

/// A probability read off the law at a z that carries a rounding error of its own.
///
/// The law may be as steep as a few times the normal density there; a lattice law is a step function whose steps
/// the routes recognize within rounding, so it adds nothing.
pub(crate) fn at_rounded_z(figure: Figure, sum: &dyn StandardizedSum, z: f64, rounding: f64) -> Figure {
    use gaussgap_simulation::special::normal;
    if sum.lattice_span().is_some() {
        return figure;
    }
    let steepness = 8.0 * normal::density((z.abs() - rounding).max(0.0)).max(figure.value * z.abs());
    Figure { error: figure.error + rounding * steepness.min(8.0), ..figure }
}

/// The scale of a claim, for rooms that evaluate parts of it again.
pub(crate) fn scale_of(prepared: &Prepared, sum: &dyn StandardizedSum) -> Scale {
    prepared.scale(&sum.moments())
}

/// The shift of the standardized statistic that a test plans to detect at the planned size; 0 for other claims.
pub(crate) fn shift_of(prepared: &Prepared) -> f64 {
    match prepared.scenario.claim {
        Claim::Test { shift: Some(shift), .. } => test::shift_in_z(prepared, &prepared.planned, shift),
        _ => 0.0,
    }
}
